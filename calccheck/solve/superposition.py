"""Second route: each independent source by itself, in exact rational arithmetic.

The circuit is rebuilt with all independent sources zeroed: nodes joined by links and by zeroed voltage sources become one
group, gaps and zeroed current sources are gone. One source at a time is then put back into this smaller circuit, a voltage
source as a step of potential inside its group, a current source as a current into one group and out of another. What is
zeroed is the same for every source, so one elimination serves all of them. The currents through the joined branches follow
from the sums of currents at the nodes, from the ends of their tree inwards.

A combination is a mapping from column to coefficient: unknowns have columns from 0 on, strengths of sources from −1 down.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Real
from calccheck.model import Circuit, Control, Element, State
from calccheck.solve.at_dc import role, value
from calccheck.solve.elimination import Row, solve_exact, solve_float

EXACT_NODES = 25  # beyond, the rationals grow too long


@dataclass(frozen=True, slots=True)
class _Rebuilt:
    """The circuit with its sources zeroed.

    ``group``: the unknown of every node, ``None`` for the reference's. ``potential``: of every node, by columns. ``tree``:
    the joined branches as (branch, node, node before it), ends last. ``own``: columns of the parts whose current is an
    unknown. ``strength``: columns of the sources. ``number``: how a value is carried.
    """

    circuit: Circuit
    number: Callable[[Fraction], Real]
    own: dict[str, int]
    strength: dict[str, int]
    group: dict[str, int | None]
    potential: dict[str, Row]
    tree: list[tuple[Element, str, str]]


def part_states(circuit: Circuit) -> dict[str, State]:
    """The state with each independent source alone, by its name, of a circuit whose structure is sound.

    Rationals up to ``EXACT_NODES`` nodes, floats beyond. Raises ``Singular``.
    """
    exact = is_exact(circuit)
    rebuilt = _rebuilt(circuit, Fraction if exact else float)
    flows = _flows(rebuilt)
    rows = _equations(rebuilt, flows)
    solved = solve_exact(rows) if exact else solve_float(rows)
    return {name: _state(rebuilt, flows, solved, column) for name, column in rebuilt.strength.items()}


def is_exact(circuit: Circuit) -> bool:
    """Whether this route works the circuit in rationals."""
    return len(circuit.nodes()) <= EXACT_NODES


def check_rank(circuit: Circuit) -> None:
    """Raises ``Singular`` where, and only where, the equations have no single solution; exact at any size."""
    rebuilt = _rebuilt(circuit, Fraction)
    solve_exact(_equations(rebuilt, _flows(rebuilt)))


def _rebuilt(circuit: Circuit, number: Callable[[Fraction], Real]) -> _Rebuilt:
    steering = {e.control.part for e in circuit.elements if e.control is not None}
    unknown = [
        e.name
        for e in circuit.elements
        if role(e) == "controlled voltage"
        or (e.name in steering and role(e) in ("link", "voltage", "controlled current"))
    ]
    strength = {e.name: -1 - k for k, e in enumerate(circuit.sources())}
    own = {name: k for k, name in enumerate(unknown)}
    rebuilt = _Rebuilt(circuit, number, own, strength, {}, {}, [])
    _join(rebuilt)
    return rebuilt


def _joins(e: Element, rebuilt: _Rebuilt) -> bool:
    """Whether the part's two nodes are one once the sources are zeroed, and nothing needs its current before that."""
    return role(e) in ("link", "voltage") and e.name not in rebuilt.own


def _join(rebuilt: _Rebuilt) -> None:
    """Walks the joined branches from node to node and gives every node its group and its potential."""
    branches: dict[str, list[Element]] = defaultdict(list)
    for e in rebuilt.circuit.elements:
        if _joins(e, rebuilt):
            branches[e.plus].append(e)
            branches[e.minus].append(e)
    group, potential = rebuilt.group, rebuilt.potential
    free = len(rebuilt.own)
    for start in (rebuilt.circuit.reference, *rebuilt.circuit.nodes()):
        if start in group:
            continue
        group[start] = None if start == rebuilt.circuit.reference else free
        potential[start] = {} if group[start] is None else {free: rebuilt.number(Fraction(1))}
        free += group[start] is not None
        reached = [start]
        for node in reached:
            for e in branches[node]:
                far = e.minus if e.plus == node else e.plus
                if far in group:
                    continue
                group[far] = group[start]
                potential[far] = _sum(potential[node], _step(e, rebuilt), -1 if e.plus == node else 1)
                rebuilt.tree.append((e, far, node))
                reached.append(far)


def _step(e: Element, rebuilt: _Rebuilt) -> Row:
    """The voltage of a link, or of a voltage source that stands alone."""
    return {rebuilt.strength[e.name]: rebuilt.number(value(e))} if role(e) == "voltage" else {}


def _sum(a: Row, b: Row, factor: Real) -> Row:
    """a + factor · b."""
    total = dict(a)
    for j, x in b.items():
        total[j] = total.get(j, 0) + factor * x
    return total


def _scaled(a: Row, factor: Real) -> Row:
    return {j: factor * x for j, x in a.items()}


def _across(plus: str, minus: str, rebuilt: _Rebuilt) -> Row:
    return _sum(rebuilt.potential[plus], rebuilt.potential[minus], -1)


def _flows(rebuilt: _Rebuilt) -> dict[str, Row]:
    """The currents of the parts that are not joined, as combinations."""
    return {e.name: _current(e, rebuilt) for e in rebuilt.circuit.elements if not _joins(e, rebuilt)}


def _current(e: Element, rebuilt: _Rebuilt) -> Row:
    """The current of a part that is not joined."""
    if e.name in rebuilt.own:
        return {rebuilt.own[e.name]: rebuilt.number(Fraction(1))}
    match role(e):
        case "resistor":
            return _scaled(_across(e.plus, e.minus, rebuilt), 1 / rebuilt.number(value(e)))
        case "current":
            return {rebuilt.strength[e.name]: rebuilt.number(value(e))}
        case "controlled current":
            return _control(e, rebuilt)
    return {}


def _control(e: Element, rebuilt: _Rebuilt) -> Row:
    """What a controlled source puts out: its gain times what steers it."""
    control = e.control or Control()
    if control.part:
        part = rebuilt.circuit.element(control.part)
        steer = {} if part is None else _current(part, rebuilt)
    else:
        steer = _across(control.plus, control.minus, rebuilt)
    return _scaled(steer, rebuilt.number(value(e)))


def _equations(rebuilt: _Rebuilt, flows: dict[str, Row]) -> list[Row]:
    """The laws of the parts whose current is an unknown, then the sum of the currents leaving each group."""
    rows: list[Row] = [{} for _ in rebuilt.own]
    rows += [{} for _ in {g for g in rebuilt.group.values() if g is not None}]
    for e in rebuilt.circuit.elements:
        here, there = rebuilt.group[e.plus], rebuilt.group[e.minus]
        flow = flows.get(e.name, {})
        if here != there:
            for at, sign in ((here, 1), (there, -1)):
                if at is not None:
                    rows[at] = _sum(rows[at], flow, sign)
        if e.name in rebuilt.own:
            rows[rebuilt.own[e.name]] = _law(e, rebuilt)
    return rows


def _law(e: Element, rebuilt: _Rebuilt) -> Row:
    """What is zero in a part whose current is an unknown."""
    if role(e) == "controlled current":
        return _sum({rebuilt.own[e.name]: rebuilt.number(Fraction(1))}, _control(e, rebuilt), -1)
    put_out = _control(e, rebuilt) if role(e) == "controlled voltage" else _step(e, rebuilt)
    return _sum(_across(e.plus, e.minus, rebuilt), put_out, -1)


def _state(rebuilt: _Rebuilt, flows: dict[str, Row], solved: list[Row], column: int) -> State:
    """Everything with the source of that column at its strength and all others zeroed."""
    zero = rebuilt.number(Fraction(0))

    def worked(combination: Row) -> Real:
        total = combination.get(column, zero)
        for j, x in combination.items():
            if j >= 0 and (y := solved[j].get(column)):
                total += x * y
        return total

    potentials = {node: worked(rebuilt.potential[node]) for node in rebuilt.potential}
    currents = {name: worked(flow) for name, flow in flows.items()}
    leaving = dict.fromkeys((n for _, *ends in rebuilt.tree for n in ends), zero)
    for e in rebuilt.circuit.elements:
        if e.name in currents:
            if e.plus in leaving:
                leaving[e.plus] += currents[e.name]
            if e.minus in leaving:
                leaving[e.minus] -= currents[e.name]
    for e, node, before in reversed(rebuilt.tree):
        currents[e.name] = leaving[node] if e.minus == node else -leaving[node]
        leaving[before] += leaving[node]
    return State(potentials, {e.name: currents[e.name] for e in rebuilt.circuit.elements})
