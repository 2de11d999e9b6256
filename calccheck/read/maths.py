r"""Dollar maths as claims: a subset of LaTeX turned into the tokens of the expression language.

The subset: fractions, subscripts, ``\mathrm{}`` and ``\text{}``, ``\cdot``, ``\times``, ``\div``, ``\parallel``, brackets with
``\left`` and ``\right``, roots, powers, relations, ``\angle``, ``^\circ``, functions, Greek letters, aligned rows. In
mathematics each letter is a name of its own, so ``RC`` is R times C and ``V_b`` a name with a subscript.
"""

from __future__ import annotations

import re
from collections.abc import Sequence

from calccheck.arithmetic import Doubt
from calccheck.model import Member
from calccheck.read.expression import parse_chain
from calccheck.read.tokens import LONGEST, RELATIONS, Token, tokens
from calccheck.read.words import FUNCTIONS
from calccheck.source import Piece
from calccheck.units import LOOKALIKES

_RAW = re.compile(
    r"""(?P<row>\\\\)|(?P<command>\\(?:[A-Za-z]+|.))|(?P<number>\d+(?:\.\d+)?|\.\d+)
    |(?P<letter>[^\W\d_])|(?P<space>\s+|~|&)|(?P<other>.)""",
    re.VERBOSE | re.DOTALL,
)
_OPERATORS = {
    "times": "×", "cdot": "×", "div": "÷", "parallel": "∥", "Vert": "∥", "approx": "≈", "simeq": "≈", "le": "≤", "leq": "≤",
    "leqslant": "≤", "ge": "≥", "geq": "≥", "geqslant": "≥", "lt": "<", "gt": ">", "pm": "±", "angle": "∠", "dots": "…",
    "ldots": "…", "cdots": "…", "%": "%", "vert": "|", "lvert": "|", "rvert": "|", "circ": "°", "degree": "°", "sqrt": "√",
    "{": "(", "}": ")",
}  # fmt: skip
_GAPS = {
    ",",
    ";",
    ":",
    "!",
    " ",
    "quad",
    "qquad",
    "left",
    "right",
    "displaystyle",
    "textstyle",
    "big",
    "Big",
    "bigl",
    "bigr",
}
GREEK = {
    "alpha": "α", "beta": "β", "gamma": "γ", "delta": "δ", "Delta": "Δ", "epsilon": "ε", "varepsilon": "ε", "eta": "η",
    "theta": "θ", "vartheta": "ϑ", "kappa": "κ", "lambda": "λ", "mu": "µ", "nu": "ν", "pi": "π", "rho": "ρ", "sigma": "σ",
    "tau": "τ", "phi": "φ", "varphi": "φ", "Phi": "Φ", "omega": "ω", "Omega": "Ω", "ohm": "Ω",
}  # fmt: skip
_UPRIGHT = {"mathrm", "text", "textrm", "operatorname", "mathit", "mathsf", "textit"}
_ENVIRONMENT = re.compile(r"\\(?:begin|end)\{(aligned|align\*?|split|gathered|equation\*?)\}")
_ROW_END = re.compile(r"\\\\(?:\[[^\]]*\])?")
_RELATION = re.compile(r"[=≈<≤>≥]|\\(?:approx|simeq|leq?(?:slant)?|geq?(?:slant)?|lt|gt)(?![A-Za-z])")
_PLAIN = {"+": "+", "-": "-", "*": "×", "/": "÷", "(": "(", ")": ")", "[": "(", "]": ")", "|": "|", ",": ",", "=": "="}


def has_relation(text: str) -> bool:
    """Whether maths states something."""
    return _RELATION.search(text) is not None


def rows(piece: Piece) -> list[Piece]:
    """The statements of a display: rows that start with a relation or a sign continue the row above."""
    text = _ENVIRONMENT.sub(lambda m: " " * len(m[0]), piece.text)
    found: list[tuple[int, int]] = []
    starts = [0, *(m.end() for m in _ROW_END.finditer(text))]
    ends = [*(m.start() for m in _ROW_END.finditer(text)), len(text)]
    for start, end in zip(starts, ends, strict=True):
        lead = re.sub(r"^[\s&{}]+", "", text[start:end])
        if not lead:
            continue
        goes_on = _RELATION.match(lead) is not None or lead[0] in "+-−" or lead.startswith((r"\times", r"\cdot"))
        if found and goes_on:
            found[-1] = (found[-1][0], end)
        else:
            found.append((start, end))
    return [Piece(text[a:b], piece.at[a : b + 1]).strip() for a, b in found]


def parse_maths(piece: Piece) -> tuple[Member, ...]:
    """A chain of maths. Raises ``Doubt`` with the place and what was not understood."""
    if len(piece.text) > LONGEST:
        raise Doubt(f"longer than {LONGEST} characters; part it", piece.span(0, 40))
    reader = Reader(piece)
    seen = [*reader.until_end(), Token("end", "", len(piece.text), len(piece.text))]
    return parse_chain(piece, seen)


class Reader:
    """The state of one conversion: LaTeX's own tokens and how far they are taken."""

    __slots__ = ("at", "piece", "raw")

    def __init__(self, piece: Piece) -> None:
        self.piece, self.at = piece, 0
        text = piece.text.translate(LOOKALIKES)
        self.raw = [(m.lastgroup or "", m.group(), m.start(), m.end()) for m in _RAW.finditer(text)]

    def fail(self, reason: str, start: int, end: int) -> Doubt:
        """A doubt at a place."""
        return Doubt(reason, self.piece.span(start, max(end, start + 1)))

    def until_end(self) -> list[Token]:
        """All that is left."""
        found: list[Token] = []
        while self.at < len(self.raw):
            found += self.next(found)
        return found

    def next(self, before: Sequence[Token]) -> list[Token]:
        """The tokens of the next LaTeX token with all that belongs to it."""
        kind, text, start, end = self.raw[self.at]
        self.at += 1
        if kind in ("space", "row"):
            return []
        if kind == "number":
            return [Token("number", text, start, end)]
        if kind == "letter":
            return self.name(text, start, end)
        if kind == "command":
            return self.command(text[1:], start, end, before)
        return self.sign(text, start, end, before)

    def sign(self, text: str, start: int, end: int, before: Sequence[Token]) -> list[Token]:
        """A sign that stands for itself, a bare group, a power."""
        if text == "{":
            self.at -= 1
            return self.group(start)
        if text == "^":
            return self.raised(start, end)
        if text == "_":
            raise self.fail("a subscript belongs behind a letter", start, end)
        if text in RELATIONS or text in _PLAIN or text in "∥∠…±°%×·÷√":
            return [Token("operator", _PLAIN.get(text, text), start, end)]
        raise self.fail(f"{text} means nothing in maths here", start, end)

    def command(self, name: str, start: int, end: int, before: Sequence[Token]) -> list[Token]:
        """A command of the subset."""
        if name in _GAPS:
            return self.after_side(name)
        if name in ("frac", "dfrac", "tfrac"):
            over, under = self.group(start), self.group(start)
            opens, closes = Token("operator", "(", start, start), Token("operator", ")", self.here(), self.here())
            return [opens, *over, Token("operator", "÷", start, end), *under, closes]
        if name in _UPRIGHT:
            return self.upright(start)
        if name in FUNCTIONS or name == "log":
            return [self.function(name, start, end)]
        if name in _OPERATORS:
            return [Token("operator", _OPERATORS[name], start, end)]
        if name in GREEK:
            return self.name(GREEK[name], start, end)
        raise self.fail(f"\\{name} lies outside of the maths that is read", start, end)

    def after_side(self, name: str) -> list[Token]:
        """Nothing for a gap; ``\\left.`` and ``\\right.`` draw no bracket."""
        if name in ("left", "right") and self.at < len(self.raw) and self.raw[self.at][1] == ".":
            self.at += 1
        return []

    def function(self, name: str, start: int, end: int) -> Token:
        """``\\ln``, ``\\log_{10}``."""
        if name == "log":
            if not self.follows("_"):
                raise self.fail("\\log has no base: write \\log_{10} or \\ln", start, end)
            self.at += 1
            if "".join(t.text for t in self.group(start) if t.kind == "number") != "10":
                raise self.fail("logarithms are read to the base 10 or e", start, end)
            name = "log10"
        return Token("word", name, start, self.here())

    def follows(self, text: str) -> bool:
        """Whether the next token is this sign."""
        return self.at < len(self.raw) and self.raw[self.at][1] == text

    def here(self) -> int:
        """Where the last taken token ends."""
        return self.raw[self.at - 1][3] if self.at else 0

    def skip_space(self) -> None:
        """Pass over blanks."""
        while self.at < len(self.raw) and self.raw[self.at][0] == "space":
            self.at += 1

    def group(self, opened: int) -> list[Token]:
        """The next argument, in brackets of our own."""
        self.skip_space()
        if self.at >= len(self.raw):
            raise self.fail("an argument is missing behind this", opened, opened + 1)
        start = self.raw[self.at][2]
        if not self.follows("{"):
            inner = self.next(())
        else:
            self.at += 1
            inner = []
            while not self.follows("}"):
                if self.at >= len(self.raw):
                    raise self.fail("expected } to close this", start, start + 1)
                inner += self.next(inner)
            self.at += 1
        return [Token("operator", "(", start, start), *inner, Token("operator", ")", self.here(), self.here())]

    def raised(self, start: int, end: int) -> list[Token]:
        """A power, ``^\\circ``, or a prime behind a name."""
        inner = self.group(start)[1:-1]
        if [t.text for t in inner] == ["°"]:
            return [self.degree(start)]
        if len(inner) == 1 and inner[0].kind == "number" and inner[0].text.isdigit():
            return [Token("superscript", inner[0].text, start, self.here())]
        if len(inner) == 2 and inner[0].text == "-" and inner[1].text.isdigit():
            return [Token("superscript", f"-{inner[1].text}", start, self.here())]
        opens, closes = Token("operator", "(", start, start), Token("operator", ")", self.here(), self.here())
        return [Token("operator", "^", start, end), opens, *inner, closes]

    def degree(self, start: int) -> Token:
        """``^\\circ``, or ``^\\circ\\mathrm{C}`` as one unit."""
        mark, end = self.at, self.here()
        upright = self.at < len(self.raw) and self.raw[self.at][1].lstrip("\\") in _UPRIGHT
        if self.follows("C") or upright:
            self.at += upright
            if self.spelt().strip() == "C":
                return Token("word", "°C", start, self.here())
        self.at = mark
        return Token("operator", "°", start, end)

    def spelt(self) -> str:
        """The next argument as text: a subscript or what ``\\mathrm{}`` holds."""
        self.skip_space()
        if self.at >= len(self.raw):
            return ""
        _, text, start, _ = self.raw[self.at]
        self.at += 1
        if text != "{":
            if text.startswith("\\") and text[1:] in _UPRIGHT:
                return self.spelt()
            return GREEK.get(text[1:], text) if text.startswith("\\") else text
        found = ""
        while not self.follows("}"):
            if self.at >= len(self.raw):
                raise self.fail("expected } to close this", start, start + 1)
            raw = self.raw[self.at][1]
            if raw.startswith("\\") or raw == "{":
                found += self.spelt()
                if raw[1:].isalpha() and raw[1:] not in _UPRIGHT:
                    self.skip_space()  # LaTeX takes a blank behind a command as its end
            else:
                found += raw
                self.at += 1
        self.at += 1
        return found

    def name(self, letter: str, start: int, end: int) -> list[Token]:
        """A letter with its subscript; a prefix and Ω are one unit."""
        if letter in "kMGmµ" and self.follows("\\Omega"):
            self.at += 1
            return [Token("word", letter + "Ω", start, self.here())]
        if not self.follows("_"):
            return [Token("word", letter, start, end)]
        self.at += 1
        return [_with_subscript(letter, self.spelt().strip(), start, self.here())]

    def upright(self, start: int) -> list[Token]:
        """``\\mathrm{V1}`` is the name as spelt, ``\\mathrm{k\\Omega}`` a unit, ``\\text{due to}`` words of the language."""
        offset = self.raw[self.at][3] if self.at < len(self.raw) else start
        words = self.spelt()
        if self.follows("_") and words.strip():
            self.at += 1
            return [_with_subscript(words.strip(), self.spelt().strip(), start, self.here())]
        if self.follows("\\Omega") and words in ("k", "M", "m", "G", "µ"):
            self.at += 1
            return [Token("word", words + "Ω", start, self.here())]
        inner = tokens(Piece(words, [self.piece.at[min(offset, len(self.piece.text))]] * (len(words) + 1)))[:-1]
        return [Token(t.kind, t.text, start, self.here()) for t in inner]


def _with_subscript(letter: str, subscript: str, start: int, end: int) -> Token:
    subscript = re.sub(r"\s*,\s*", ",", subscript)
    if re.fullmatch(r"\w+", subscript):
        return Token("word", f"{letter}_{subscript}", start, end)
    return Token("braced", f"{letter}_{{{subscript}}}", start, end)
