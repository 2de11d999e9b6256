"""A voltage or current of a circuit with symbols as a ratio of polynomials.

The laws of all branches and the sums of currents at the nodes (the tableau), unknowns with constant coefficients eliminated, the
rest by minors column by column, so that nothing is divided before the end (Cramer's rule).
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from fractions import Fraction
from typing import Any

from calccheck.model import Control, Element
from calccheck.solve.branches import Branch, network_of
from calccheck.solve.symbolic import Algebra, Ratio, S, TooMuch, value_of
from calccheck.sought import Sought

_MOST_ROWS = 12  # equations left when all constants are used up


Equation = dict[str, Any]  # coefficients by unknown; "" is the known side
_GOAL = " sought"  # names with a blank cannot meet those of nodes and parts


def quantity(sought: Sought, algebra: Algebra) -> Ratio:
    """A voltage or current of a circuit with symbols, as a ratio. Raises ``TooMuch`` where it is given up."""
    rows = _equations(sought, algebra)
    rows = _without_constants(rows, algebra)
    unknowns = sorted({u for row in rows for u in row} - {"", _GOAL}, key=lambda u: sum(u in row for row in rows))
    if len(unknowns) + 1 != len(rows) or len(rows) > _MOST_ROWS:
        raise TooMuch
    over, under = _by_minors(rows, unknowns, algebra)
    return algebra.simplest(Ratio(over, under))


def _equations(sought: Sought, algebra: Algebra) -> list[Equation]:
    """The laws of all branches, the sums of currents at all nodes but the reference, and what is sought."""
    circuit = sought.circuit
    network = network_of(circuit, sought.frequency)
    own = {n: f"V {n}" for n in network.nodes if n != circuit.reference}

    def across(plus: str, minus: str, factor: Any) -> Equation:
        row: Equation = {}
        for node, x in ((plus, factor), (minus, -factor)):
            if node in own:
                row[own[node]] = row.get(own[node], algebra.zero) + x
        return row

    sums: dict[str, Equation] = {n: {} for n in own}
    rows: list[Equation] = []
    for b in network.branches:
        for node, sign in ((b.plus, 1), (b.minus, -1)):
            if node in sums:
                sums[node][f"I {b.name}"] = sums[node].get(f"I {b.name}", algebra.zero) + sign
        rows.append(_law(b, b.part, across, algebra))
    if sought.letter == "V":
        goal = across(sought.where[0], sought.where[1], algebra.one)
    elif any(b.name == sought.where[0] for b in network.branches):
        goal = {f"I {sought.where[0]}": algebra.one}
    else:
        raise TooMuch
    every = [*rows, *sums.values(), {**goal, _GOAL: -algebra.one}]
    return [{u: x for u, x in row.items() if x} for row in every]


def _law(b: Branch, e: Element, across: Callable[[str, str, Any], Equation], algebra: Algebra) -> Equation:
    """One branch's law: coefficients of the unknowns and, under the empty name, the known side."""
    current, one = f"I {b.name}", algebra.one
    match b.role:
        case "link":
            return across(b.plus, b.minus, one)
        case "gap":
            return {current: one}
        case "nullor":
            control = b.control or Control()
            return across(control.plus, control.minus, one)
        case "impedance":
            z = _impedance(e, algebra)
            return across(b.plus, b.minus, z.under) | {current: -z.over}
    value = value_of(e, algebra) if e.device is None else Ratio(algebra.number(_plain(b)), one)
    left = across(b.plus, b.minus, value.under) if "voltage" in b.role else {current: value.under}
    if b.control is None:
        return left | {"": value.over}
    steer = {f"I {b.control.part}": one} if b.control.part else across(b.control.plus, b.control.minus, one)
    for u, x in steer.items():
        left[u] = left.get(u, algebra.zero) - algebra.times(value.over, x)
    return left


def _plain(b: Branch) -> Fraction:
    if not isinstance(b.value, Fraction):
        raise TooMuch
    return b.value


def _impedance(e: Element, algebra: Algebra) -> Ratio:
    own = value_of(e, algebra)
    if e.kind == "inductor":
        return algebra.product(algebra.symbol(S), own)
    return algebra.inverse(algebra.product(algebra.symbol(S), own)) if e.kind == "capacitor" else own


def _without_constants(rows: Sequence[Equation], algebra: Algebra) -> list[Equation]:
    """The equations left when every unknown with a constant coefficient somewhere, but what is sought, is eliminated."""
    left = list(rows)
    while True:
        pivots = [(k, u) for k, row in enumerate(left) for u, x in row.items() if u not in ("", _GOAL) and x.is_ground]
        if not pivots:
            return left
        sharing = {u: sum(u in row for row in left) for _, u in pivots}
        k, u = min(pivots, key=lambda p: (len(left[p[0]]) - 1) * (sharing[p[1]] - 1))
        pivot = left.pop(k)
        scaled = {v: x * (1 / pivot[u].LC) for v, x in pivot.items() if v != u}
        left = [_freed(row, u, scaled, algebra) if u in row else row for row in left]
        left = [row for row in left if row]


def _freed(row: Equation, u: str, scaled: Equation, algebra: Algebra) -> Equation:
    """A row without an unknown, by a pivot row scaled so that the unknown stands there once."""
    factor = row[u]
    new = {v: x for v, x in row.items() if v != u}
    for v, x in scaled.items():
        new[v] = new.get(v, algebra.zero) - algebra.times(factor, x)
    return {v: x for v, x in new.items() if x}


def _by_minors(rows: Sequence[Equation], unknowns: Sequence[str], algebra: Algebra) -> tuple[Any, Any]:
    """Numerator and denominator of what is sought, by Cramer's rule; minors of the first columns by the rows in them."""
    minors: dict[int, Any] = {0: algebra.one}
    for u in unknowns:
        minors = _one_more(minors, [row.get(u) for row in rows], algebra)
    ends = [_one_more(minors, [row.get(side) for row in rows], algebra) for side in ("", _GOAL)]
    known, under = (next(iter(end.values()), algebra.zero) for end in ends)
    if not under:
        raise TooMuch
    return known, under


def _one_more(minors: Mapping[int, Any], column: Sequence[Any], algebra: Algebra) -> dict[int, Any]:
    """The minors with one more column, each by the bits of its rows."""
    found: dict[int, Any] = {}
    for rows, minor in minors.items():
        for k, x in enumerate(column):
            if x is None or rows >> k & 1:
                continue
            term = algebra.times(minor, x)
            behind = (rows >> k).bit_count() % 2
            key = rows | 1 << k
            found[key] = found.get(key, algebra.zero) + (-term if behind else term)
    return {rows: minor for rows, minor in found.items() if minor}
