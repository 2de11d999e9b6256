"""Which free symbols a quantity depends on, found by giving each another value."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace

from calccheck.arithmetic import Amount, DimensionFault, Doubt, evaluate
from calccheck.formula import Node, references
from calccheck.judge.members import Names
from calccheck.judge.rounding import equal
from calccheck.judge.scope import Ledger, define
from calccheck.judge.symbols import Point
from calccheck.model import Judged, Reading

MakeLedger = Callable[[Point], Ledger]


def depending(j: Judged, reading: Reading, ledger: Ledger, make: MakeLedger, other: Point) -> list[str]:
    """The symbols that change what a claim is held against; all of them where that cannot be told.

    ``ledger``: at the first point, with what stands above the claim; ``make`` gives a fresh one at another; ``other``: another
    value for each symbol.
    """
    node = _truth(j, ledger)
    if node is None:
        return sorted(ledger.symbols)
    own = evaluate(node, Names(j.claim.circuit, ledger).amount)
    found = []
    for name in sorted(ledger.symbols):
        moved = _again(reading, ledger, make({**ledger.symbols, name: other[name]}))
        try:
            same = equal(evaluate(node, Names(j.claim.circuit, moved).amount).value, own.value)
        except (Doubt, DimensionFault):
            same = False
        if not same:
            found.append(name)
    return found or sorted(ledger.symbols)


def _truth(j: Judged, ledger: Ledger) -> Node | None:
    """The member that gives the claim's truth."""
    names = Names(j.claim.circuit, ledger)
    for member in j.claim.members:
        amount = _amount(member.node, names) if references(member.node) else None
        if amount is not None and j.computed is not None and equal(amount.value, j.computed.value):
            return member.node
    return None


def _amount(node: Node, names: Names) -> Amount | None:
    try:
        return evaluate(node, names.amount)
    except (Doubt, DimensionFault):
        return None


def _again(reading: Reading, ledger: Ledger, moved: Ledger) -> Ledger:
    """The names that the sheet has defined so far, worked at another point."""
    nearest: Mapping[int, int] = {c.span.start: c.circuit for c in reading.claims}
    for d in ledger.names.values():
        amount = _amount(d.node, Names(nearest.get(d.offset, 0), moved)) if d.node is not None else None
        define(replace(d, exact=amount) if amount is not None else d, moved)
    return moved
