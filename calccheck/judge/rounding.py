"""How a printed value is held against the truth: decimal places, ties, cut-off digits, whole numbers with zeros at the end.

Section "How a value is judged" of docs/sheet-language.md. Rounding half either way follows ISO 80000-1, annex B, which
leaves the choice at a tie open.
"""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass, replace
from decimal import Decimal
from fractions import Fraction
from itertools import takewhile
from typing import Literal

from calccheck.arithmetic import ICE, Amount, Real, Value, real, size
from calccheck.formula import Group, Node, Number, Unary
from calccheck.units import PLAIN, Unit

SLACK = Fraction(1, 10**9)
COARSE = 0.05


@dataclass(frozen=True, slots=True)
class Printed:
    """A printed value: its amount in SI, the unit of its last place in SI, and its digits."""

    amount: Amount
    unit: Fraction
    figures: int
    digits: Decimal
    written_in: Unit = PLAIN
    scientific: bool = False

    @property
    def unit_text(self) -> str:
        """The unit as written."""
        return self.written_in.text

    @property
    def value(self) -> Real:
        """The value in SI."""
        return real(self.amount.value)

    @property
    def half(self) -> Fraction:
        """Half a unit of the last place."""
        return self.unit / 2


def printed(node: Node) -> Printed | None:
    """The printed value that a node is: a number, signed or bracketed or not; else nothing."""
    sign = 1
    while isinstance(node, Unary | Group):
        if isinstance(node, Unary):
            if node.sign == "√":
                return None
            sign = -sign if node.sign == "-" else sign
            node = node.operand
        elif node.unit.text:
            return None
        else:
            node = node.inner
    if not isinstance(node, Number):
        return None
    signed = node if sign > 0 else Number(node.digits.copy_negate(), node.span, node.unit)
    return Printed(signed.amount, node.place, figures(node.digits), signed.digits, node.unit, node.scientific)


def on_scale(p: Printed, truth: Real) -> tuple[Printed, Real]:
    """A printed value and the truth as the digits count: a temperature in °C by its degrees, not by its kelvins."""
    if not p.amount.point:
        return p, truth
    return replace(p, amount=Amount(Fraction(p.digits), p.amount.dimension)), truth - ICE


def figures(digits: Decimal) -> int:
    """Significant figures as printed: leading zeros do not count, trailing zeros do."""
    return len(digits.as_tuple().digits) if digits else 0


Fit = Literal["exact place", "cut off", "whole zeros", "no"]


def fit(p: Printed, truth: Real, carry: Fraction, scale: Real | None = 0) -> Fit:
    """How a printed value stands to the truth (SI, same dimension).

    ``exact place``: within half a unit of its last place. ``cut off``: three figures or more, cut toward zero.
    ``whole zeros``: right to the figures before the zeros at its end, and within ``carry``. ``scale``: the largest like value
    of the circuit, against which a bare zero is held; ``None`` where it is judged by its last place like any other digit.
    """
    if bare_zero(p) and scale is not None:
        return "exact place" if size(truth) <= SLACK * scale else "no"
    if within(p, truth):
        return "exact place"
    x, t, unit = float(p.value), float(truth), float(p.unit)
    distance, slack = abs(x - t), 1e-9 * abs(t)
    toward_zero = x * t > 0 and abs(x) < abs(t)
    if p.figures >= 3 and toward_zero and distance < unit - slack:
        return "cut off"
    zeros = 0 if p.scientific else _zeros_at_end(p.digits)
    if zeros and distance <= carry * abs(t) and distance <= unit / 2 * 10**zeros + slack:
        return "whole zeros"
    return "no"


def within(p: Printed, value: Real) -> bool:
    """Whether a value lies within half a unit of the printed one's last place, to 1e-9 of the value.

    In floating point, whose error is far below that, because rationals would cost ten times as much.
    """
    v = float(value)
    return abs(float(p.value) - v) <= float(p.unit) / 2 + 1e-9 * abs(v)


def bare_zero(p: Printed) -> bool:
    """Whether a printed value is a zero without decimal places."""
    return p.digits == 0 and int(p.digits.as_tuple().exponent) >= 0


def _zeros_at_end(digits: Decimal) -> int:
    """How many zeros end a whole number written without a point or an exponent."""
    shown = digits.as_tuple()
    if shown.exponent != 0 or digits == 0:
        return 0
    return sum(1 for _ in takewhile(lambda d: d == 0, reversed(shown.digits)))


def coarse(p: Printed, truth: Real) -> bool:
    """Whether the printed value says so little that half its last place exceeds 5 % of the truth."""
    return not bare_zero(p) and float(p.unit) / 2 > COARSE * abs(float(truth))


def equal(a: Value, b: Value) -> bool:
    """Whether two worked values are the same to 1e-9."""
    if isinstance(a, complex) or isinstance(b, complex):
        return cmath.isclose(a, b, rel_tol=1e-9)
    return a == b or math.isclose(a, b, rel_tol=1e-9)


def deviation(x: Value, truth: Value) -> float | None:
    """How far a value is from the truth, as a fraction of the truth; ``None`` at a truth of zero."""
    if truth == 0:
        return None
    if isinstance(x, complex) or isinstance(truth, complex):
        return float(size(x - truth) / size(truth))
    return float((x - truth) / size(truth))
