"""Printed phasors and complex values, and how they are held against the truth: each printed figure by its own digits."""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass, replace
from decimal import Decimal
from fractions import Fraction

from calccheck.arithmetic import Amount, Real, Value, plainest, size
from calccheck.formula import Binary, Group, Node, Number, Reference, Unary
from calccheck.judge.rounding import SLACK, Fit, Printed, fit, printed
from calccheck.units import NONE, PLAIN, Dimension, Unit, times

_TURN = 2 * math.pi


@dataclass(frozen=True, slots=True)
class PrintedPhasor:
    """A complex value as printed: magnitude and angle (``polar``), or real and imaginary part."""

    first: Printed
    second: Printed
    polar: bool

    @property
    def amount(self) -> Amount:
        """The value in SI."""
        a, b = float(self.first.value), float(self.second.value)
        value = cmath.rect(a, b) if self.polar else complex(a, b)
        return Amount(plainest(value), self.first.amount.dimension)

    @property
    def written_in(self) -> Unit:
        """The unit that the value was printed in."""
        return self.first.written_in

    @property
    def figures(self) -> int:
        """Significant figures of the part printed with most."""
        return max(self.first.figures, self.second.figures)


def printed_phasor(node: Node) -> PrintedPhasor | None:
    """``3.2 V ∠ −41.3°``, ``(2.4 − j2.1) V``, ``−j2.1 Ω``; nothing for what is no printed phasor."""
    if isinstance(node, Binary) and node.operator == "∠":
        magnitude, angle = printed(node.left), printed(node.right)
        if magnitude is None or angle is None:
            return None
        return _half_turned(magnitude, angle) if magnitude.value < 0 else PrintedPhasor(magnitude, angle, True)
    if isinstance(node, Unary) and node.sign == "-" and isinstance(node.operand, Group | Binary):
        inner = printed_phasor(node.operand)
        if inner is not None and inner.polar:
            return _half_turned(_turned(inner.first), inner.second)
        if inner is not None and isinstance(node.operand, Group):
            return PrintedPhasor(_turned(inner.first), _turned(inner.second), False)
        return None
    unit = PLAIN
    while isinstance(node, Group):
        unit, node = (node.unit if node.unit.text else unit), node.inner
    parts = _rectangular(node)
    if parts is None:
        return None
    first, second = (_in(p, unit) for p in parts)
    same = first.amount.dimension == second.amount.dimension or first.digits == 0
    return (
        PrintedPhasor(first if first.digits or first.written_in.text else _zero_like(second), second, False)
        if same
        else None
    )


def _half_turned(magnitude: Printed, angle: Printed) -> PrintedPhasor:
    """``−7.7 V ∠ −40°`` is 7.7 V half a turn further."""
    further = replace(angle, amount=replace(angle.amount, value=float(angle.value) + math.pi))
    return PrintedPhasor(_turned(magnitude), further, True)


def _rectangular(node: Node) -> tuple[Printed, Printed] | None:
    """Real and imaginary part, where the node is their sum or the imaginary part alone."""
    alone = _imaginary(node)
    if alone is not None:
        return _zero_like(alone), alone
    if not (isinstance(node, Binary) and node.operator in ("+", "-")):
        return None
    re, im = printed(node.left), _imaginary(node.right)
    if re is None or im is None:
        return None
    return re, _turned(im) if node.operator == "-" else im


def _imaginary(node: Node) -> Printed | None:
    if isinstance(node, Unary) and node.sign in ("-", "+"):
        inner = _imaginary(node.operand)
        return _turned(inner) if inner is not None and node.sign == "-" else inner
    if isinstance(node, Binary) and node.operator == "·" and isinstance(node.left, Reference) and node.left.word == "j":
        return printed(node.right) if isinstance(node.right, Number) else None
    return None


def _turned(p: Printed) -> Printed:
    return Printed(Amount(-p.value, p.amount.dimension), p.unit, p.figures, p.digits.copy_negate(), p.written_in)


def _zero_like(p: Printed) -> Printed:
    """A real part that is not printed: zero, to the same last place as the imaginary part."""
    return Printed(Amount(Fraction(0), p.amount.dimension), p.unit, 0, p.digits * 0, p.written_in)


def _in(p: Printed, unit: Unit) -> Printed:
    if not unit.text:
        return p
    written = unit if p.written_in == PLAIN else times(p.written_in, unit)
    dimension = tuple(a + b for a, b in zip(p.amount.dimension, unit.dimension, strict=True))
    return Printed(Amount(p.value * unit.factor, dimension), p.unit * unit.factor, p.figures, p.digits, written)


def phasor_fit(p: PrintedPhasor, truth: Value, carry: Fraction, scale: Real) -> Fit:
    """How a printed phasor stands to the truth: the worse of its two figures.

    Angles are taken modulo a turn, and not at all where the magnitude is zero on the circuit's ``scale``. A bare zero beside
    another figure is judged by its place, as its neighbour is: ``10 V ∠ 0°``, ``(10 + j0) V``.
    """
    t = complex(truth)
    if not p.polar:
        largest = max(scale, abs(t))
        beside = p.first.digits or p.second.digits
        return _worse(*(_part(x, y, carry, largest, beside) for x, y in ((p.first, t.real), (p.second, t.imag))))
    magnitude = fit(p.first, abs(t), carry, scale)
    if abs(t) <= SLACK * scale:
        return magnitude
    return _worse(magnitude, fit(p.second, nearest_turn(cmath.phase(t), p.second.value), carry, None))


def _part(p: Printed, truth: float, carry: Fraction, scale: Real, beside: Decimal) -> Fit:
    """``beside``: other than zero where a part of the value is."""
    if abs(truth) <= 1e-12 * scale:
        truth = 0.0
    return fit(p, truth, carry, None if beside else scale)


def _worse(a: Fit, b: Fit) -> Fit:
    order: tuple[Fit, ...] = ("exact place", "cut off", "whole zeros", "no")
    return max(a, b, key=order.index)


def nearest_turn(angle: Real, printed_angle: Real) -> float:
    """The angle (radians) with whole turns added so that it comes nearest to the printed one."""
    return float(angle) + _TURN * round((float(printed_angle) - float(angle)) / _TURN)


def is_angle(p: Printed) -> bool:
    """Whether a real value is printed as an angle."""
    return p.amount.dimension == NONE and p.written_in.text in ("°", "rad", "mrad")


def parts(a: Amount) -> list[Amount]:
    """The real figures by which a complex amount may stand in a substitution: magnitude, angle, real and imaginary part."""
    if not isinstance(a.value, complex):
        return [a]
    v = a.value
    return [
        Amount(abs(v), a.dimension),
        Amount(cmath.phase(v)),
        Amount(v.real, a.dimension),
        Amount(v.imag, a.dimension),
    ]


Sized = tuple[Dimension, float]  # dimension and magnitude: enough to tell what a printed number may round


def sized(value: Value, dimension: Dimension) -> list[Sized]:
    """The magnitudes under which a value may stand printed: of a phasor its parts too."""
    value = plainest(value)
    if not isinstance(value, complex):
        return [(dimension, abs(float(value)))]
    return [(p.dimension, float(size(p.value))) for p in parts(Amount(value, dimension))]
