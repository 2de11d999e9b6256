"""From text to expression nodes: a parser by binding powers (Pratt, 1973), every node with its place in the sheet.

What two engineers would read differently is a ``Doubt``, never a guess.
"""

from __future__ import annotations

import math
import re
from dataclasses import replace
from decimal import Decimal, InvalidOperation
from fractions import Fraction
from typing import NoReturn, cast

from calccheck.arithmetic import Doubt
from calccheck.formula import (
    NO_QUALIFIERS,
    Binary,
    Call,
    Change,
    Group,
    Node,
    Number,
    Operator,
    Prefix,
    Qualifiers,
    Range,
    Reference,
    Unary,
    children,
)
from calccheck.model import Member, Relation
from calccheck.read.tokens import RELATIONS, Token, superscript, tokens
from calccheck.source import Piece, Span
from calccheck.units import HERTZ, NONE, PLAIN, UNITS, Unit, power, times

FUNCTIONS = {
    "sqrt", "exp", "ln", "log10", "sin", "cos", "tan", "asin", "acos", "atan", "abs", "min", "max", "dB",
}  # fmt: skip
PREFIXES = {"min", "max", "worst", "rss", "mag", "arg", "re", "im", "rms", "sigma", "yield"}
QUALIFIER_WORDS = {"due", "without", "with", "in", "at", "of"}
RESERVED = FUNCTIONS | PREFIXES | QUALIFIER_WORDS | {
    "to", "and", "as", "from", "open", "short", "shorted", "given", "case", "reference", "e", "j",
}  # fmt: skip
DEEPEST = 100
LONGEST_SUM = 200
LONGEST_CHAIN = 200
TALLEST = 220  # levels of operations, which are worked out one within the other

_BINDING = {"+": 10, "-": 10, "×": 20, "·": 20, "÷": 20, "∥": 30, "^": 50, "∠": 45}
_JUXTAPOSED = 40
_SIGN = 25  # −R1 ∥ R2 is −(R1 ∥ R2)
_CODE = re.compile(r"\d*[RKkMmµunpf]\d*")


def parse(piece: Piece) -> Node:
    """One expression. Raises ``Doubt`` with the place and, where one can be offered, the corrected text."""
    p = Parser(piece)
    node = p.expression()
    p.expect_end()
    p.refuse_tall(node)
    return node


def parse_value(piece: Piece) -> Node:
    """One expression or range: ``3.21 V … 3.45 V``, ``3.33 V ± 0.12 V``."""
    p = Parser(piece)
    node = p.member()
    p.expect_end()
    p.refuse_tall(node)
    return node


def parse_chain(piece: Piece, seen: list[Token] | None = None) -> tuple[Member, ...]:
    """``member = member ≤ member``: the members with the relation before each. ``seen``: tokens of dollar maths."""
    p = Parser(piece, seen)
    members: list[Member] = []
    relation = ""
    while True:
        start = p.now.start
        node = p.member()
        p.refuse_tall(node)
        if len(members) == LONGEST_CHAIN:
            p.fail(f"more than {LONGEST_CHAIN} members in one chain; part it")
        end = p.seen[p.at - 1].end
        text = piece.text[start:end]
        members.append(Member(cast(Relation, relation), node, text, piece.span(start, end)))
        if p.now.kind == "operator" and p.now.text in RELATIONS:
            relation = p.take().text
            continue
        p.expect_end()
        return tuple(members)


def hertz(node: Node) -> Fraction | None:
    """A printed frequency in hertz, an angular one (rad/s) over 2π; ``None`` for anything else."""
    if not isinstance(node, Number) or node.unit.dimension != HERTZ:
        return None
    value = Fraction(node.digits) * node.unit.factor
    if node.unit.text.endswith("Hz"):
        return value
    return value / (2 * Fraction(math.pi)) if node.unit.text in ("rad/s", "mrad/s") else None


def parse_qualifiers(piece: Piece) -> Qualifiers:
    """Qualifiers alone, as a table's edge holds them."""
    p = Parser(piece)
    found = p.qualifiers()
    p.expect_end()
    return found


class Parser:
    """The state of one parse: the tokens of a piece and how far they are taken."""

    __slots__ = ("at", "deep", "maths", "piece", "seen")

    def __init__(self, piece: Piece, seen: list[Token] | None = None) -> None:
        self.piece, self.seen, self.at, self.deep = piece, seen or tokens(piece), 0, 0
        self.maths = seen is not None

    @property
    def now(self) -> Token:
        """The next token."""
        return self.seen[self.at]

    def take(self) -> Token:
        """The next token, taken."""
        self.at += 1
        return self.seen[self.at - 1]

    def span(self, start: int, end: int | None = None) -> Span:
        """The place in the sheet from an offset in the piece to the last token taken."""
        return self.piece.span(start, self.seen[self.at - 1].end if end is None else end)

    def fail(self, reason: str, token: Token | None = None, suggestion: str = "") -> NoReturn:
        """Give up at a token."""
        t = token or self.now
        end = min(max(t.end, t.start + 1), len(self.piece.text))
        raise Doubt(reason, self.piece.span(max(0, min(t.start, end - 1)), end), suggestion)

    def refuse_tall(self, node: Node) -> None:
        """Operations within operations may not pile up beyond what can be worked out."""
        if len(self.seen) < TALLEST:
            return
        level, height = [node], 0
        while level:
            level, height = [c for n in level for c in children(n)], height + 1
            if height > TALLEST:
                raise Doubt(f"more than {TALLEST} operations within one another; part the formula", node.span)

    def expect_end(self) -> None:
        """Nothing may follow."""
        if self.now.kind != "end":
            self.fail(f"expected an operator or the end, found {self.shown(self.now)}")

    def shown(self, t: Token) -> str:
        """A token as written."""
        return "the end" if t.kind == "end" else self.piece.text[t.start : t.end]

    def is_operator(self, *texts: str) -> bool:
        """Whether the next token is one of these operators."""
        return self.now.kind == "operator" and self.now.text in texts

    # --- members -----------------------------------------------------------------------------------------------------

    def member(self) -> Node:
        """An expression or a range."""
        start = self.now.start
        node = self.expression()
        if self.is_operator("±"):
            self.take()
            return Range(node, self.expression(), self.span(start), centred=True)
        if self.is_operator("…") or (self.now.kind == "word" and self.now.text == "to"):
            self.take()
            high = self.expression()
            return Range(_with_unit_of(node, high), high, self.span(start))
        return node

    def expression(self, above: int = 0) -> Node:
        """An expression whose operators bind tighter than ``above``."""
        self.deep += 1
        if self.deep > DEEPEST:
            self.fail(f"brackets nested deeper than {DEEPEST}")
        start = self.now.start
        node = self.operand()
        for _ in range(LONGEST_SUM):
            further = self.operation(node, start, above)
            if further is None:
                self.deep -= 1
                return node
            node = further
        self.fail(f"more than {LONGEST_SUM} operations in a row; part the sum")

    def operation(self, left: Node, start: int, above: int) -> Node | None:
        """``left`` and the next operator with its operand, or nothing when none binds tighter than ``above``."""
        t = self.now
        if t.kind == "superscript":
            self.take()
            if len(t.text) > 4:
                self.fail("the power does not fit a floating-point number", t)
            exponent = Number(Decimal(superscript(t.text)), self.piece.span(t.start, t.end))
            return Binary("^", left, exponent, self.span(start))
        if t.kind == "word" and t.text in UNITS and _is_power_of_numbers(left):
            unit, unit_words = self.unit()  # 10⁻³ V
            return Group(left, self.span(start), unit, unit_words)
        if t.kind in ("number", "imaginary", "word", "braced") or self.is_operator("("):
            return self.juxtaposed(left, start, above)
        binding = _BINDING.get(t.text, 0) if t.kind == "operator" else 0
        if binding <= above:
            return None
        self.take()
        if t.text == "∠":
            return self.phasor(left, start)
        right = self.exponent() if t.text == "^" else self.expression(binding)
        if t.text == "÷" and isinstance(right, Binary) and right.operator == "·":
            raise Doubt(
                "what stands behind the stroke can be read two ways: put brackets around all that is below it",
                right.span,
            )
        sign = cast(Operator, "×" if t.text == "·" else t.text)
        return Binary(sign, left, right, self.span(start))

    def phasor(self, magnitude: Node, start: int) -> Node:
        """The angle behind ∠, and the unit that may stand behind the angle: ``10 ∠ 30° V``."""
        t = self.now
        sign = self.take() if self.is_operator("-", "+") else None
        angle = self.operand()
        if sign is not None and sign.text == "-":
            angle = Unary("-", angle, self.span(t.start))
        if isinstance(magnitude, Number) and not magnitude.unit.text:
            unit, unit_words = self.unit()
            magnitude = replace(magnitude, unit=unit, unit_words=unit_words)
        return Binary("∠", magnitude, angle, self.span(start))

    def exponent(self) -> Node:
        """What stands behind ^: its sign belongs to it alone, and a unit behind it would belong to the power."""
        t = self.now
        sign = self.take() if self.is_operator("-", "+") else None
        right = self.expression(_BINDING["^"] - 1)
        if isinstance(right, Number) and right.unit.text:
            self.fail("a unit behind an exponent: write 1e-3 A or 10^-3 × 1 A", t)
        return right if sign is None else Unary("-" if sign.text == "-" else "+", right, self.span(t.start))

    def juxtaposed(self, left: Node, start: int, above: int) -> Node | None:
        """``2 R1``, ``2(R1 + R2)``: a product without a sign."""
        t = self.now
        if t.kind == "word" and t.text in RESERVED - FUNCTIONS - {"e"}:
            return None
        if above >= _JUXTAPOSED:
            return None
        if t.kind in ("number", "imaginary"):
            self.fail(f"{self.shown(t)} follows without an operator; write × for a product")
        if isinstance(left, Unary) and left.sign == "√" and not isinstance(left.operand, Group):
            self.fail("a root without brackets beside a product can be read two ways")
        right = self.expression(_JUXTAPOSED)
        return Binary("·", left, right, self.span(start))

    # --- operands ----------------------------------------------------------------------------------------------------

    def operand(self) -> Node:
        """A number, a name or quantity, a function, a bracket, or one of these behind a sign."""
        t = self.take()
        if t.kind == "number":
            return self.number(t)
        if t.kind == "imaginary":
            value = self.number(t)
            return Binary(
                "·", Reference("j", self.piece.span(t.start, t.start + 1), text="j"), value, self.span(t.start)
            )
        if t.kind in ("word", "braced"):
            return self.word(t)
        if t.kind == "operator":
            if t.text in ("-", "+"):
                inner = self.expression(_SIGN)
                return Unary("-" if t.text == "-" else "+", inner, self.span(t.start))
            if t.text == "√":
                return Unary("√", self.expression(_JUXTAPOSED), self.span(t.start))
            if t.text == "(":
                return self.group(t)
            if t.text == "|":
                inner = self.expression()
                self.close("|", t)
                return Call("abs", (self.qualified(inner),), self.span(t.start))
        self.fail("expected a value behind this" if t.kind == "end" else f"expected a value, found {self.shown(t)}", t)

    def qualified(self, inner: Node) -> Node:
        """``|V_out| at 50 Hz``: qualifiers behind the bar belong to the quantity between the bars."""
        found = self.qualifiers()
        if found == NO_QUALIFIERS:
            return inner
        if not isinstance(inner, Reference) or inner.qualifiers != NO_QUALIFIERS:
            self.fail("qualifiers behind a bar belong to one quantity between the bars", self.seen[self.at - 1])
        return replace(inner, qualifiers=found)

    def group(self, opened: Token) -> Node:
        """A bracket and the unit that multiplies it where one stands behind."""
        inner = self.expression()
        self.close(")", opened)
        unit, unit_words = self.unit()
        return Group(inner, self.span(opened.start), unit, unit_words)

    def close(self, sign: str, opened: Token) -> None:
        """Take the closing sign."""
        if not self.is_operator(sign):
            self.fail(f"expected {sign} to close this, found {self.shown(self.now)}", opened)
        self.take()

    def number(self, t: Token) -> Node:
        """A number and the unit behind it."""
        follows = self.now
        if follows.kind == "word" and follows.start == t.end and follows.text not in UNITS and follows.text != "π":
            self.glued(t, follows)
        try:
            digits = Decimal(t.text)
        except InvalidOperation:  # an exponent of twenty digits
            self.fail("a number out of range", t)
        if abs(digits.adjusted()) > 300:
            self.fail("a number out of range", t)
        unit, unit_words = self.unit()
        return Number(digits, self.span(t.start), unit, unit_words, "e" in t.text.lower())

    def glued(self, t: Token, word: Token) -> NoReturn:
        """``2R1``, ``4k7``, ``4.7kOhm``: a number with something unknown right behind it."""
        written = t.text + word.text
        if _CODE.fullmatch(written):
            self.fail(f"{written} may be a value code or a product; write the value with its unit, or 2 × R", t)
        if word.text.lower().endswith(("ohm", "ohms")):
            prefix = word.text[: -4 if word.text.endswith("s") else -3]
            right = f"{t.text} {prefix.replace('K', 'k')}Ω"
            self.fail(f"{word.text} is no unit here; write {right}", word)
        if word.text[0] in "πω":
            self.fail(
                f"{word.text} reads as one name; part the factors: {t.text}{word.text[0]} × {word.text[1:]}", word
            )
        self.fail(f"{written} is no number with a unit; write {t.text} × {word.text} for a product", word)

    def unit(self) -> tuple[Unit, tuple[str, ...]]:
        """The unit at this place, ``PLAIN`` where none stands: ``mm²``, ``V/ms``, ``Ω·mm²/m``, ``J/(kg·K)``."""
        first = self.unit_word()
        if first is None:
            return PLAIN, ()
        unit, found = first
        while self.is_operator("÷", "·"):
            mark, sign = self.at, -1 if self.take().text == "÷" else 1
            bracket = sign < 0 and self.is_operator("(") and self.take()
            further = self.unit_word()
            if further is None:
                self.at = mark
                break
            unit, found = times(unit, further[0], sign), (*found, *further[1])
            while bracket and self.is_operator("·"):
                self.take()
                more = self.unit_word()
                if more is None:
                    break
                unit, found = times(unit, more[0], -1), (*found, *more[1])
            if bracket:
                if not self.is_operator(")"):
                    self.at = mark
                    break
                self.take()
        return unit, found

    def unit_word(self) -> tuple[Unit, tuple[str, ...]] | None:
        """One unit, raised to a power where one stands behind it."""
        t = self.now
        text = t.text if t.kind == "word" or (t.kind == "operator" and t.text in "%°") else ""
        known = UNITS.get(text)
        after = self.seen[self.at + 1] if known else t
        if known is None or (text in FUNCTIONS and after.text == "(" and after.start == t.end):
            return None
        self.take()
        exponent = 1
        if self.now.kind == "superscript" and len(self.now.text) <= 4:
            exponent = superscript(self.take().text)
        elif self.is_operator("^") and self.seen[self.at + 1].kind == "number" and known.dimension != NONE:
            self.take()
            raised = self.take()
            if not (raised.text.isdigit() and len(raised.text) <= 4):
                self.fail("a unit is raised to a whole number", raised)
            exponent = int(raised.text)
        if not 0 < abs(exponent) <= 9:
            self.fail("a unit is raised to a small whole number", t)
        return (power(known, exponent) if exponent != 1 else known), (text,)

    # --- names -------------------------------------------------------------------------------------------------------

    def word(self, t: Token) -> Node:
        """A function, a prefix with its quantity, or a name with its qualifiers."""
        opens = self.is_operator("(")
        if t.text in FUNCTIONS and opens:
            return self.call(t)
        if t.text in PREFIXES:
            return self.prefixed(t)
        if t.text in ("j", "e") or t.text == "π":
            return Reference(t.text, self.span(t.start), text=t.text)
        if t.text in RESERVED:
            self.fail(f"{t.text} is a word of the language and stands for no value here", t)
        return self.reference(t)

    def call(self, t: Token) -> Node:
        """``sqrt(x)``, ``max(a, b)``."""
        opened = self.take()
        arguments = [self.expression()]
        while self.is_operator(","):
            self.take()
            arguments.append(self.expression())
        self.close(")", opened)
        if t.text in ("min", "max") and len(arguments) == 1:
            raise Doubt(f"{t.text} over the tolerances is not read in this version", self.span(t.start))
        return Call(t.text, tuple(arguments), self.span(t.start))

    def prefixed(self, t: Token) -> Node:
        """``max V_out``: read, and left for the evaluation to say what it can do with it."""
        if self.now.kind not in ("word", "braced") or self.now.text in RESERVED:
            self.fail(f"expected a quantity behind {t.text}, found {self.shown(self.now)}")
        node = self.reference(self.take())
        return replace(node, prefix=cast(Prefix, t.text), span=self.span(t.start), text=f"{t.text} {node.text}")

    def reference(self, t: Token) -> Reference:
        """A name or quantity with its qualifiers."""
        letter, _, subscript = t.text.partition("_")
        braced = t.kind == "braced"
        parts = tuple(s.strip() for s in subscript.strip("{}").split(",")) if subscript else ()
        if braced and not all(parts):
            self.fail(f"{self.shown(t)}: a subscript is empty", t)
        found = self.qualifiers()
        return Reference(
            t.text, self.span(t.start), letter if parts else "", parts, braced, found,
            text=self.piece.text[t.start : self.seen[self.at - 1].end], maths=self.maths,
        )  # fmt: skip

    def qualifiers(self) -> Qualifiers:
        """``due to Vb and Ia``, ``without RL``, ``with RL as 10 kΩ``, ``in case hot``, ``at 50 Hz``, ``of bridge``."""
        found = Qualifiers()
        while self.now.kind == "word" and self.now.text in QUALIFIER_WORDS:
            t = self.take()
            if t.text == "due":
                self.once(found.due_to, t)
                found = replace(found, due_to=self.sources())
            elif t.text in ("without", "with"):
                found = replace(found, changes=(*found.changes, self.change(t)))
            elif t.text == "in":
                self.once(found.case, t)
                found = replace(found, case=self.case())
            elif t.text == "at":
                self.once(found.frequency is not None, t)
                found = replace(found, frequency=self.frequency())
            else:
                self.once(found.circuit, t)
                found = replace(found, circuit=self.name("a circuit's name behind of"))
        return found

    def once(self, present: object, t: Token) -> None:
        """A qualifier that may stand only once."""
        if present:
            self.fail(f"{t.text} stands twice behind one quantity", t)

    def name(self, what: str) -> str:
        """The next word, as a name."""
        if self.now.kind != "word":
            self.fail(f"expected {what}, found {self.shown(self.now)}")
        return self.take().text

    def keyword(self, word: str, behind: str) -> None:
        """A word that must stand here."""
        if self.now.text != word:
            self.fail(f"expected {word} behind {behind}, found {self.shown(self.now)}")
        self.take()

    def sources(self) -> tuple[str, ...]:
        """``to Vb and Ia``."""
        self.keyword("to", "due")
        names = [self.name("a source's name behind due to")]
        while self.now.kind == "word" and self.now.text == "and":
            self.take()
            names.append(self.name("a source's name behind and"))
        return tuple(names)

    def change(self, t: Token) -> Change:
        """``without RL``, ``with RL open``, ``with RL shorted``, ``with RL as 10 kΩ``."""
        part = self.name(f"a part's name behind {t.text}")
        if t.text == "without":
            return Change(part, "without", self.span(t.start))
        how = self.take()
        if how.text in ("open", "shorted"):
            return Change(part, "open" if how.text == "open" else "shorted", self.span(t.start))
        if how.text != "as":
            self.fail(f"expected open, shorted or as behind with {part}, found {self.shown(how)}", how)
        return Change(part, "as", self.span(t.start), self.replacement())

    def replacement(self) -> Node:
        """One value, value code or name behind ``as``."""
        t = self.take()
        if t.kind == "number":
            after = self.now
            if after.kind == "word" and after.start == t.end and after.text not in UNITS:
                self.take()  # a value code such as 4k7: the circuit's own reading knows what it means
                return Reference(t.text + after.text, self.span(t.start), text=t.text + after.text)
            return self.number(t)
        if t.kind in ("word", "braced"):
            return Reference(t.text, self.span(t.start), text=t.text)
        self.fail(f"expected a value or a name behind as, found {self.shown(t)}", t)

    def case(self) -> str:
        """``case hot and windy``: the words up to the next qualifier, operator or relation."""
        self.keyword("case", "in")
        words = [self.name("a case's name")]
        while self.now.kind in ("word", "number") and self.now.text not in QUALIFIER_WORDS:
            words.append(self.take().text)
        return " ".join(words)

    def frequency(self) -> Fraction:
        """``50 Hz`` or ``dc``, in hertz."""
        t = self.take()
        if t.kind == "word" and t.text == "dc":
            return Fraction(0)
        if t.kind == "number":
            found = hertz(self.number(t))
            if found is not None:
                return found
        self.fail(f"expected a frequency (50 Hz, 314 rad/s) or dc behind at, found {self.shown(t)}", t)


def _is_power_of_numbers(node: Node) -> bool:
    if not (isinstance(node, Binary) and node.operator == "^" and isinstance(node.left, Number)):
        return False
    exponent = node.right.inner if isinstance(node.right, Group) else node.right
    exponent = exponent.operand if isinstance(exponent, Unary) else exponent
    return isinstance(exponent, Number) and not node.left.unit.text


def _with_unit_of(low: Node, high: Node) -> Node:
    """In ``3.21 … 3.45 V`` one unit at the end serves both."""
    inner = low.operand if isinstance(low, Unary) else low
    last = high.operand if isinstance(high, Unary) else high
    if isinstance(inner, Number) and isinstance(last, Number) and not inner.unit.text:
        inner = replace(inner, unit=last.unit, unit_words=last.unit_words)
        return replace(low, operand=inner) if isinstance(low, Unary) else inner
    return low
