"""Working expressions out: exact rationals where the operations allow it, floats behind roots and functions."""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable
from dataclasses import replace
from fractions import Fraction
from operator import add, sub

from calccheck.amounts import (
    ICE,
    Amount,
    DimensionFault,
    Doubt,
    Real,
    Value,
    plainest,
    real,
    size,
    trimmed,
)
from calccheck.formula import Binary, Call, Group, Node, Number, Range, Reference, Unary
from calccheck.source import Span
from calccheck.units import AMPERE, FARAD, HENRY, NONE, OHM, SECOND, VOLT, WATT, Dimension, unit_of, words

__all__ = [
    "COHERENT",
    "ICE",
    "Amount",
    "DimensionFault",
    "Doubt",
    "Literal",
    "Lookup",
    "Note",
    "Real",
    "Value",
    "decibels",
    "evaluate",
    "literal",
    "parallel",
    "phasor",
    "plainest",
    "power",
    "real",
    "size",
    "trimmed",
]

Lookup = Callable[[Reference], Amount]
Literal = Callable[[Number], Amount]
Note = Callable[[Node, Amount], None]


def literal(number: Number) -> Amount:
    """A printed number in SI."""
    return number.amount


def evaluate(node: Node, lookup: Lookup, number: Literal = literal, note: Note | None = None) -> Amount:
    """The amount of an expression.

    ``lookup`` gives the amount of a name or quantity and may raise ``Doubt``; ``number`` that of a printed number. ``note``
    is told the amount of every piece as it is worked out.
    Raises ``Doubt`` for what two engineers would read differently, for division by zero and for powers out of range;
    ``DimensionFault`` for sums of unlike dimensions.
    """

    def work(n: Node) -> Amount:
        match n:
            case Number():
                a = number(n)
            case Reference():
                a = lookup(n)
            case Binary():
                a = _binary(n, work(n.left), work(n.right))
            case Group():
                a = work(n.inner)
                if n.unit.text:
                    a = _product(a, Amount(n.unit.factor, n.unit.dimension), n.span)
            case Unary():
                a = _unary(n, work(n.operand))
            case Call(function="dB"):
                a = decibels(n.arguments[0], work)
            case Call():
                a = _call(n, [work(inner) for inner in n.arguments])
            case Range():
                raise Doubt("a range stands only as the value of a claim", n.span)
        if note is not None:
            note(n, a)
        return a

    return work(node)


def _binary(n: Binary, a: Amount, b: Amount) -> Amount:
    match n.operator:
        case "+" | "-":
            return _sum(a, b, -1 if n.operator == "-" else 1, n)
        case "×" | "·":
            _refuse_two_readings(n, a, b)
            return _product(a, b, n.span)
        case "÷":
            _refuse_two_readings(n, a, b)
            return _quotient(a, b, n)
        case "∥":
            return parallel(a, b, n.span)
        case "^":
            return power(a, b, n.span)
        case "∠":
            return phasor(a, b, n)


def phasor(a: Amount, b: Amount, n: Binary) -> Amount:
    """Magnitude and angle: ``10 V ∠ 30°``. The angle must be written in degrees or radians."""
    angle = n.right.operand if isinstance(n.right, Unary) else n.right
    if not (isinstance(angle, Number) and angle.unit.text in ("°", "rad", "mrad")) and b.dimension == NONE:
        raise Doubt("an angle is written with ° or rad", n.right.span)
    if b.dimension != NONE:
        raise DimensionFault(f"an angle is a plain number, not {words(b.dimension)}", n.right.span)
    turned = cmath.rect(float(real(a.value, n.left.span)), float(real(b.value, n.right.span)))
    return Amount(plainest(turned), a.dimension, frequency=a.frequency)


def _one_frequency(a: Amount, b: Amount, span: Span) -> Fraction | None:
    if a.frequency is not None and b.frequency is not None and a.frequency != b.frequency:
        raise Doubt(
            f"phasors of {float(a.frequency):g} Hz and {float(b.frequency):g} Hz are put together: they turn at different speeds; "
            "add their squares (rms) or their powers",
            span,
        )
    return a.frequency if a.frequency is not None else b.frequency


def _sum(a: Amount, b: Amount, sign: int, n: Binary) -> Amount:
    if a.dimension != b.dimension:
        word = "added to" if sign > 0 else "taken from"
        first, second = (
            (words(a.dimension), words(b.dimension)) if sign > 0 else (words(b.dimension), words(a.dimension))
        )
        raise DimensionFault(f"{first} cannot be {word} {second}", n.span)
    if a.point and b.point:
        if sign > 0:
            raise Doubt("two temperatures are added; write the difference in K", n.span)
        return Amount(_add(a.value, -b.value), a.dimension)
    if b.point and not a.point and sign < 0:
        raise Doubt("a temperature is taken from a difference; write the difference in K", n.span)
    if a.level != b.level:
        raise DimensionFault("decibels and a plain number cannot be added", n.span)
    frequency = _one_frequency(a, b, n.span)
    return Amount(_add(a.value, b.value if sign > 0 else -b.value), a.dimension, a.point or b.point, frequency, a.level)


def _add(a: Value, b: Value) -> Value:
    return trimmed(a + b)


def _product(a: Amount, b: Amount, span: Span) -> Amount:
    if a.point or b.point:
        raise Doubt("a temperature in °C is multiplied; write a difference in K", span)
    if a.level and b.level:
        raise Doubt("decibels are multiplied by decibels; gains in series add their decibels", span)
    dimension = tuple(map(add, a.dimension, b.dimension))
    level = (a.level or b.level) and dimension == NONE
    return Amount(trimmed(a.value * b.value), dimension, False, _one_frequency(a, b, span), level)


def _quotient(a: Amount, b: Amount, n: Binary) -> Amount:
    if b.point:
        raise Doubt("something is divided by a temperature in °C; write K", n.right.span)
    if b.value == 0:
        raise Doubt("division by zero", n.right.span)
    if a.point:
        raise Doubt("a temperature in °C is divided; write a difference in K", n.span)
    dimension = tuple(map(sub, a.dimension, b.dimension))
    level = a.level and dimension == NONE
    return Amount(trimmed(a.value / b.value), dimension, False, _one_frequency(a, b, n.span), level)


def parallel(a: Amount, b: Amount, span: Span) -> Amount:
    """a·b/(a + b): two resistances, impedances or like quantities side by side."""
    if a.dimension != b.dimension:
        raise DimensionFault(f"{words(a.dimension)} cannot stand parallel to {words(b.dimension)}", span)
    total = a.value + b.value
    if total == 0:
        if a.value == 0:
            return a  # two shorts side by side
        raise Doubt("the two sides of ∥ cancel: no finite value", span)
    return Amount(trimmed(a.value * b.value / total), a.dimension, frequency=_one_frequency(a, b, span))


def power(a: Amount, b: Amount, span: Span) -> Amount:
    """a to the b; the exponent is a plain number."""
    if b.dimension != NONE:
        raise DimensionFault(f"an exponent is a plain number, not {words(b.dimension)}", span)
    if a.point:
        raise Doubt("a temperature in °C is raised to a power", span)
    raised = real(b.value, span)
    if raised == 2 and isinstance(a.value, Fraction):  # by far the most
        return Amount(trimmed(a.value * a.value), tuple(2 * x for x in a.dimension), frequency=a.frequency)
    exponent = Fraction(raised).limit_denominator(1000)
    if a.dimension != NONE and abs(float(exponent) - float(raised)) > 1e-12:
        raise Doubt("a quantity with a unit is raised to a power that is no simple fraction", span)
    dimension = tuple(_half(x * exponent) if x else 0 for x in a.dimension)
    return Amount(_raised(a.value, raised, span), dimension, frequency=a.frequency)


def _half(x: Fraction | int) -> Fraction | int:
    return int(x) if x == int(x) else x


def _raised(base: Value, exponent: Real, span: Span) -> Value:
    if base == 0 and exponent <= 0:
        raise Doubt("zero to the power of zero or less", span)
    decades = 0.0 if base == 0 else abs(float(exponent) * math.log10(size(base)))
    if decades > 300:
        raise Doubt("the power does not fit a floating-point number", span)
    whole = float(exponent).is_integer()
    if whole and size(exponent) <= 64 and isinstance(base, Fraction):
        return trimmed(base ** int(exponent))
    if isinstance(base, complex):
        return trimmed(base ** (int(exponent) if whole else float(exponent)))
    if base < 0 and not whole:
        raise Doubt("a root of a negative number", span)
    return math.pow(float(base), float(exponent))


def decibels(node: Node, work: Callable[[Node], Amount]) -> Amount:
    """20 log10 of a ratio of two voltages or currents, 10 log10 of a ratio of two powers (IEC 60027-3).

    Raises ``Doubt`` for a bare number, which may be either.
    """
    ratio = node
    while isinstance(ratio, Group) and not ratio.unit.text:
        ratio = ratio.inner
    if isinstance(ratio, Call) and ratio.function == "abs":
        ratio = ratio.arguments[0]
    if not (isinstance(ratio, Binary) and ratio.operator == "÷"):
        raise Doubt(
            "dB takes a ratio of two voltages, currents or powers; of a number it may be 10 or 20 log", node.span
        )
    over, under = work(ratio.left), work(ratio.right)
    factor = {VOLT: 20, AMPERE: 20, WATT: 10}.get(over.dimension)
    if factor is None or over.dimension != under.dimension:
        raise Doubt(
            "dB takes a ratio of two voltages, currents or powers; of anything else it may be 10 or 20 log", node.span
        )
    if over.value == 0 or under.value == 0:
        raise Doubt("a ratio of or to zero has no decibels", node.span)
    return Amount(factor * math.log10(size(over.value) / size(under.value)), level=True)


def _unary(n: Unary, a: Amount) -> Amount:
    if n.sign == "√":
        return power(a, Amount(Fraction(1, 2)), n.span)
    if n.sign == "-":
        return replace(a, value=-a.value) if not a.point else Amount(2 * ICE - a.value, a.dimension, True)
    return a


def _bare(node: Node, operator: str) -> Binary | None:
    return node if isinstance(node, Binary) and node.operator == operator else None


def _refuse_two_readings(n: Binary, a: Amount, b: Amount) -> None:
    """``2 × R1 ∥ R2``: where both readings have a right dimension, engineers differ; so nobody guesses."""
    left, right = _bare(n.left, "∥"), _bare(n.right, "∥")
    twofold = False
    if right is not None:
        shifted = tuple(map(sub if n.operator == "÷" else add, a.dimension, b.dimension))
        twofold = shifted == b.dimension
    if left is not None:
        twofold = twofold or b.dimension == NONE
    if twofold:
        raise Doubt("∥ beside × or ÷ can be read two ways here; put brackets around the parallel parts", n.span)


_FUNCTIONS: dict[str, Callable[[float], float]] = {
    "exp": math.exp, "ln": math.log, "log10": math.log10, "sin": math.sin, "cos": math.cos, "tan": math.tan,
    "asin": math.asin, "acos": math.acos, "atan": math.atan,
}  # fmt: skip


def _call(n: Call, arguments: list[Amount]) -> Amount:
    first = arguments[0]
    if n.function in ("min", "max"):
        if any(x.dimension != first.dimension for x in arguments):
            raise DimensionFault(f"{n.function}() compares unlike quantities", n.span)
        ordered = sorted(arguments, key=lambda x: float(real(x.value, n.span)))
        return ordered[0 if n.function == "min" else -1]
    if len(arguments) != 1:
        raise Doubt(f"{n.function}() takes one value", n.span)
    if n.function == "abs":
        return replace(first, value=size(first.value), frequency=None)
    if n.function == "sqrt":
        return power(first, Amount(Fraction(1, 2)), n.span)
    if first.dimension != NONE:
        raise DimensionFault(f"{n.function}() takes a plain number, not {words(first.dimension)}", n.span)
    try:
        return Amount(trimmed(_FUNCTIONS[n.function](float(real(first.value, n.span)))))
    except (ValueError, OverflowError):
        raise Doubt(f"{n.function}() has no value there", n.span) from None


COHERENT: dict[Dimension, str] = {d: unit_of(d) for d in (VOLT, AMPERE, OHM, FARAD, HENRY, SECOND)}
