"""What a printed value shows: a real value one figure, a phasor two, each held to the truth by its own digits."""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Real, Value, size
from calccheck.formula import Prefix
from calccheck.judge.phasors import PrintedPhasor, is_angle, nearest_turn
from calccheck.judge.rounding import Printed, fit

_NEAR = 0.2  # a wrong number lies anywhere within this part of the right one
_NEAR_ANGLE = 0.2 * math.pi / 2
_NOTHING = 1e-12  # a part of a phasor so much smaller than the phasor is zero


def taken(which: Prefix, value: Value) -> Value:
    """The magnitude, angle, real or imaginary part of a phasor; the value itself where none is named."""
    match which:
        case "mag":
            return size(value)
        case "arg":
            return cmath.phase(complex(value))
        case "re":
            return value.real
        case "im":
            return value.imag if isinstance(value, complex) else Fraction(0)
    return value


@dataclass(frozen=True, slots=True)
class Figure:
    """One printed figure of a value. ``which``: of a phasor magnitude, angle, real or imaginary part, else nothing.

    ``right``: what it should show; ``rest``: of a phasor the right value of the other figure.
    """

    printed: Printed
    which: Prefix
    right: Real
    rest: Real = 0

    @property
    def angle(self) -> bool:
        """Whether it shows an angle."""
        return is_angle(self.printed)

    def of(self, value: Value) -> float:
        """What a value shows here; not a number where a phasor stands in place of a real value."""
        if not self.which and isinstance(value, complex) and abs(value.imag) > 1e-9 * abs(value):
            return math.nan
        own = float(taken(self.which, value).real)
        if self.which in ("re", "im") and abs(own) <= _NOTHING * size(value):
            own = 0.0
        return nearest_turn(own, self.printed.value) if self.angle else own

    def whole(self, shown: Real) -> Value:
        """The right value with something else shown in this figure."""
        match self.which:
            case "mag":
                return cmath.rect(float(shown), float(self.rest))
            case "arg":
                return cmath.rect(float(self.rest), float(shown))
            case "re":
                return complex(float(shown), float(self.rest))
            case "im":
                return complex(float(self.rest), float(shown))
        return shown

    def fits(self, value: Value) -> float:
        """How well a value explains the figure: 1 rounded to it, 0.3 cut off to it, 0 not at all."""
        own = value if not self.which and not self.angle and not isinstance(value, complex) else self.of(value)
        if not abs(float(self.printed.value) - float(own)) <= 1.01 * float(self.printed.unit):
            return 0.0  # the quick answer for nearly all
        return {"exact place": 1.0, "cut off": 0.3}.get(fit(self.printed, own, Fraction(0)), 0.0)

    @property
    def near(self) -> float:
        """How far off a wrong number may lie by chance, either way: as far as this one, or within 20 %."""
        at_least = _NEAR_ANGLE if self.angle else _NEAR * abs(float(self.right))
        return max(abs(float(self.printed.value) - float(self.right)), at_least)

    @property
    def count(self) -> int:
        """How many figures it has; of an angle as many as the full turn has in its last place."""
        if self.angle:
            return int(math.log10(2 * math.pi / float(self.printed.unit)))
        return self.printed.figures


def figures_of(p: Printed | PrintedPhasor, right: Value) -> tuple[Figure, ...]:
    """The figures of a printed value, each with what it should show; none where the right value is complex and it is not."""
    if isinstance(p, Printed):
        if isinstance(right, complex):
            return ()
        turned = nearest_turn(right, p.value) if is_angle(p) else right
        return (Figure(p, "", turned),)
    names: tuple[Prefix, Prefix] = ("mag", "arg") if p.polar else ("re", "im")
    a, b = (float(taken(n, right).real) for n in names)
    b = nearest_turn(b, p.second.value) if p.polar else b
    return Figure(p.first, names[0], a, b), Figure(p.second, names[1], b, a)
