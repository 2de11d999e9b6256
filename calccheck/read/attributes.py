"""What stands behind a part's value or nodes: tolerances, ratings, a source's frequency."""

from __future__ import annotations

import re
from dataclasses import replace
from fractions import Fraction

from calccheck.arithmetic import DimensionFault, Doubt
from calccheck.formula import Number
from calccheck.model import Rating, Tolerance
from calccheck.read.expression import parse
from calccheck.read.numbers_with_units import hertz
from calccheck.source import Piece, Span
from calccheck.units import AMPERE, LOOKALIKES, NONE, VOLT, WATT, Dimension, words

_BOTH = r"(?:±|\+\s*/\s*-|\+-)"
_DIGITS = r"\d*\.?\d+"
_TOLERANCE = re.compile(rf"{_BOTH}|[+-]\s*{_DIGITS}[^/,±()]*/\s*[+-]\s*{_DIGITS}[^()]*$")
_SYMMETRIC = re.compile(rf"\s*{_BOTH}\s*(?P<value>\S.*)", re.DOTALL)
_TWO_SIDED = re.compile(rf"\s*([+-])\s*(?P<first>{_DIGITS}[^/]*?)\s*/\s*([+-])\s*(?P<second>{_DIGITS}.*)", re.DOTALL)
_RATING = re.compile(r"max\b\s*(?P<value>.*)", re.DOTALL)
_FORMS = "a tolerance is written ±5 %, ±0.1 V, +10/−5 % or ±50 ppm/K"


def split_tolerance(piece: Piece) -> tuple[Piece, Piece | None]:
    """A value and the tolerance behind it, where one stands."""
    m = _TOLERANCE.search(piece.text.translate(LOOKALIKES))
    if m is None:
        return piece, None
    return piece.part(0, m.start()).strip(), piece.part(m.start(), len(piece.text)).strip()


def is_tolerance(piece: Piece) -> bool:
    """Whether a text begins as a tolerance does."""
    return _TOLERANCE.match(piece.text.translate(LOOKALIKES)) is not None


def is_drift(piece: Piece) -> bool:
    """Whether a tolerance is one by the kelvin."""
    return re.search(r"/\s*(?:K|°C)\b", piece.text) is not None


def read_tolerance(piece: Piece, of: Dimension | None = None) -> Tolerance:
    """A tolerance with its sign: ``±5 %``, ``±0.1 V``, ``+10/−5 %``, ``±50 ppm/K``.

    ``of``: dimension of the value that it belongs to, which an absolute one must share.
    Raises ``Doubt`` for any other form, ``DimensionFault`` for an absolute tolerance of another dimension.
    """
    text = piece.text.translate(LOOKALIKES)
    two_sided, symmetric = _TWO_SIDED.fullmatch(text), _SYMMETRIC.fullmatch(text)
    if two_sided and two_sided[1] != two_sided[3]:
        last = _number(piece.part(*two_sided.span("second")))
        first = _number(piece.part(*two_sided.span("first")))
        if not first.unit.text:
            first = replace(first, unit=last.unit)
        if first.unit.dimension != last.unit.dimension:
            raise DimensionFault("the two sides of a tolerance are of different kinds", piece.span())
        plus, minus = (first, last) if two_sided[1] == "+" else (last, first)
    elif symmetric:
        plus = minus = _number(piece.part(*symmetric.span("value")))
    else:
        raise Doubt(_FORMS, piece.span())
    relative, per_kelvin = _sort(plus, of, piece.span())
    return Tolerance(_size(plus), _size(minus), relative, per_kelvin, piece.text, piece.span())


def _number(piece: Piece) -> Number:
    node = parse(piece)
    if not isinstance(node, Number):
        raise Doubt(f"{piece.text}: {_FORMS}", piece.span())
    if not node.unit.text:
        return node
    if node.unit.dimension == NONE and node.unit.text not in ("%", "ppm"):
        raise Doubt(f"{piece.text}: {_FORMS}", piece.span())
    return node


def _sort(number: Number, of: Dimension | None, span: Span) -> tuple[bool, bool]:
    """Whether a tolerance is relative, and whether it is per kelvin."""
    if not number.unit.text:
        raise Doubt(f"a tolerance without a unit; {_FORMS}", span)
    dimension = number.unit.dimension
    per_kelvin = dimension[4] == -1
    base = (*dimension[:4], 0) if per_kelvin else dimension
    if base == NONE:
        return True, per_kelvin
    if of is not None and base != of:
        raise DimensionFault(f"the tolerance is {words(base)}, the value {words(of)}", span)
    return False, per_kelvin


def _size(number: Number) -> Fraction:
    return Fraction(number.digits) * number.unit.factor


def is_rating(piece: Piece) -> bool:
    """Whether a text begins as a rating does."""
    return _RATING.fullmatch(piece.text) is not None


def read_rating(piece: Piece) -> Rating:
    """``max 0.25 W``, ``max 50 V``, ``max 20 mA``. Raises ``Doubt`` for anything else behind ``max``."""
    m = _RATING.fullmatch(piece.text)
    value = piece.part(*m.span("value")) if m else piece
    if not value.text:
        raise Doubt("a rating is written max 0.25 W, max 50 V or max 20 mA", piece.span())
    node = parse(value)
    if not isinstance(node, Number) or node.unit.dimension not in (WATT, VOLT, AMPERE):
        raise Doubt(f"{value.text} is no power, voltage or current; a rating is written max 0.25 W", value.span())
    if not node.digits:
        raise Doubt("a rating of zero", value.span())
    return Rating(_size(node), node.unit.dimension, piece.text, piece.span())


def read_frequency(piece: Piece) -> Fraction | None:
    """A frequency in hertz, where a text is one: ``50 Hz``, ``314 rad/s``. Raises ``Doubt`` for a frequency of zero or below."""
    try:
        node = parse(piece)
    except Doubt:
        return None
    found = hertz(node)
    if found is not None and found <= 0:
        raise Doubt("a source of no frequency is DC; leave this out", piece.span())
    return found
