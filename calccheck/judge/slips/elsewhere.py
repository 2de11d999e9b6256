"""The slip of a right value in the wrong place: another true value of the same circuit."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import replace

from calccheck.arithmetic import Doubt, Value
from calccheck.judge import quantities
from calccheck.judge.scope import Key
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.redo import NOWHERE
from calccheck.judge.slips.sources import acting
from calccheck.model import Circuit, Element, State
from calccheck.units import AMPERE, VOLT, WATT, Dimension


def other_quantity(case: Case) -> Iterator[Guess]:
    """Another node, part, share of a source, or kind of quantity."""
    key, circuit = case.key, case.circuit
    if circuit is None:
        return
    if key is not None:
        yield from _same_place(key, circuit, case)
        yield from _other_share(key, circuit, case)
    elif case.held.restates:
        for e in circuit.elements:
            if e.stated is not None:
                yield Guess(f"the value of {e.name}", e.stated.value, e.stated.dimension)


def _same_place(key: Key, circuit: Circuit, case: Case) -> Iterator[Guess]:
    """Voltages, currents and powers under the same qualifiers."""
    states = tuple(acting(case).values())
    if not states:
        return
    base = case.redo.prepared(circuit, key)
    for letter, name, value, dimension in _readings(base, _added(states)):
        if (letter, (name,)) == (key.letter, key.subscripts):
            continue
        label = f"{letter}_{name}" if re.fullmatch(r"\w+", name) else f"{letter}_{{{name}}}"
        yield Guess(f"{label} in its place", value, dimension)
        if (name,) == key.subscripts and dimension != case.dimension:
            yield Guess(f"the number of {label} in its place", value, case.dimension)


def _added(states: tuple[State, ...]) -> State:
    potentials = {n: sum(s.potentials[n] for s in states) for n in states[0].potentials}
    return State(potentials, {n: sum(s.currents[n] for s in states) for n in states[0].currents})


def _readings(circuit: Circuit, state: State) -> Iterator[tuple[str, str, Value, Dimension]]:
    for node in circuit.nodes():
        if node != circuit.reference and circuit.element(node) is None:
            yield "V", node, state.potentials[node], VOLT
    for e in circuit.elements:
        if not e.terminals:
            yield from _of_part(e, state)


def _of_part(e: Element, state: State) -> Iterator[tuple[str, str, Value, Dimension]]:
    volts, amperes = state.potentials[e.plus] - state.potentials[e.minus], state.currents[e.name]
    yield "V", e.name, volts, VOLT
    yield "I", e.name, amperes, AMPERE
    yield "P", e.name, volts * amperes, WATT


def _other_share(key: Key, circuit: Circuit, case: Case) -> Iterator[Guess]:
    """The same quantity due to other sources, or in the unchanged circuit."""
    names = [s.name for s in circuit.sources()]
    shares = [frozenset({name}) for name in names] if key.due_to or len(names) > 2 else []
    others: list[tuple[str, Key]] = [(f"the part due to {min(s)}", replace(key, due_to=s)) for s in shares]
    if key.due_to:
        others.append(("the total of all sources", replace(key, due_to=frozenset())))
    if key.changes:
        others.append(("the value in the unchanged circuit", replace(key, changes=())))
    for what, other in others:
        if other == key:
            continue
        try:
            amount = quantities.amount(other, case.ledger, NOWHERE)
        except Doubt:
            continue
        yield Guess(f"{what} in its place", amount.value, amount.dimension)
