"""A ratio of polynomials written the way an engineer writes it: factored, few brackets, sources first, jω as j × ω."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from decimal import Decimal
from fractions import Fraction
from typing import Any

from calccheck.formula import Binary, Group, Node, Number, Reference, Unary, references
from calccheck.model import Element
from calccheck.solve.symbolic import Algebra, Ratio, S, TooMuch, rational, value_of
from calccheck.solve.tableau import quantity
from calccheck.solve.terms import (
    AT,
    added,
    bracketed,
    compound,
    factor_of,
    is_short,
    number_of,
    product,
    text_of,
    turned,
    turns,
    unit_for,
)
from calccheck.sought import ClosedForm, Meaning, Sought
from calccheck.units import AMPERE, HERTZ, NONE, VOLT, Dimension

_LONGEST = 200  # characters of a formula that anybody reads


def closed_form(
    node: Node, meanings: Mapping[Reference, Meaning], symbols: Mapping[str, Dimension], dimension: Dimension
) -> ClosedForm | None:
    """An expression of quantities of circuits in the circuits' symbols, as ``sought.Close`` says."""
    frequencies = {m.frequency for m in meanings.values() if isinstance(m, Sought)}
    hertz = next(iter(frequencies), Fraction(0)) if len(frequencies) == 1 else Fraction(0)
    try:
        algebra = Algebra({**symbols, S: HERTZ} if hertz > 0 else symbols)

        def lookup(ref: Reference) -> Ratio:
            meaning = meanings.get(ref)
            if isinstance(meaning, Sought):
                if len(frequencies) > 1:
                    raise TooMuch
                return quantity(meaning, algebra)
            if isinstance(meaning, Element):
                return value_of(meaning, algebra)
            return rational(meaning, algebra, lookup) if meaning is not None else algebra.symbol(ref.word)

        found = algebra.simplest(rational(node, algebra, lookup))
        written = min((f(found, algebra, dimension) for f in (_whole, _by_source)), key=_length)
    except TooMuch:
        return None
    text = text_of(written)
    if len(text) > _LONGEST:
        return None
    return ClosedForm(written, text, hertz if any(r.word == "ω" for r in references(written)) else Fraction(0))


def _length(node: Node) -> int:
    return len(text_of(node))


# --- arranging ------------------------------------------------------------------------------------------------------


def _whole(found: Ratio, algebra: Algebra, dimension: Dimension) -> Node:
    """One fraction."""
    return _fraction(found, algebra, dimension)


def _by_source(found: Ratio, algebra: Algebra, dimension: Dimension) -> Node:
    """A sum of what each source's symbol brings about, where there are several and the whole is linear in them."""
    sources = [g for name, g in algebra.generators.items() if algebra.dimensions[name] in (VOLT, AMPERE)]
    shares = [_linear_in(found.over, g, sources, algebra) for g in sources]
    shares = [share for share in shares if share]
    if len(shares) < 2 or sum(shares, algebra.zero) != found.over:
        return _whole(found, algebra, dimension)
    parts = [_fraction(algebra.simplest(Ratio(share, found.under)), algebra, dimension) for share in shares]
    signed = [(True, p.operand) if isinstance(p, Unary) else (False, p) for p in parts]
    return added(signed)


def _linear_in(polynomial: Any, g: Any, sources: Sequence[Any], algebra: Algebra) -> Any:
    """The terms in which this source's symbol stands once and no other."""
    at = [algebra.index(x) for x in sources]
    own = algebra.index(g)
    kept = {m: c for m, c in polynomial.items() if m[own] == 1 and sum(m[k] for k in at) == 1}
    return algebra.polynomial(kept)


def _fraction(found: Ratio, algebra: Algebra, dimension: Dimension) -> Node:
    """Constant and factors above the stroke, factors below it."""
    if not found.over:
        return Number(Decimal(0), AT, unit_for(dimension))
    (a, over), (b, under) = algebra.factors(found.over), algebra.factors(found.under)
    constant, rest = a / b, dimension
    sides: tuple[list[Placed], list[Placed]] = ([], [])
    for factors, side, sign in ((over, sides[0], 1), (under, sides[1], -1)):
        for polynomial, power in factors:
            node, off, own = factor_of(polynomial, algebra)
            if polynomial == algebra.generators.get(S):
                node, off = turns(power)
                power, off, own = 1, off, tuple(power * x for x in own)
            constant *= off ** (sign * power)
            rest = tuple(x - sign * power * y for x, y in zip(rest, own, strict=True))
            side.append((_order(polynomial, algebra), node, power))
    if constant < 0:
        constant = _without_sign(constant, sides[0])
    return _stroke(constant, rest, [_powers(side) for side in sides])


Placed = tuple[tuple[int, int], Node, int]


def _without_sign(constant: Fraction, top: list[Placed]) -> Fraction:
    """The sign taken into a difference above the stroke: b − a for −(a − b)."""
    for k, (order, node, power) in enumerate(top):
        other = turned(node) if power % 2 else None
        if other is not None:
            top[k] = (order, other, power)
            return -constant
    return constant


def _powers(factors: Sequence[Placed]) -> list[Node]:
    """The factors in the order in which they stand, with their powers."""
    found: list[Node] = []
    for _, node, power in sorted(factors, key=lambda f: f[0]):
        found.append(node if power == 1 else Binary("^", bracketed(node, "^"), Number(Decimal(power), AT), AT))
    return found


def _order(polynomial: Any, algebra: Algebra) -> tuple[int, int]:
    """Sources first, then jω, then single symbols, then sums."""
    used = [k for k in range(len(algebra.generators)) if polynomial.degree(k) > 0]
    names = list(algebra.generators)
    if len(polynomial) > 1:
        return 3, used[0] if used else 0
    name = names[used[0]]
    return (0 if algebra.dimensions[name] in (VOLT, AMPERE) else 1 if name == S else 2), used[0]


def _stroke(constant: Fraction, rest: Dimension, sides: Sequence[list[Node]]) -> Node:
    top, bottom = sides
    sign, size = constant < 0, abs(constant)
    if rest != NONE or (min(size.numerator, size.denominator) > 1 and is_short(size)):
        top = [number_of(size, rest), *top]
    else:
        top = [*([number_of(Fraction(size.numerator), NONE)] if size.numerator != 1 or not top else []), *top]
        bottom = [*([number_of(Fraction(size.denominator), NONE)] if size.denominator != 1 else []), *bottom]
    parallel = _parallel(top, bottom)
    if parallel is not None:
        top, bottom = parallel, []
    node = product(top)
    if bottom:
        below = product(bottom)
        node = Binary("÷", bracketed(node, "÷"), Group(below, AT) if compound(below) else below, AT)
    elif isinstance(node, Group) and not node.unit.text and not sign:
        node = node.inner
    return Unary("-", node, AT) if sign else node


def _parallel(top: list[Node], bottom: list[Node]) -> list[Node] | None:
    """R1·R2/(R1 + R2) as R1 ∥ R2."""
    sum_ = bottom[0] if len(bottom) == 1 else None
    if not isinstance(sum_, Group) or not isinstance(sum_.inner, Binary) or sum_.inner.operator != "+":
        return None
    pair = (sum_.inner.left, sum_.inner.right)
    if not all(isinstance(x, Reference) and x in top for x in pair):
        return None
    rest = [x for x in top if x not in pair]
    both = Binary("∥", *pair, AT)
    return [*rest, Group(both, AT) if rest else both]
