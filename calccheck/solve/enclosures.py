"""Intervals with slopes: where a value lies over a whole box, and how it rises or falls with each side of the box.

Interval arithmetic (R. E. Moore, Interval Analysis, 1966; from memory) carried along with the derivatives. Ends are not rounded
outwards: what is decided by them is decided with more room than rounding takes.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from calccheck.toleranced import Functions

Floats = NDArray[np.float64]


class Unbounded(Exception):
    """No bounds can be given: a divisor that may be zero, a function outside of its domain, one without a slope."""


@dataclass(frozen=True, slots=True)
class Enclosure:
    """Bounds of a value and of its slope along every side of the box."""

    low: float
    high: float
    least: Floats
    most: Floats

    __array_ufunc__ = None  # arrays and numpy's numbers leave arithmetic to this class

    def __add__(self, other: Enclosure | float) -> Enclosure:
        """The sum."""
        o = _enclosed(other, self)
        return Enclosure(self.low + o.low, self.high + o.high, self.least + o.least, self.most + o.most)

    def __neg__(self) -> Enclosure:
        """The negative."""
        return Enclosure(-self.high, -self.low, -self.most, -self.least)

    def __sub__(self, other: Enclosure | float) -> Enclosure:
        """The difference."""
        return self + -_enclosed(other, self)

    def __mul__(self, other: Enclosure | float) -> Enclosure:
        """The product."""
        o = _enclosed(other, self)
        low, high = product(self.low, self.high, o.low, o.high)
        mine, its = product(self.least, self.most, o.low, o.high), product(o.least, o.most, self.low, self.high)
        return Enclosure(float(low), float(high), mine[0] + its[0], mine[1] + its[1])

    def __truediv__(self, other: Enclosure | float) -> Enclosure:
        """The quotient. Raises ``Unbounded`` where the divisor may be zero."""
        o = _enclosed(other, self)
        if o.low <= 0 <= o.high:
            raise Unbounded("a divisor may be zero")
        over = 1 / o.high, 1 / o.low
        low, high = product(self.low, self.high, *over)
        fall = product(o.least, o.most, low, high)  # (f/g)′ = (f′ − (f/g)·g′)/g
        least, most = product(self.least - fall[1], self.most - fall[0], *over)
        return Enclosure(float(low), float(high), least, most)

    def __pow__(self, exponent: int | float) -> Enclosure:
        """A power with a fixed exponent. Raises ``Unbounded`` where it may have no value."""
        if isinstance(exponent, int) and exponent >= 0:
            if exponent == 0:
                return self * 0.0 + 1.0
            ends = self.low**exponent, self.high**exponent
            low = 0.0 if exponent % 2 == 0 and self.low < 0 < self.high else min(ends)
            slopes = [exponent * x ** (exponent - 1) for x in (self.low, self.high)]
            flat = 0.0 if exponent % 2 and self.low < 0 < self.high else min(slopes)
            return _through(self, low, max(ends), flat if exponent > 1 else 1.0, max(slopes))
        if self.low <= 0:
            raise Unbounded("a root or a power of what may be zero")
        ends = self.low**exponent, self.high**exponent
        slopes = [exponent * x ** (exponent - 1) for x in (self.low, self.high)]
        return _through(self, min(ends), max(ends), min(slopes), max(slopes))

    def __radd__(self, other: Enclosure | float) -> Enclosure:
        """The sum."""
        return self + other

    def __rsub__(self, other: Enclosure | float) -> Enclosure:
        """The difference."""
        return -self + other

    def __rmul__(self, other: Enclosure | float) -> Enclosure:
        """The product."""
        return self * other

    def __rtruediv__(self, other: Enclosure | float) -> Enclosure:
        """The quotient."""
        return _enclosed(other, self) / self


def constant(value: float, sides: int) -> Enclosure:
    """A value that does not vary."""
    flat = np.zeros(sides)
    return Enclosure(value, value, flat, flat)


def _enclosed(value: Enclosure | float, like: Enclosure) -> Enclosure:
    return value if isinstance(value, Enclosure) else constant(float(value), len(like.least))


def product(a: Any, b: Any, c: Any, d: Any) -> tuple[Any, Any]:
    """The interval [a, b] times [c, d], numbers or arrays."""
    ends = [np.multiply(a, c), np.multiply(a, d), np.multiply(b, c), np.multiply(b, d)]
    return np.minimum.reduce(ends), np.maximum.reduce(ends)


def _through(x: Enclosure, low: float, high: float, flattest: float, steepest: float) -> Enclosure:
    """A function of an enclosed value by its own bounds and those of its slope."""
    if not all(map(math.isfinite, (low, high, flattest, steepest))):
        raise Unbounded("a value beyond all bounds")
    return Enclosure(low, high, *product(x.least, x.most, flattest, steepest))


def _absolute(x: Enclosure) -> Enclosure:
    if x.low >= 0:
        return x
    return -x if x.high <= 0 else _through(x, 0.0, max(-x.low, x.high), -1.0, 1.0)


def _rising(f: Callable[[float], float], slope: Callable[[float], float]) -> Callable[[Enclosure], Enclosure]:
    """A rising function whose slope rises or falls all along."""

    def enclosed(x: Enclosure) -> Enclosure:
        try:
            ends, slopes = [f(x.low), f(x.high)], [slope(x.low), slope(x.high)]
        except (ValueError, ZeroDivisionError, OverflowError):
            raise Unbounded("a function outside of its domain") from None
        return _through(x, ends[0], ends[1], min(slopes), max(slopes))

    return enclosed


def _parallel(a: Enclosure, b: Enclosure) -> Enclosure:
    return 1 / (1 / a + 1 / b)


def _least_of(*found: Enclosure) -> Enclosure:
    least, most = (
        f([getattr(x, end) for x in found]) for f, end in ((np.minimum.reduce, "least"), (np.maximum.reduce, "most"))
    )
    return Enclosure(min(x.low for x in found), min(x.high for x in found), least, most)


def _power(resistance: Enclosure | float, current: Enclosure) -> Enclosure:
    return current**2 * resistance


ENCLOSING: Functions = {
    "abs": _absolute, "sqrt": _rising(math.sqrt, lambda x: 0.5 / math.sqrt(x)), "exp": _rising(math.exp, math.exp),
    "ln": _rising(math.log, lambda x: 1 / x), "log10": _rising(math.log10, lambda x: 1 / (x * math.log(10))),
    "parallel": _parallel, "power": _power, "min": _least_of, "max": lambda *found: -_least_of(*(-x for x in found)),
    "re": lambda x: x, "over": lambda a, b: a / b,
}  # fmt: skip
"""The functions of enclosures that have bounds; what is not here is searched instead."""
