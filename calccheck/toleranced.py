"""Formulas over values with tolerances, as judging hands them to solving, and what comes back.

A formula is worked by one function for every kind of number: rationals and floats at one point, arrays over many points,
enclosures over all of them.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from fractions import Fraction
from typing import Any, Literal, Protocol

from calccheck.arithmetic import Doubt, Value, real, size
from calccheck.formula import Binary, Call, Group, Node, Number, Range, Reference, Unary
from calccheck.model import Circuit, State
from calccheck.units import NONE, Dimension


@dataclass(frozen=True, slots=True)
class Varied:
    """A value that may lie anywhere from ``low`` to ``high``, in SI: a part's, one of its model's, an assumption's.

    ``key``: its name in formulas, unique in a sheet; ``label``: as it is said.
    """

    key: str
    label: str
    nominal: Fraction
    low: Fraction
    high: Fraction
    dimension: Dimension = NONE


@dataclass(frozen=True, slots=True)
class Effect:
    """A value of a part worked from varied ones. ``field``: ``value`` or ``phasor`` of the part, or one of its device's."""

    part: str
    field: str
    node: Node


@dataclass(frozen=True, slots=True, eq=False)
class Reading:
    """A number read from the state of a circuit at a frequency in hertz, and what of the circuit varies."""

    circuit: Circuit
    frequency: Fraction
    read: Callable[[State], Value]
    effects: tuple[Effect, ...] = ()


@dataclass(frozen=True, slots=True, eq=False)
class Formula:
    """A formula whose only names are keys of varied values, of readings and of constants (SI)."""

    node: Node
    varied: tuple[Varied, ...] = ()
    readings: Mapping[str, Reading] = field(default_factory=dict)
    constants: Mapping[str, Value] = field(default_factory=dict)


Point = Mapping[str, Fraction]  # a value for every varied one, by key


@dataclass(frozen=True, slots=True)
class Extreme:
    """The least or the largest value of a formula, in floating point, and a point where it lies.

    ``proved``: no value beyond it exists; otherwise it is what a search found. ``how``: in a few words. ``free``: keys of the
    varied values on which the formula does not depend.
    """

    value: float
    point: Point
    proved: bool
    how: str
    free: frozenset[str] = frozenset()


@dataclass(frozen=True, slots=True)
class Sample:
    """Moments of a formula over random values. ``sigma_error``: standard error of ``sigma``. ``share``: of values not below 0."""

    size: int
    mean: float
    sigma: float
    sigma_error: float
    share: float


Spread = Literal["uniform", "normal"]


class Tolerancing(Protocol):
    """Works formulas over their tolerances. Raises ``Doubt`` where they have no value there."""

    def extreme(self, formula: Formula, largest: bool) -> Extreme:
        """The largest or the least value."""

    def slopes(self, formula: Formula) -> Mapping[str, float]:
        """The slope at the nominal values along every varied value, by key."""

    def at_ends(self, formula: Formula) -> Mapping[str, tuple[float, float]]:
        """The formula with one varied value at its ends, low and high, all others nominal, by key."""

    def sampled(self, formula: Formula, size: int, seed: int, spread: Spread) -> Sample:
        """Moments over random values."""


# --- formulas worked ------------------------------------------------------------------------------------------------

Functions = Mapping[str, Callable[..., Any]]


def _parallel(a: Any, b: Any) -> Any:
    return a * b / (a + b)


def _root(x: Any) -> Any:
    return cmath.sqrt(x) if isinstance(x, complex) else math.sqrt(x)


PLAIN: Functions = {
    "abs": size, "sqrt": _root, "exp": math.exp, "ln": math.log, "log10": math.log10, "sin": math.sin, "cos": math.cos,
    "tan": math.tan, "asin": math.asin, "acos": math.acos, "atan": math.atan, "min": min, "max": max, "parallel": _parallel,
    "re": lambda x: x.real, "im": lambda x: x.imag, "conj": lambda x: x.conjugate(), "arg": lambda x: cmath.phase(complex(x)),
    "power": lambda x, i: x * i * i, "over": lambda a, b: a / b,
}  # fmt: skip
"""The functions of single numbers; ``power`` is what a resistance takes of the current behind it."""


def worked(node: Node, leaf: Callable[[str], Any], number: Callable[[Fraction], Any], functions: Functions) -> Any:
    """A formula worked in any kind of number that adds, multiplies, divides and is raised to a power.

    ``leaf``: the value of a name; ``number``: a rational as such a number; ``functions``: by name, as ``PLAIN`` has them.
    Raises ``Doubt`` for what has no such value.
    """

    def work(n: Node) -> Any:
        match n:
            case Number():
                return number(Fraction(real(n.amount.value)))
            case Reference():
                return leaf(n.word)
            case Unary(sign="√"):
                return functions["sqrt"](work(n.operand))
            case Unary(sign="-"):
                return -work(n.operand)
            case Unary():
                return work(n.operand)
            case Group():
                inner = work(n.inner)
                return inner * number(n.unit.factor) if n.unit.text else inner
            case Binary(operator="∥"):
                return functions["parallel"](work(n.left), work(n.right))
            case Binary(operator="÷"):
                return functions["over"](work(n.left), work(n.right))
            case Binary():
                return _binary(n, work)
            case Call():
                if n.function not in functions:
                    raise Doubt(f"{n.function}() is not worked over tolerances", n.span)
                return functions[n.function](*(work(a) for a in n.arguments))
            case Range():
                raise Doubt("a range has no one value", n.span)

    return work(node)


def _binary(n: Binary, work: Callable[[Node], Any]) -> Any:
    a = work(n.left)
    if n.operator == "^":
        return a ** _exponent(n.right)
    b = work(n.right)
    match n.operator:
        case "+":
            return a + b
        case "-":
            return a - b
        case "∠":
            return a * cmath.rect(1.0, float(b))
    return a * b


def _exponent(node: Node) -> int | float:
    """An exponent, which must be printed: an integer where it is one."""
    sign, printed = 1, node
    while isinstance(printed, Unary | Group):
        if isinstance(printed, Unary):
            sign = 0 if printed.sign == "√" else -sign if printed.sign == "-" else sign
        printed = printed.operand if isinstance(printed, Unary) else printed.inner
    if not isinstance(printed, Number) or not sign:
        raise Doubt("a power whose exponent varies is not worked over tolerances", node.span)
    value = sign * Fraction(printed.digits) * printed.unit.factor
    return int(value) if value.denominator == 1 else float(value)
