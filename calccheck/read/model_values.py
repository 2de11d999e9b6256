"""Values that the model of a part needs, each behind its word: ``V_BE 0.65 V``, ``beta 150 +100/−50 %``, ``swing 0.2 V to 4.8 V``."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Doubt
from calccheck.formula import Node, Number, Range, Unary
from calccheck.model import Tolerance
from calccheck.read.attributes import read_tolerance, split_tolerance
from calccheck.read.expression import parse_value
from calccheck.source import Piece, Span
from calccheck.units import Dimension, words


@dataclass(frozen=True, slots=True)
class ModelValue:
    """A value in SI with its tolerance; ``high``: of a swing, of which ``value`` is the low end."""

    value: Fraction
    high: Fraction | None = None
    tolerance: Tolerance | None = None


def read_model_value(word: str, piece: Piece, dimension: Dimension, span: Span) -> ModelValue:
    """The value behind a word. Raises ``Doubt`` where it is none of that dimension. ``span``: the word and the value."""
    if word == "swing":
        return _swing(piece, dimension, span)
    plain, tolerance = split_tolerance(piece)
    value = _number(parse_value(plain) if plain.text else None, word, piece, dimension, span)
    if value < 0 or (word == "beta" and value == 0):
        hint = ", for a pnp too: from emitter to " if word in ("V_BE", "V_CE") else ""
        hint += {"V_BE": "base", "V_CE": "collector"}.get(word, "")
        raise Doubt(f"{word} is stated as a positive value{hint}", span)
    within = read_tolerance(tolerance, dimension) if tolerance else None
    if within and within.relative and value == 0:
        raise Doubt(f"{within.text} of zero is nothing; write it in the unit of the value", within.span)
    return ModelValue(value, tolerance=within)


def _swing(piece: Piece, dimension: Dimension, span: Span) -> ModelValue:
    node = parse_value(piece) if piece.text else None
    if not isinstance(node, Range):
        raise Doubt("expected swing 0.2 V to 4.8 V", span)
    low, high = (_number(end, "swing", piece, dimension, span) for end in (node.low, node.high))
    if node.centred:
        low, high = low - high, low + high
    if low >= high:
        raise Doubt("a swing goes from its lowest to its highest voltage", span)
    return ModelValue(low, high)


def _number(node: Node | None, word: str, piece: Piece, dimension: Dimension, span: Span) -> Fraction:
    """A printed number with its sign."""
    sign = 1
    while isinstance(node, Unary) and node.sign != "√":
        sign = -sign if node.sign == "-" else sign
        node = node.operand
    if not isinstance(node, Number) or node.unit.dimension != dimension:
        raise Doubt(f"expected {words(dimension)} behind {word}, found {piece.text or 'nothing'}", span)
    return sign * Fraction(node.digits) * node.unit.factor
