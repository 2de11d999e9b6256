"""Second route: each independent source by itself, in exact rational arithmetic.

The circuit is rebuilt with all independent sources zeroed: nodes joined by links and by zeroed voltage sources become one
group, gaps and zeroed current sources are gone. One source at a time is then put back into this smaller circuit, a voltage
source as a step of potential inside its group, a current source as a current into one group and out of another. What is
zeroed is the same for every source, so one elimination serves all of them. The currents through the joined branches follow
from the sums of currents at the nodes, from the ends of their tree inwards.

At AC the rationals are complex, and every reactance is taken for the floating-point number next to it; what comes out is
rounded to floating-point numbers once. Networks of more nodes are worked in floating point.

A combination is a mapping from column to coefficient: unknowns have columns from 0 on, strengths of sources from −1 down.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from calccheck.arithmetic import Value
from calccheck.model import Control, State
from calccheck.solve.branches import Branch, Network, with_terminals
from calccheck.solve.elimination import Row, solve_exact, solve_float
from calccheck.solve.gaussian import gaussian, solve_gaussian

NUMBERS: dict[tuple[bool, bool], Callable[[Any], Any]] = {  # how a value is carried: at AC, exactly
    (False, True): Fraction, (False, False): float, (True, True): gaussian, (True, False): complex,
}  # fmt: skip
EXACT_NODES = 25  # beyond, the rationals grow too long
EXACT_NODES_AC = 12  # the same, for twice as many equations and longer numbers


@dataclass(frozen=True, slots=True)
class _Rebuilt:
    """The network with its sources zeroed.

    ``number``: how a value is carried. ``named``: the branches by name. ``own``: columns of those whose current is an
    unknown. ``strength``: columns of the sources, by part. ``group``: the unknown of every node, ``None`` for the
    reference's. ``potential``: of every node, by columns. ``tree``: the joined branches as (branch, node, node before it),
    ends last.
    """

    network: Network
    number: Callable[[Value], Any]
    named: dict[str, Branch]
    own: dict[str, int]
    strength: dict[str, int]
    group: dict[str, int | None]
    potential: dict[str, Row]
    tree: list[tuple[Branch, str, str]]


def part_states(network: Network) -> dict[str, State]:
    """The state with each independent source of the frequency alone, by its name, of a network whose structure is sound.

    Rationals at DC and complex numbers at AC, both worked exactly where ``is_exact``; else floating point. Raises
    ``Singular``, where exact only where the equations depend on one another.
    """
    exact = is_exact(network)
    rebuilt = _rebuilt(network, exact)
    flows = _flows(rebuilt)
    rows = _equations(rebuilt, flows)
    solved = (solve_float if not exact else solve_gaussian if network.frequency else solve_exact)(rows)
    return {name: _state(rebuilt, flows, solved, column) for name, column in rebuilt.strength.items()}


def is_exact(network: Network) -> bool:
    """Whether this route works the network without rounding."""
    return len(network.nodes) <= (EXACT_NODES_AC if network.frequency else EXACT_NODES)


def stirred(network: Network) -> list[Any]:
    """All unknowns when every equation is stirred by a number of its own, so that no way to swing is left out; exact.

    Raises ``Singular`` where, and only where, the equations have no single solution, at any size.
    """
    rebuilt = _rebuilt(network, True)
    rows = _equations(rebuilt, _flows(rebuilt))
    shaken = [
        {j: x for j, x in row.items() if j >= 0} | {-1: rebuilt.number(Fraction(k))} for k, row in enumerate(rows, 2)
    ]
    return [x[-1] for x in (solve_gaussian if network.frequency else solve_exact)(shaken)]


def _rebuilt(network: Network, exact: bool) -> _Rebuilt:
    steering = {b.control.part for b in network.branches if b.control is not None}
    unknown = [
        b.name
        for b in network.branches
        if b.role in ("controlled voltage", "nullor")
        or (b.name in steering and b.role in ("link", "voltage", "controlled current"))
    ]
    sources = dict.fromkeys(b.part.name for b in network.branches if b.role in ("voltage", "current"))
    strength = {name: -1 - k for k, name in enumerate(sources)}
    own = {name: k for k, name in enumerate(unknown)}
    number = NUMBERS[bool(network.frequency), exact]
    rebuilt = _Rebuilt(network, number, {b.name: b for b in network.branches}, own, strength, {}, {}, [])
    _join(rebuilt)
    return rebuilt


def _joins(b: Branch, rebuilt: _Rebuilt) -> bool:
    """Whether the branch's two nodes are one once the sources are zeroed, and nothing needs its current before that."""
    return b.role in ("link", "voltage") and b.name not in rebuilt.own


def _join(rebuilt: _Rebuilt) -> None:
    """Walks the joined branches from node to node and gives every node its group and its potential."""
    branches: dict[str, list[Branch]] = defaultdict(list)
    for b in rebuilt.network.branches:
        if _joins(b, rebuilt):
            branches[b.plus].append(b)
            branches[b.minus].append(b)
    group, potential = rebuilt.group, rebuilt.potential
    free, reference = len(rebuilt.own), rebuilt.network.circuit.reference
    for start in (reference, *rebuilt.network.nodes):
        if start in group:
            continue
        group[start] = None if start == reference else free
        potential[start] = {} if group[start] is None else {free: rebuilt.number(Fraction(1))}
        free += group[start] is not None
        reached = [start]
        for node in reached:
            for b in branches[node]:
                far = b.minus if b.plus == node else b.plus
                if far in group:
                    continue
                group[far] = group[start]
                potential[far] = _sum(potential[node], _step(b, rebuilt), -1 if b.plus == node else 1)
                rebuilt.tree.append((b, far, node))
                reached.append(far)


def _step(b: Branch, rebuilt: _Rebuilt) -> Row:
    """The voltage of a link, or of a voltage source that stands alone."""
    return {rebuilt.strength[b.part.name]: rebuilt.number(b.value)} if b.role == "voltage" else {}


def _sum(a: Row, b: Row, factor: int) -> Row:
    """a + factor · b."""
    total = dict(a)
    for j, x in b.items():
        total[j] = total.get(j, 0) + factor * x
    return total


def _scaled(a: Row, factor: Any) -> Row:
    return {j: factor * x for j, x in a.items()}


def _across(plus: str, minus: str, rebuilt: _Rebuilt) -> Row:
    return _sum(rebuilt.potential[plus], rebuilt.potential[minus], -1)


def _flows(rebuilt: _Rebuilt) -> dict[str, Row]:
    """The currents of the branches that are not joined, as combinations."""
    return {b.name: _current(b, rebuilt) for b in rebuilt.network.branches if not _joins(b, rebuilt)}


def _current(b: Branch, rebuilt: _Rebuilt) -> Row:
    """The current of a branch that is not joined."""
    if b.name in rebuilt.own:
        return {rebuilt.own[b.name]: rebuilt.number(Fraction(1))}
    match b.role:
        case "impedance":
            return _scaled(_across(b.plus, b.minus, rebuilt), 1 / rebuilt.number(b.value))
        case "current":
            return {rebuilt.strength[b.part.name]: rebuilt.number(b.value)}
        case "controlled current":
            return _scaled(_steering(b, rebuilt), rebuilt.number(b.value))
    return {}


def _steering(b: Branch, rebuilt: _Rebuilt) -> Row:
    """The current or voltage that steers a branch."""
    control = b.control or Control()
    if control.part:
        return _current(rebuilt.named[control.part], rebuilt)
    return _across(control.plus, control.minus, rebuilt)


def _equations(rebuilt: _Rebuilt, flows: dict[str, Row]) -> list[Row]:
    """The laws of the branches whose current is an unknown, then the sum of the currents leaving each group."""
    rows: list[Row] = [{} for _ in rebuilt.own]
    rows += [{} for _ in {g for g in rebuilt.group.values() if g is not None}]
    for b in rebuilt.network.branches:
        here, there = rebuilt.group[b.plus], rebuilt.group[b.minus]
        flow = flows.get(b.name, {})
        if here != there:
            for at, sign in ((here, 1), (there, -1)):
                if at is not None:
                    rows[at] = _sum(rows[at], flow, sign)
        if b.name in rebuilt.own:
            rows[rebuilt.own[b.name]] = _law(b, rebuilt)
    return rows


def _law(b: Branch, rebuilt: _Rebuilt) -> Row:
    """What is zero in a branch whose current is an unknown."""
    match b.role:
        case "nullor":
            return _steering(b, rebuilt)
        case "controlled current":
            put_out = _scaled(_steering(b, rebuilt), rebuilt.number(b.value))
            return _sum({rebuilt.own[b.name]: rebuilt.number(Fraction(1))}, put_out, -1)
        case "controlled voltage":
            put_out = _scaled(_steering(b, rebuilt), rebuilt.number(b.value))
            return _sum(_across(b.plus, b.minus, rebuilt), put_out, -1)
    return _sum(_across(b.plus, b.minus, rebuilt), _step(b, rebuilt), -1)


def _state(rebuilt: _Rebuilt, flows: dict[str, Row], solved: list[Row], column: int) -> State:
    """Everything with the source of that column at its strength and all others zeroed."""
    zero = rebuilt.number(Fraction(0))

    def worked(combination: Row) -> Any:
        total = combination.get(column, zero)
        for j, x in combination.items():
            if j >= 0 and (y := solved[j].get(column)):
                total += x * y
        return total

    potentials = {node: worked(rebuilt.potential[node]) for node in rebuilt.potential}
    currents = {name: worked(flow) for name, flow in flows.items()}
    leaving = dict.fromkeys((n for _, *ends in rebuilt.tree for n in ends), zero)
    for b in rebuilt.network.branches:
        if b.name in currents:
            if b.plus in leaving:
                leaving[b.plus] += currents[b.name]
            if b.minus in leaving:
                leaving[b.minus] -= currents[b.name]
    for b, node, before in reversed(rebuilt.tree):
        currents[b.name] = leaving[node] if b.minus == node else -leaving[node]
        leaving[before] += leaving[node]
    done: Callable[[Any], Value] = complex if rebuilt.network.frequency else lambda x: x
    ordered = {b.name: done(currents[b.name]) for b in rebuilt.network.branches}
    return State({node: done(v) for node, v in potentials.items()}, with_terminals(rebuilt.network.circuit, ordered))
