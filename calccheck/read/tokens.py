"""Tokens of the expression language, each with its place in the piece it was cut from."""

from __future__ import annotations

import re
from typing import Literal, NamedTuple, get_args

from calccheck.arithmetic import Doubt
from calccheck.source import Piece
from calccheck.units import LOOKALIKES, UNITS

TokenKind = Literal["number", "imaginary", "word", "braced", "operator", "superscript", "end"]
LONGEST = 10_000  # characters of one statement; a longer one is no formula that a person wrote

SUPERSCRIPTS = "⁰¹²³⁴⁵⁶⁷⁸⁹"
_LETTER = rf"[^\W\d_{SUPERSCRIPTS}]"
_WORD = rf"{_LETTER}(?:[^\W{SUPERSCRIPTS}])*[′″']*"
_GROUPS = "[\u2009\u202f\u00a0]"
_NUMBER = rf"(?:\d{{1,3}}(?:{_GROUPS}\d{{3}})+(?!\d)|\d+)(?:\.\d+(?:{_GROUPS}\d{{3}}(?!\d))*)?|\.\d+"
_TOKEN = re.compile(
    rf"""\s*(?:(?P<imaginary>j(?:{_NUMBER})(?:[eE][+-]?\d+)?)
    |(?P<word>°C(?!\w)|{_WORD})
    |(?P<operator>//|~=|<=|>=|\.\.\.|[-+×·*/÷^√∥()\[\]|=≈<≤>≥,±∠…°%])
    |(?P<number>(?:{_NUMBER})(?:[eE][+-]?\d+|\s?[×*]\s?10(?:⁻?[{SUPERSCRIPTS}]+|\^[+-]?\d+))?)
    |(?P<superscript>⁻?[{SUPERSCRIPTS}]+)
    |(?P<end>\Z))""",
    re.VERBOSE,
)
_LOOKALIKE = re.compile(f"[{''.join(map(chr, LOOKALIKES))}]")  # to find one is quicker than to put them right
_BRACED = re.compile(rf"{_LETTER}[^\W_{SUPERSCRIPTS}]*_\{{[^{{}}]*\}}")
_KINDS: dict[str | None, TokenKind] = {kind: kind for kind in get_args(TokenKind)}
_EXPONENT = re.compile(_NUMBER)  # behind ^ a number ends before a × 10³, which multiplies the power
_TEN = re.compile(r"\s?[×*]\s?10")
_SAME = {"//": "∥", "*": "×", "/": "÷", "~=": "≈", "<=": "≤", ">=": "≥", "...": "…", "[": "(", "]": ")"}
_UP = str.maketrans(SUPERSCRIPTS + "⁻", "0123456789-")
_GAPS = str.maketrans("", "", "\u2009\u202f\u00a0")
RELATIONS = {"=", "≈", "<", "≤", ">", "≥"}


class Token(NamedTuple):  # a tuple, because hundreds are made for one sheet
    """``text`` is normalised (one sign for each operator, plain digits); ``start`` and ``end`` count in the piece."""

    kind: TokenKind
    text: str
    start: int
    end: int


def tokens(piece: Piece) -> list[Token]:
    """The tokens of a statement, an ``end`` token last. Raises ``Doubt`` at the first character that means nothing."""
    text = piece.text.translate(LOOKALIKES) if _LOOKALIKE.search(piece.text) else piece.text
    if len(text) > LONGEST:
        raise Doubt(f"longer than {LONGEST} characters; part it", piece.span(0, 40))
    found: list[Token] = []
    at = 0
    kind: TokenKind | None = None
    while kind != "end":
        m = _TOKEN.match(text, at)
        if m is None:
            raise _strange(piece, text, at)
        kind = _KINDS[m.lastgroup]
        start, at = m.span(kind)
        if kind == "word" and text.startswith("{", at) and (braced := _BRACED.match(text, start)):
            kind, at = "braced", braced.end()
        elif kind == "number" and found and found[-1].text == "^":
            at = (_EXPONENT.match(text, start) or m).end()
        word = text[start:at]
        if kind == "operator":
            word = _SAME.get(word, word)
        elif kind == "superscript":
            word = word.translate(_UP)
        elif kind in ("number", "imaginary"):
            _refuse_comma_and_point(piece, text, start, at)
            word = _plain(word.removeprefix("j"))
        found.append(Token(kind, word, start, at))
    return found


def superscript(text: str) -> int:
    """The whole number that superscript digits show."""
    return int(text.translate(_UP))


def _plain(text: str) -> str:
    """Digits without grouping, the exponent in one form: ``1.6×10⁻¹⁹`` is ``1.6e-19``."""
    if text.isascii() and "*" not in text:
        return text  # most are written plainly
    mantissa, ten, exponent = _TEN.sub("x", text.translate(_GAPS)).partition("x")
    return f"{mantissa}e{exponent.translate(_UP).lstrip('^')}" if ten else mantissa


def _refuse_comma_and_point(piece: Piece, text: str, start: int, end: int) -> None:
    follows = text[end : end + 2]
    if follows[:1] in (",", ".") and follows[1:].isdigit():
        end += 1
        while end < len(text) and (text[end].isdigit() or text[end] in ",."):
            end += 1
        written = text[start:end]
        if follows[0] == "," and written.count(",") == 1:
            raise Doubt(
                f"{written} has a decimal comma; a number is written with a point",
                piece.span(start, end),
                piece.text[:start] + written.replace(",", ".") + piece.text[end:],
            )
        raise Doubt(f"{written} is no number: at most one point, groups parted by thin spaces", piece.span(start, end))


def _strange(piece: Piece, text: str, at: int) -> Doubt:
    at = len(text) - len(text[at:].lstrip())
    c = text[at]
    if c in "–—":
        return Doubt("a dash: write − for minus, or a range as 3.2 … 3.4", piece.span(at, at + 1))
    if c == "{":
        return Doubt("a brace: a subscript is written V_{a,b}, without blanks before the brace", piece.span(at, at + 1))
    if c in "~≅≃∼":
        return Doubt(f"{c} is no relation here: write ≈ for about", piece.span(at, at + 1))
    shown = c if c.isprintable() else f"U+{ord(c):04X}"
    return Doubt(f"the character {shown} means nothing here", piece.span(at, at + 1))


def is_unit(word: str) -> bool:
    """Whether a word is a unit of the trade's table."""
    return word in UNITS
