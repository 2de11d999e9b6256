"""Sums of terms, constants and products as expressions of the sheet language, and expressions as its text."""

from __future__ import annotations

from collections.abc import Sequence
from decimal import Decimal, localcontext
from fractions import Fraction
from math import gcd, lcm
from typing import Any

from calccheck.formula import Binary, Group, Node, Number, Reference, Unary
from calccheck.solve.symbolic import Algebra, S, TooMuch
from calccheck.source import Span
from calccheck.units import NONE, PLAIN, UNITS, Dimension, Unit, printed, unit_of

AT = Span(0, 0)
_READABLE = 24  # terms of a sum that anybody reads
_FIGURES = 6  # digits of a constant that anybody writes
_J, _OMEGA = Reference("j", AT), Reference("ω", AT)


def product(factors: Sequence[Node]) -> Node:
    """The product of some expressions."""
    if not factors:
        return Number(Decimal(1), AT)
    node = factors[0]
    for f in factors[1:]:
        node = Binary("×", node, f, AT)
    return node


def factor_of(polynomial: Any, algebra: Algebra) -> tuple[Node, Fraction, Dimension]:
    """A factor with its first term positive, what was taken off it for that, and the dimension that makes its constants plain."""
    if len(polynomial) > _READABLE:
        raise TooMuch
    names = list(algebra.generators)
    at = names.index(S) if S in names else None
    terms = sorted(polynomial.items(), key=lambda t: (_turns(t[0], at) % 2, _turns(t[0], at), [-p for p in t[0]]))
    dimensions = [_dimension(m, names, algebra) for m, _ in terms]
    values = [Fraction(int(c.numerator), int(c.denominator)) for _, c in terms]
    whole = min(dimensions, key=lambda w: _awkward(w, values, dimensions))
    off = _common([x for x, d in zip(values, dimensions, strict=True) if d == whole])
    off = -off if (values[0] < 0) != (_turns(terms[0][0], at) % 4 in (2, 3)) else off
    shown = [_term(x / off, _less(whole, d), m, names) for x, d, (m, _) in zip(values, dimensions, terms, strict=True)]
    node = added(shown)
    return (Group(node, AT) if len(shown) > 1 else node), off, whole


def _turns(monomial: Sequence[int], at: int | None) -> int:
    """The power of jω in a term."""
    return monomial[at] if at is not None else 0


def _common(values: Sequence[Fraction]) -> Fraction:
    """The largest constant of which all are whole multiples."""
    under = lcm(*(x.denominator for x in values))
    return Fraction(gcd(*(int(x * under) for x in values)), under)


def turned(node: Node) -> Node | None:
    """The sum of opposite sign, where it can be written with a positive term first."""
    inner = node.inner if isinstance(node, Group) and not node.unit.text else node
    terms: list[tuple[bool, Node]] = []
    while isinstance(inner, Binary) and inner.operator in ("+", "-"):
        terms.insert(0, (inner.operator == "+", inner.right))
        inner = inner.left
    if all(negative for negative, _ in terms):
        return None
    return Group(added([(True, inner), *terms]), AT)


def _awkward(whole: Dimension, values: Sequence[Fraction], dimensions: Sequence[Dimension]) -> int:
    """How many constants would need a unit that nobody would write, if a sum had this dimension."""
    units = [(_less(whole, d), abs(x) == 1) for x, d in zip(values, dimensions, strict=True)]
    return sum((of != NONE) * (3 * plain + 5 * (unit_of(of) not in UNITS)) for of, plain in units)


def _less(a: Dimension, b: Dimension) -> Dimension:
    return tuple(x - y for x, y in zip(a, b, strict=True))


def _dimension(monomial: Sequence[int], names: Sequence[str], algebra: Algebra) -> Dimension:
    total = NONE
    for name, p in zip(names, monomial, strict=False):
        total = tuple(x + p * y for x, y in zip(total, algebra.dimensions[name], strict=True))
    return total


def _term(value: Fraction, of: Dimension, monomial: Sequence[int], names: Sequence[str]) -> tuple[bool, Node]:
    """Whether a term is negative, and its size. jω comes apart here."""
    turns = monomial[names.index(S)] if S in names else 0
    negative = (value < 0) != (turns % 4 in (2, 3))
    factors: list[Node] = []
    if abs(value) != 1 or of != NONE:
        factors.append(number_of(abs(value), of))
    if turns % 2:
        factors.append(_J)
    for name, p in sorted(zip(names, monomial, strict=False), key=lambda x: x[0] != S):
        if p:
            own = _OMEGA if name == S else Reference(name, AT)
            factors.append(own if p == 1 else Binary("^", own, Number(Decimal(p), AT), AT))
    return negative, product(factors)


def added(terms: Sequence[tuple[bool, Node]]) -> Node:
    """A sum of terms with their signs, one that is positive first where there is one."""
    ordered = sorted(terms, key=lambda t: t[0]) if terms[0][0] else list(terms)
    first_negative, node = ordered[0]
    if first_negative:
        node = Unary("-", node, AT)
    for negative, term in ordered[1:]:
        node = Binary("-" if negative else "+", node, term, AT)
    return node


def _negated(node: Node) -> bool:
    return isinstance(node, Unary)


def _positive(node: Node) -> Node:
    return node.operand if isinstance(node, Unary) else node


def turns(power: int) -> tuple[Node, Fraction]:
    """A power of jω: j and a power of ω, and the sign before it."""
    omega: Node = _OMEGA if power == 1 else Binary("^", _OMEGA, Number(Decimal(power), AT), AT)
    return (product([_J, omega]) if power % 2 else omega), Fraction(-1 if power % 4 in (2, 3) else 1)


def number_of(value: Fraction, dimension: Dimension) -> Node:
    """A constant as a literal, or as a fraction in brackets before its unit. Raises ``TooMuch`` for one of many digits."""
    unit = unit_for(dimension)
    if unit.text and value:
        unit = UNITS.get(printed(value, dimension, _FIGURES).partition(" ")[2], unit)
    scaled = value / unit.factor
    decimal = _decimal(scaled)
    if decimal is not None:
        return Number(decimal, AT, unit)
    if max(scaled.numerator, scaled.denominator) >= 10**_FIGURES:
        raise TooMuch
    over, under = (Number(Decimal(x), AT) for x in (scaled.numerator, scaled.denominator))
    return Group(Binary("÷", over, under, AT), AT, unit)


def is_short(value: Fraction) -> bool:
    """Whether a constant is a decimal of few digits."""
    return _decimal(value) is not None


def _decimal(value: Fraction) -> Decimal | None:
    with localcontext(prec=30):
        decimal = (Decimal(value.numerator) / Decimal(value.denominator)).normalize()
    few = len(decimal.as_tuple().digits) <= _FIGURES and abs(decimal.adjusted()) <= _FIGURES
    return Decimal(f"{decimal:f}") if few and Fraction(decimal) == value else None


def unit_for(dimension: Dimension) -> Unit:
    """The coherent unit of a constant. Raises ``TooMuch`` where that is none of the table."""
    if dimension == NONE:
        return PLAIN
    unit = UNITS.get(unit_of(dimension))
    if unit is None:
        raise TooMuch
    return unit


# --- as text --------------------------------------------------------------------------------------------------------

_SIGNS: dict[str, str] = {"+": " + ", "-": " − ", "×": " × ", "÷": "/", "∥": " ∥ "}
_BINDING = {"+": 1, "-": 1, "×": 2, "÷": 2, "∥": 3, "^": 4}
_RAISED = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")


def compound(node: Node) -> bool:
    """Whether an expression needs brackets below a stroke."""
    return isinstance(node, Binary) and node.operator != "^"


def bracketed(node: Node, operator: str) -> Node:
    """An expression as an operand, in brackets where it binds less."""
    loose = isinstance(node, Unary) or (isinstance(node, Binary) and _BINDING[node.operator] < _BINDING[operator])
    return Group(node, AT) if loose else node


def text_of(node: Node) -> str:
    """An expression as the sheet language writes it."""
    match node:
        case Number():
            return f"{node.digits:f} {node.unit.text}".strip()
        case Reference():
            return node.word
        case Unary():
            return f"−{text_of(node.operand)}"
        case Group():
            return f"({text_of(node.inner)}) {node.unit.text}".strip()
        case Binary(operator="^"):
            return text_of(node.left) + text_of(node.right).translate(_RAISED)
        case Binary():
            return text_of(node.left) + _SIGNS[node.operator] + text_of(node.right)
    raise TooMuch
