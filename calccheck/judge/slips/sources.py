"""Slips with the sources: in the sum of their parts, and in how the others are zeroed."""

from __future__ import annotations

import contextlib
from collections.abc import Iterator, Mapping
from dataclasses import replace
from fractions import Fraction

from calccheck.arithmetic import Doubt
from calccheck.judge.slips.again import POWERS, Again
from calccheck.judge.slips.case import Case, Guess, Terms
from calccheck.judge.slips.redo import Make, Variant, put
from calccheck.model import Circuit, Element, Kind, State


def source_missing(case: Case) -> Iterator[Guess]:
    """The sum without one source's part; a drop of a hand model left out is another slip."""
    drops = {e.name for e in case.circuit.elements if e.device is not None} if case.circuit is not None else set()
    for name, rest, _ in _parted(case):
        if name not in drops:
            yield Guess(f"{name}'s contribution left out", terms=rest)


def source_reversed(case: Case) -> Iterator[Guess]:
    """The sum with one part's sign turned."""
    for name, rest, part in _parted(case):
        yield Guess(f"{name}'s contribution taken with the opposite sign", terms=(*rest, (-1, *part)))


def source_twice(case: Case) -> Iterator[Guess]:
    """The sum with one part counted twice."""
    for name, rest, part in _parted(case):
        yield Guess(f"{name}'s contribution counted twice", terms=(*rest, (2, *part)))


def power_superposed(case: Case) -> Iterator[Guess]:
    """The sum of each source's own power, which does not superpose."""
    key, parts = case.key, acting(case)
    if key is not None and key.letter in POWERS and len(parts) > 1:
        again = Again(case)
        powers = [again.value(Guess("", terms=((1, *part),))) for part in parts.values()]
        if None not in powers:
            yield Guess("the powers of each source alone added up", sum(p for p in powers if p is not None))


Part = tuple[State, Fraction]  # what one source brings about, and its frequency


def _parted(case: Case) -> Iterator[tuple[str, Terms, Part]]:
    """Each source of a sum of several, with the parts of the others and its own."""
    parts = acting(case)
    if len(parts) > 1:
        for name, part in parts.items():
            yield name, tuple((1, *p) for other, p in parts.items() if other != name), part


def acting(case: Case) -> Mapping[str, Part]:
    """The parts that add up to the quantity, by source; none for what is no sum of parts."""
    key, circuit = case.key, case.circuit
    if key is None or circuit is None or key.letter not in ("V", "I", "Isc", *POWERS):
        return {}
    found: dict[str, Part] = {}
    try:
        for f in case.frequencies:
            parts = case.redo.parts(case.redo.prepared(circuit, replace(key, due_to=frozenset()), f), f)
            found |= {name: (s, f) for name, s in parts.items() if not key.due_to or name in key.due_to}
    except Doubt:
        return {}
    return found


def together(case: Case) -> State | None:
    """The state of all sources that act, where they are of one frequency."""
    states = [s for s, _ in acting(case).values()]
    if not states or len(case.frequencies) != 1:
        return None
    potentials = {n: sum(s.potentials[n] for s in states) for n in states[0].potentials}
    return State(potentials, {n: sum(s.currents[n] for s in states) for n in states[0].currents})


# --- zeroed wrongly -------------------------------------------------------------------------------------------------


def source_zeroed_wrongly(case: Case) -> Iterator[Guess]:
    """A part found with another voltage source opened, or another current source shorted."""
    key = case.key
    if key is not None and (key.due_to or key.letter in ("R", "Z")):
        yield from _everywhere(case, _zeroed_wrongly, key.due_to)
    yield from _in_one_part(case, _zeroed_wrongly)


def controlled_source_zeroed(case: Case) -> Iterator[Guess]:
    """A part, or each part, found with a controlled source switched off as if it were independent."""
    yield from _everywhere(case, _switched_off, frozenset())
    yield from _in_one_part(case, _switched_off)


def _everywhere(case: Case, make: Make, keep: frozenset[str]) -> Iterator[Guess]:
    if case.circuit is not None:
        for v in case.redo.variants(make, case.circuit, keep):
            yield Guess(v.what, circuit=v.circuit)


def _in_one_part(case: Case, make: Make) -> Iterator[Guess]:
    """A sum in which one source's part was found in a variant of the circuit."""
    key, circuit = case.key, case.circuit
    if key is None or circuit is None or key.due_to:
        return
    for name, rest, (_, f) in _parted(case):
        for v in case.redo.variants(make, circuit, frozenset({name})):
            with contextlib.suppress(Doubt):  # the quantity is not in this variant
                part = case.redo.prepared(v.circuit, replace(key, due_to=frozenset({name})), f)
                yield Guess(f"{v.what} in the part due to {name}", terms=(*rest, (1, part, f)))


def _zeroed_wrongly(circuit: Circuit, keep: frozenset[str]) -> Iterator[Variant]:
    others = [e for e in circuit.elements if e.kind in ("voltage source", "current source") and e.name not in keep]
    for e in others:
        how = "opened instead of shorted" if e.kind == "voltage source" else "shorted instead of opened"
        yield Variant(f"{e.name} {how}", put(circuit, [_wrong(e)]))
    if len(others) > 1:
        names = " and ".join(e.name for e in others)
        yield Variant(f"{names} zeroed the wrong way round", put(circuit, [_wrong(e) for e in others]))


def _wrong(e: Element) -> Element:
    kind: Kind = "open" if e.kind == "voltage source" else "short"
    return replace(e, kind=kind, value=None, phasor=None, frequency=None)


def _switched_off(circuit: Circuit, keep: frozenset[str]) -> Iterator[Variant]:
    controlled = [e for e in circuit.elements if e.control is not None and e.name not in keep]
    off = [_off(e, "short" if "voltage" in e.kind else "open") for e in controlled]
    for e in off:
        yield Variant(f"{e.name} switched off like an independent source", put(circuit, [e]))
    if len(off) > 1:
        names = " and ".join(e.name for e in off)
        yield Variant(f"{names} switched off like independent sources", put(circuit, off))


def _off(e: Element, kind: Kind) -> Element:
    return replace(e, kind=kind, value=None, phasor=None, control=None)
