"""Values with dimensions, and what can be wrong with them.

A dimension fault and a doubt are different things: the first is an error of the sheet, the second makes a claim unchecked.
"""

from __future__ import annotations

import cmath
from dataclasses import dataclass
from fractions import Fraction

from calccheck.source import Span
from calccheck.units import NONE, Dimension

Real = Fraction | float
Value = Fraction | float | complex  # complex: a phasor or an impedance; a complex value never has a zero imaginary part
_ROOM = 4000  # bits of a rational before it is carried on as a float
ICE = Fraction(27315, 100)  # 0 °C in kelvin (SI Brochure, 9th edition, 2.3.1)


class Doubt(Exception):
    """Something that cannot be read, resolved or solved: the claim is unchecked, for this reason."""

    def __init__(self, reason: str, span: Span | None = None, suggestion: str = "") -> None:
        super().__init__(reason)
        self.reason, self.span, self.suggestion = reason, span, suggestion


class DimensionFault(Exception):
    """Dimensions that do not fit: an error of the sheet, said as a finding of its own."""

    def __init__(self, reason: str, span: Span) -> None:
        super().__init__(reason)
        self.reason, self.span = reason, span


@dataclass(frozen=True, slots=True)
class Amount:
    """A value in coherent SI units with its dimension.

    ``point``: a temperature on the scale, not a difference. ``frequency``: of a phasor in a circuit of several frequencies, in
    hertz; phasors of different frequencies neither add nor multiply. ``level``: a number of decibels.
    """

    value: Value
    dimension: Dimension = NONE
    point: bool = False
    frequency: Fraction | None = None
    level: bool = False


def size(value: Value) -> Real:
    """The magnitude of a value."""
    return value.__abs__()  # as abs(), but the kind of number is kept in the type


def real(value: Value, span: Span | None = None) -> Real:
    """A value known to be real. Raises ``Doubt`` for a phasor, where only a real value makes sense."""
    if isinstance(value, complex):
        raise Doubt("a phasor has no order and no sign: take its magnitude |…|", span)
    return value


def plainest(value: Value) -> Value:
    """A complex value whose imaginary part is zero to the error of floating-point numbers, as the real one that it is."""
    if isinstance(value, complex) and abs(value.imag) <= 1e-13 * abs(value):
        return value.real
    return value


def trimmed(value: Value) -> Value:
    """A rational grown out of bounds carried on as a float; anything not finite is a doubt."""
    if isinstance(value, Fraction):
        over, under = value.numerator.bit_length(), value.denominator.bit_length()
        if over - under > 1000:
            raise Doubt("the value does not fit a floating-point number")
        if over + under < _ROOM:
            return value
        value = value.numerator / value.denominator
    value = plainest(value)
    if not cmath.isfinite(value):
        raise Doubt("the value does not fit a floating-point number")
    return value
