"""Slips with the parts: a value mistaken, a part forgotten, another version of the circuit."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from fractions import Fraction
from itertools import combinations

from calccheck.arithmetic import Amount
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.redo import Make, Variant, put
from calccheck.model import Circuit, Element, Kind
from calccheck.preferred_values import neighbours
from calccheck.printing import shown
from calccheck.units import FARAD, HENRY, OHM, SIEMENS

PASSIVE: tuple[Kind, ...] = ("resistor", "capacitor", "inductor", "impedance")
_DIMENSIONS = {"resistor": OHM, "capacitor": FARAD, "inductor": HENRY}
ALL_PAIRS = 12  # parts of a kind up to which every two may have been exchanged; beyond, those with a node in common


def swapped_values(case: Case) -> Iterator[Guess]:
    """Two parts' values exchanged."""
    return _variants(case, _swapped)


def element_absent(case: Case) -> Iterator[Guess]:
    """One part, the load or a source's resistance, forgotten: a gap."""
    return _variants(case, _absent)


def element_shorted(case: Case) -> Iterator[Guess]:
    """One part taken as no resistance: a short."""
    return _variants(case, _shorted)


def neighbour_value(case: Case) -> Iterator[Guess]:
    """One part at the preferred value next to its own (IEC 60063)."""
    return _variants(case, _neighbouring)


def _variants(case: Case, make: Make) -> Iterator[Guess]:
    if case.circuit is not None:
        for v in case.redo.variants(make, case.circuit):
            yield Guess(v.what, circuit=v.circuit)


def of_kind(circuit: Circuit, kind: Kind) -> list[Element]:
    """The parts of a kind that have a value."""
    return [e for e in circuit.elements if e.kind == kind and (e.value or e.phasor)]


def passive(circuit: Circuit) -> list[Element]:
    """The resistors, and in a circuit with alternating sources the capacitors, inductors and impedances."""
    kinds = PASSIVE if any(circuit.frequencies) else PASSIVE[:1]
    return [e for e in circuit.elements if e.kind in kinds and (e.value or e.phasor)]


def _swapped(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    kinds = {*(e.kind for e in passive(circuit)), "voltage source", "current source"}
    for kind in sorted(kinds, key=(*PASSIVE, "voltage source", "current source").index):
        alike = of_kind(circuit, kind)
        for a, b in combinations(alike, 2):
            near = len(alike) <= ALL_PAIRS or {a.plus, a.minus} & {b.plus, b.minus}
            if near and (a.value, a.phasor) != (b.value, b.phasor):
                yield Variant(f"the values of {a.name} and {b.name} exchanged", put(circuit, [_as(a, b), _as(b, a)]))


def _as(a: Element, b: Element) -> Element:
    return replace(a, value=b.value, phasor=b.phasor, stated=b.stated, written=b.written)


def _absent(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    for e in passive(circuit):
        yield Variant(f"{e.name} left out, a gap in its place", put(circuit, [bare(e, "open")]))


def _shorted(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    for e in passive(circuit):
        yield Variant(f"{e.name} left out, a short in its place", put(circuit, [bare(e, "short")]))


def bare(e: Element, kind: Kind) -> Element:
    """A gap or a short in place of a part."""
    return replace(e, kind=kind, value=None, phasor=None)


def _neighbouring(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    for e in passive(circuit):
        for value in neighbours(e.value) if e.value and e.value > 0 else ():
            what = f"{e.name} taken as {shown(Amount(value, _DIMENSIONS[e.kind]))}, the next preferred value"
            yield Variant(what, put(circuit, [with_value(e, value)]))


def with_value(e: Element, value: Fraction) -> Element:
    """A resistor, capacitor or inductor with another value; a resistor stated as a conductance stays one."""
    if e.stated is not None and e.stated.dimension == SIEMENS:
        return replace(e, value=value, stated=Amount(1 / value, SIEMENS))
    return replace(e, value=value, stated=Amount(value, _DIMENSIONS[e.kind]))
