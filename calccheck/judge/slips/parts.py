"""Slips with the parts: a value mistaken, a part forgotten, another version of the circuit."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from fractions import Fraction
from itertools import combinations

from calccheck.arithmetic import Amount
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.redo import Make, Variant, put
from calccheck.model import Circuit, Element
from calccheck.preferred_values import neighbours
from calccheck.printing import shown
from calccheck.units import OHM, SIEMENS

ALL_PAIRS = 12  # parts of a kind up to which every two may have been exchanged; beyond, those with a node in common


def swapped_values(case: Case) -> Iterator[Guess]:
    """Two parts' values exchanged."""
    return _variants(case, _swapped)


def element_absent(case: Case) -> Iterator[Guess]:
    """One resistor, the load or a source's resistance, forgotten: a gap."""
    return _variants(case, _absent)


def element_shorted(case: Case) -> Iterator[Guess]:
    """One resistor taken as no resistance: a short."""
    return _variants(case, _shorted)


def neighbour_value(case: Case) -> Iterator[Guess]:
    """One resistor at the preferred value next to its own (IEC 60063)."""
    return _variants(case, _neighbouring)


def _variants(case: Case, make: Make) -> Iterator[Guess]:
    if case.circuit is not None:
        for v in case.redo.variants(make, case.circuit):
            yield Guess(v.what, circuit=v.circuit)


def _resistors(circuit: Circuit) -> list[Element]:
    return [e for e in circuit.elements if e.kind == "resistor" and e.value]


def _swapped(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    sources = [[e for e in circuit.elements if e.kind == kind] for kind in ("voltage source", "current source")]
    for alike in (_resistors(circuit), *sources):
        for a, b in combinations(alike, 2):
            near = len(alike) <= ALL_PAIRS or {a.plus, a.minus} & {b.plus, b.minus}
            if a.value != b.value and near:
                yield Variant(f"the values of {a.name} and {b.name} exchanged", put(circuit, [_as(a, b), _as(b, a)]))


def _as(a: Element, b: Element) -> Element:
    return replace(a, value=b.value, stated=b.stated, written=b.written)


def _absent(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    for e in _resistors(circuit):
        yield Variant(f"{e.name} left out, a gap in its place", put(circuit, [replace(e, kind="open", value=None)]))


def _shorted(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    for e in _resistors(circuit):
        yield Variant(f"{e.name} left out, a short in its place", put(circuit, [replace(e, kind="short", value=None)]))


def _neighbouring(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    for e in _resistors(circuit):
        for value in neighbours(e.value) if e.value and e.value > 0 else ():
            yield Variant(
                f"{e.name} taken as {shown(Amount(value, OHM))}, the next preferred value",
                put(circuit, [with_ohms(e, value)]),
            )


def with_ohms(e: Element, ohms: Fraction) -> Element:
    """A resistor with another value; one stated as a conductance stays one."""
    conductance = e.stated is not None and e.stated.dimension == SIEMENS
    return replace(e, value=ohms, stated=Amount(1 / ohms, SIEMENS) if conductance else Amount(ohms, OHM))
