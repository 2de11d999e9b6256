"""Complex numbers with rational parts, so that phasors too are worked without rounding, and linear equations in them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from calccheck.solve.elimination import Row, solve_exact


@dataclass(frozen=True, slots=True)
class Gaussian:
    """A complex number of rational parts (a Gaussian rational)."""

    real: Fraction
    imag: Fraction

    def __bool__(self) -> bool:
        """Whether it is not zero."""
        return bool(self.real or self.imag)

    def __complex__(self) -> complex:
        """The nearest floating-point number. Raises ``OverflowError``."""
        return complex(float(self.real), float(self.imag))

    def __neg__(self) -> Gaussian:
        """Minus it."""
        return Gaussian(-self.real, -self.imag)

    def __add__(self, other: Gaussian | int) -> Gaussian:
        """The sum."""
        if isinstance(other, int):
            return Gaussian(self.real + other, self.imag)
        return Gaussian(self.real + other.real, self.imag + other.imag)

    __radd__ = __add__

    def __sub__(self, other: Gaussian) -> Gaussian:
        """The difference."""
        return Gaussian(self.real - other.real, self.imag - other.imag)

    def __mul__(self, other: Gaussian | int) -> Gaussian:
        """The product."""
        if isinstance(other, int):
            return Gaussian(self.real * other, self.imag * other)
        return Gaussian(
            self.real * other.real - self.imag * other.imag, self.real * other.imag + self.imag * other.real
        )

    __rmul__ = __mul__

    def __rtruediv__(self, one: int) -> Gaussian:
        """A whole number divided by it. Raises ``ZeroDivisionError``."""
        square = (self.real * self.real + self.imag * self.imag) / one
        return Gaussian(self.real / square, -self.imag / square)


def gaussian(x: Fraction | float | complex) -> Gaussian:
    """The number as it is, without rounding."""
    return Gaussian(Fraction(x.real), Fraction(x.imag))


def solve_gaussian(rows: Sequence[Row]) -> list[Row]:
    """As ``solve_exact``, for rows of Gaussian rationals: real and imaginary parts of the unknowns stand side by side."""
    parts = [part for row in rows for part in _real_and_imaginary(row)]
    solved = solve_exact(parts)
    zero = Fraction(0)
    return [
        {k: Gaussian(re.get(k, zero), im.get(k, zero)) for k in {**re, **im}}
        for re, im in zip(solved[::2], solved[1::2], strict=True)
    ]


def _real_and_imaginary(row: Row) -> tuple[Row, Row]:
    """One complex row as two real ones; unknown j has its parts in columns 2j and 2j + 1."""
    re: Row = {}
    im: Row = {}
    for j, x in row.items():
        if j < 0:
            re[j], im[j] = x.real, x.imag
        else:
            re[2 * j], re[2 * j + 1] = x.real, -x.imag
            im[2 * j], im[2 * j + 1] = x.imag, x.real
    return re, im
