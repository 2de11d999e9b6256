"""Formulas in which nothing but free symbols is left to look up: givens, constants and what steers a source put in as numbers."""

from __future__ import annotations

import cmath
from collections.abc import Callable, Collection
from dataclasses import replace
from decimal import Decimal
from fractions import Fraction

from calccheck.arithmetic import Amount, Doubt, evaluate
from calccheck.formula import Binary, Call, Group, Node, Number, Range, Reference, Unary, references
from calccheck.source import Span
from calccheck.units import UNITS, Unit, unit_of


def closed(node: Node, symbols: Collection[str], lookup: Callable[[Reference], Amount]) -> Node:
    """The formula with every piece that names no symbol, but something else, worked out. ``lookup`` gives those names' amounts.

    A piece of plain numbers is left as written, because an angle must be a printed one.
    """
    names = [r.word for r in references(node)]
    if not names:
        return node
    if not any(name in symbols for name in names):
        return number_node(evaluate(node, lookup), node.span)

    def inner(n: Node) -> Node:
        return closed(n, symbols, lookup)

    match node:
        case Unary():
            return replace(node, operand=inner(node.operand))
        case Binary():
            return replace(node, left=inner(node.left), right=inner(node.right))
        case Group():
            return replace(node, inner=inner(node.inner))
        case Call():
            return replace(node, arguments=tuple(inner(n) for n in node.arguments))
        case Range():
            return replace(node, low=inner(node.low), high=inner(node.high))
    return node


def number_node(amount: Amount, span: Span) -> Node:
    """An amount as printed numbers: a rational that is no short decimal as a quotient, a phasor by magnitude and angle."""
    if amount.point:
        raise Doubt("a temperature in °C is put into a product; write a difference in K", span)
    unit = Unit(unit_of(amount.dimension), Fraction(1), amount.dimension)
    if isinstance(amount.value, complex):
        size, angle = cmath.polar(amount.value)
        turned = Number(_digits(angle), span, UNITS["rad"])
        return Group(Binary("∠", Number(_digits(size), span, unit), turned, span), span)
    value = Fraction(amount.value)
    decimal = Decimal(value.numerator) / Decimal(value.denominator)
    if Fraction(decimal) == value:
        return Number(decimal, span, unit)
    over, under = Number(Decimal(value.numerator), span, unit), Number(Decimal(value.denominator), span)
    return Group(Binary("÷", over, under, span), span)


def _digits(value: float) -> Decimal:
    return Decimal(repr(value))
