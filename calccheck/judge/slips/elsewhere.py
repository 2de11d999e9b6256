"""The slip of a right value in the wrong place: another true value of the same circuit."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import replace
from fractions import Fraction

from calccheck.arithmetic import Doubt, Value
from calccheck.judge import powers, quantities
from calccheck.judge.scope import Key
from calccheck.judge.slips.again import POWERS
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.figures import taken
from calccheck.judge.slips.redo import NOWHERE
from calccheck.judge.slips.sources import together
from calccheck.model import Circuit, Element, Settings, State
from calccheck.units import AMPERE, NONE, VOLT, WATT, Dimension


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
    """Voltages, currents and powers under the same qualifiers, each as the claim takes its own: by its magnitude, say."""
    state = together(case)
    if state is None or case.which == "rms":
        return
    (frequency,) = case.frequencies
    base = case.redo.prepared(circuit, key, frequency)
    for letter, name, value, dimension in _readings(base, state, frequency, case.ledger.settings):
        if (letter, (name,)) == (key.letter, key.subscripts):
            continue
        label = f"{letter}_{name}" if re.fullmatch(r"\w+", name) else f"{letter}_{{{name}}}"
        shown = taken(case.which, value)
        yield Guess(f"{label} in its place", shown, NONE if case.which == "arg" else dimension)
        if (name,) == key.subscripts and dimension != case.dimension:
            yield Guess(f"the number of {label} in its place", shown, case.dimension)


def _readings(
    circuit: Circuit, state: State, frequency: Fraction, settings: Settings
) -> Iterator[tuple[str, str, Value, Dimension]]:
    for node in circuit.nodes():
        if node != circuit.reference and circuit.element(node) is None:
            yield "V", node, state.potentials[node], VOLT
    for e in circuit.elements:
        if not e.terminals:
            yield from _of_part(e, state, frequency, settings)


def _of_part(
    e: Element, state: State, frequency: Fraction, settings: Settings
) -> Iterator[tuple[str, str, Value, Dimension]]:
    volts, amperes = state.potentials[e.plus] - state.potentials[e.minus], state.currents[e.name]
    yield "V", e.name, volts, VOLT
    yield "I", e.name, amperes, AMPERE
    for letter in POWERS if frequency else POWERS[:1]:
        yield letter, e.name, powers.power(letter, {frequency: (volts, amperes)}, settings), WATT


def _other_share(key: Key, circuit: Circuit, case: Case) -> Iterator[Guess]:
    """The same quantity due to other sources, or in the unchanged circuit."""
    names = [s.name for s in circuit.sources()]
    shares = [frozenset({name}) for name in names] if key.due_to or len(names) > 2 else []
    others: list[tuple[str, Key]] = [(f"the part due to {min(s)}", replace(key, due_to=s)) for s in shares]
    if key.due_to:
        others.append(("the total of all sources", replace(key, due_to=frozenset())))
    if key.frequency is not None:
        rest = [f for f in circuit.frequencies if f != key.frequency]
        others += [(f"the part at {float(f):g} Hz" if f else "the part at dc", replace(key, frequency=f)) for f in rest]
    if key.changes:
        others.append(("the value in the unchanged circuit", replace(key, changes=())))
    for what, other in others:
        if other == key:
            continue
        try:
            work = quantities.rms if case.which == "rms" else quantities.amount
            amount = work(other, case.ledger, NOWHERE)
        except Doubt:
            continue
        dimension = NONE if case.which == "arg" else amount.dimension
        yield Guess(f"{what} in its place", taken(case.which, amount.value), dimension)
