"""Cautions that a sheet raises by itself: hazards that it names, and voltages, mains and stored energy in its circuits.

They fail no sheet. Limits, quoted from memory of the standards: IEC 60364-4-41, clause 414 (extra-low voltage ends at 50 V a.c.
r.m.s. and 120 V ripple-free d.c.; here 50 V of either is told, the more cautious figure); IEC 60950-1, definition 1.2.8.10
(hazardous energy: 20 J and more stored at 2 V and more). What is told is a reminder and no assessment.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from itertools import combinations

from calccheck.arithmetic import Value
from calccheck.model import UNSTATED, Circuit, Finding, Reading, Solution
from calccheck.rules import RULES
from calccheck.source import Span
from calccheck.units import VOLT, printed

TOUCH = 50  # V
MAINS = (50, 60)  # Hz
ENERGY, AT_LEAST = 20, 2  # J, V
_JUST = 1 - 1e-9  # a limit that is met counts as passed, whatever the last binary digit
_REMINDER = "local codes and licensed practice decide what follows"


def caution_findings(reading: Reading, solutions: Sequence[Sequence[Solution]]) -> list[Finding]:
    """The cautions of a sheet. ``solutions``: of each circuit as drawn at each of its frequencies, none where it has none."""
    if not reading.is_calc:
        return []
    found = _named_by_the_sheet(reading)
    peak = reading.settings.phasors == "peak"
    for circuit, solved in zip(reading.circuits, solutions, strict=True):
        found += _mains(circuit, float(reading.settings.hertz))
        if solved and not circuit.symbols:  # with free symbols its numbers are no voltages
            found += [*_touch(circuit, solved, peak), *_stored(circuit, solved, peak)]
    return found


def _finding(kind: str, message: str, span: Span) -> Finding:
    return Finding(kind, RULES[kind].severity, message, span)


def _named_by_the_sheet(reading: Reading) -> list[Finding]:
    """``hazard:`` of the front matter, in the sheet's own words."""
    words = reading.title.get("hazard", "").strip()
    front = reading.page[0] if reading.page and reading.page[0].kind == "front matter" else None
    if not words or front is None:
        return []
    line = next((line for line in front.lines if line.text.startswith("hazard")), None)
    return [_finding("hazard", words, line.strip().span() if line is not None else front.span)]


# --- mains ----------------------------------------------------------------------------------------------------------


def _mains(circuit: Circuit, unmarked: float) -> list[Finding]:
    """Sources at the frequency of the mains. ``unmarked``: the sheet's frequency, for sources that state none; in hertz."""
    at = {e.name: unmarked if e.frequency == UNSTATED else float(e.frequency or 0) for e in circuit.sources()}
    names = [name for name, hertz in at.items() if hertz in MAINS]
    if not names:
        return []
    hertz = " and ".join(f"{f} Hz" for f in MAINS if f in at.values())
    message = f"{', '.join(names)}: {hertz} is the frequency of the mains; if it is fed from them, {_REMINDER}"
    first = circuit.element(names[0])
    return [_finding("mains", message, first.span if first else circuit.span)]


# --- touch voltage --------------------------------------------------------------------------------------------------


def _touch(circuit: Circuit, solved: Sequence[Solution], peak: bool) -> list[Finding]:
    """The largest voltage between any two nodes, where it is dangerous."""
    volts, plus, minus = _widest(circuit, solved, peak)
    if not math.isfinite(volts) or volts < TOUCH * _JUST:
        return []
    kind = "" if all(not s.frequency for s in solved) else " r.m.s."
    between = f"{printed(volts, VOLT, 3)}{kind} stand between {plus} and {minus}"
    return [
        _finding("touch-voltage", f"{between}: {TOUCH} V and more may be dangerous to touch; {_REMINDER}", circuit.span)
    ]


def _widest(circuit: Circuit, solved: Sequence[Solution], peak: bool) -> tuple[float, str, str]:
    """The largest voltage between two nodes, r.m.s. over all frequencies, and the nodes."""
    nodes = list(dict.fromkeys((*circuit.nodes(), circuit.reference)))
    weighted = [(s.nodal.potentials, 0.5 if peak and s.frequency else 1.0) for s in solved]
    if len(weighted) == 1 and not any(isinstance(v, complex) for v in weighted[0][0].values()):
        v = {n: float(_at(weighted[0][0], n).real) for n in nodes}
        plus, minus = max(nodes, key=v.__getitem__), min(nodes, key=v.__getitem__)
        return (v[plus] - v[minus]) * math.sqrt(weighted[0][1]), plus, minus

    def between(pair: tuple[str, str]) -> float:
        return math.sqrt(sum(w * abs(_at(p, pair[0]) - _at(p, pair[1])) ** 2 for p, w in weighted))

    if 2 * max(between((n, circuit.reference)) for n in nodes) < TOUCH * _JUST:
        return 0, "", ""
    plus, minus = max(combinations(nodes, 2), key=between)
    return between((plus, minus)), plus, minus


def _at(potentials: Mapping[str, Value], node: str) -> complex:
    """The potential of a node; the reference, which need not be listed, is at zero."""
    return complex(potentials.get(node, 0))


# --- stored energy --------------------------------------------------------------------------------------------------


def _stored(circuit: Circuit, solved: Sequence[Solution], peak: bool) -> list[Finding]:
    """Capacitors that hold a dangerous energy, W = ½·C·V² at the crest of their voltage."""
    found = []
    crest = 1.0 if peak else math.sqrt(2)
    for e in circuit.elements:
        if e.kind != "capacitor" or e.value is None:
            continue
        volts = sum(
            abs(_at(s.nodal.potentials, e.plus) - _at(s.nodal.potentials, e.minus)) * (crest if s.frequency else 1)
            for s in solved
        )
        joules = float(e.value) * volts**2 / 2
        if math.isfinite(joules) and joules >= ENERGY * _JUST and volts >= AT_LEAST * _JUST:
            holds = f"{e.name} stores {joules:.3g} J at {printed(volts, VOLT, 3)}"
            message = f"{holds}: {ENERGY} J and more is dangerous and outlasts the supply; {_REMINDER}"
            found.append(_finding("stored-energy", message, e.span))
    return found
