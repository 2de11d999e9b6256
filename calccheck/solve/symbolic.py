"""Ratios of polynomials in a circuit's symbols, for saying what a formula should have been.

Polynomials are sympy's; this is the only file that knows sympy. All work is counted in products of terms, so that the same sheet
gives the same report, and what would take too much of it is given up.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from importlib import import_module
from typing import Any

from calccheck.formula import Binary, Group, Node, Number, Reference, Unary
from calccheck.model import Element
from calccheck.units import SIEMENS, Dimension

MOST_WORK = 20_000  # products of terms, some 0.1 s
_MOST_TERMS = 150  # of a numerator or denominator whose common factors are looked for
_MOST_POWER = 6
S = " jω"  # stands for it until the end; no name has a blank


class TooMuch(Exception):
    """What would take too long, or what no ratio of polynomials can be."""


@dataclass(frozen=True, slots=True)
class Ratio:
    """One polynomial over another."""

    over: Any
    under: Any


class Algebra:
    """The symbols of one closed form with their dimensions, and counted operations on polynomials in them."""

    __slots__ = ("_numbers", "dimensions", "generators", "one", "spent", "zero")

    def __init__(self, dimensions: Mapping[str, Dimension]) -> None:
        polys = import_module("sympy.polys")  # late: 0.2 s; so imported since sympy tells no types
        self.dimensions = dict(dimensions)
        made, *generators = polys.ring([f"x{k}" for k in range(len(self.dimensions) or 1)], polys.QQ)
        self.generators = dict(zip(self.dimensions, generators, strict=False))
        self.one, self.zero, self._numbers, self.spent = made.one, made.zero, polys.QQ, 0

    def number(self, x: Fraction | int) -> Any:
        """A constant."""
        return self.one * self._numbers(Fraction(x).numerator, Fraction(x).denominator)

    def index(self, generator: Any) -> int:
        """Where a symbol's power stands in the powers of a term."""
        return list(self.generators.values()).index(generator)

    def polynomial(self, terms: Mapping[Any, Any]) -> Any:
        """The polynomial of these terms: coefficients by their powers."""
        return self.zero.ring.from_dict(dict(terms))

    def times(self, a: Any, b: Any) -> Any:
        """A product. Raises ``TooMuch`` beyond the work allowed."""
        self.spent += len(a) * len(b) + 1
        if self.spent > MOST_WORK:
            raise TooMuch
        return a * b

    def symbol(self, name: str) -> Ratio:
        """A symbol. Raises ``TooMuch`` for one that is unknown here."""
        if name not in self.generators:
            raise TooMuch
        return Ratio(self.generators[name], self.one)

    def product(self, a: Ratio, b: Ratio) -> Ratio:
        """a·b."""
        return Ratio(self.times(a.over, b.over), self.times(a.under, b.under))

    def inverse(self, a: Ratio) -> Ratio:
        """1/a. Raises ``TooMuch`` for zero."""
        if not a.over:
            raise TooMuch
        return Ratio(a.under, a.over)

    def sum(self, a: Ratio, b: Ratio, sign: int = 1) -> Ratio:
        """a ± b."""
        left, right = self.times(a.over, b.under), self.times(b.over, a.under)
        return Ratio(left + right if sign > 0 else left - right, self.times(a.under, b.under))

    def factors(self, polynomial: Any) -> tuple[Fraction, list[tuple[Any, int]]]:
        """A constant, and the irreducible factors with their powers. Raises ``TooMuch`` for long polynomials."""
        if len(polynomial) > _MOST_TERMS:
            raise TooMuch
        constant, found = polynomial.factor_list()
        return Fraction(int(constant.numerator), int(constant.denominator)), found

    def simplest(self, a: Ratio) -> Ratio:
        """Without common factors. Raises ``TooMuch`` for long polynomials."""
        if max(len(a.over), len(a.under)) > _MOST_TERMS or not a.under:
            raise TooMuch
        return Ratio(*a.over.cancel(a.under))


# --- expressions ----------------------------------------------------------------------------------------------------


def rational(node: Node, algebra: Algebra, lookup: Callable[[Reference], Ratio]) -> Ratio:
    """An expression as a ratio of polynomials. Raises ``TooMuch`` where it is none: roots, functions, phasors."""

    def work(n: Node) -> Ratio:
        match n:
            case Number():
                amount = n.amount
                if amount.point or amount.level or not isinstance(amount.value, Fraction):
                    raise TooMuch
                return Ratio(algebra.number(amount.value), algebra.one)
            case Reference():
                return lookup(n)
            case Unary(sign="-"):
                inner = work(n.operand)
                return Ratio(-inner.over, inner.under)
            case Unary(sign="+"):
                return work(n.operand)
            case Group():
                return algebra.product(work(n.inner), Ratio(algebra.number(n.unit.factor), algebra.one))
            case Binary():
                return _operation(n, work(n.left), work(n.right), algebra)
        raise TooMuch

    return work(node)


def _operation(n: Binary, a: Ratio, b: Ratio, algebra: Algebra) -> Ratio:
    match n.operator:
        case "+" | "-":
            return algebra.sum(a, b, 1 if n.operator == "+" else -1)
        case "×" | "·":
            return algebra.product(a, b)
        case "÷":
            return algebra.product(a, algebra.inverse(b))
        case "∥":
            return algebra.product(algebra.product(a, b), algebra.inverse(algebra.sum(a, b)))
        case "^":
            exponent = n.right.operand if isinstance(n.right, Unary) and n.right.sign == "-" else n.right
            if not isinstance(exponent, Number) or exponent.digits % 1 or not 0 < exponent.digits <= _MOST_POWER:
                raise TooMuch
            power = a
            for _ in range(int(exponent.digits) - 1):
                power = algebra.product(power, a)
            return power if exponent is n.right else algebra.inverse(power)
    raise TooMuch


def value_of(e: Element, algebra: Algebra) -> Ratio:
    """What a part's value is: by its own name where the algebra knows that, by its formula, or as a number."""
    if e.name in algebra.dimensions and e.formula is None:
        own = algebra.symbol(e.name)
        conductance = e.kind == "resistor" and algebra.dimensions[e.name] == SIEMENS
        return algebra.inverse(own) if conductance else own
    if e.formula is not None:
        found = rational(e.formula, algebra, lambda r: algebra.symbol(r.word))
        conductance = e.stated is not None and e.stated.dimension == SIEMENS and e.control is None
        return algebra.inverse(found) if conductance else found
    value = Fraction(e.phasor.real) if e.phasor is not None and not e.phasor.imag else e.value
    if value is None:
        raise TooMuch
    return Ratio(algebra.number(value), algebra.one)
