"""The whole program in one place: read, solve, judge, in that order."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import replace
from datetime import date
from fractions import Fraction
from functools import cache
from typing import TYPE_CHECKING

from calccheck.arithmetic import Doubt
from calccheck.edits import stray, unmark
from calccheck.formula import Node, Reference
from calccheck.judge.cautions import caution_findings
from calccheck.judge.preferred import preferred_findings
from calccheck.judge.quantities import frequencies
from calccheck.judge.references import Find, reference_findings
from calccheck.judge.scope import Solve
from calccheck.judge.sheet import judge_sheet, ledger_of
from calccheck.judge.symbols import instance, points
from calccheck.judge.working import work_out as worked_out
from calccheck.model import (
    Circuit,
    CircuitFigures,
    Finding,
    RatingHeld,
    Reading,
    Report,
    Settings,
    Solution,
    WorkedQuantity,
)
from calccheck.read.expression import parse
from calccheck.read.sheet import read_sheet
from calccheck.rules import RULES
from calccheck.signatures import signature_findings
from calccheck.solve import Unsolvable, solve, solve_batch, tolerances, total
from calccheck.solve.states import state_faults
from calccheck.source import Sheet, whole
from calccheck.units import Dimension

if TYPE_CHECKING:
    from calccheck.judge.slips.redo import Earlier
    from calccheck.sought import ClosedForm, Meaning
    from calccheck.toleranced import Tolerancing

EarlierTexts = Callable[[], Iterable[tuple[str, str]]]


def check(
    sheet: Sheet, settings: Settings | None = None, find: Find | None = None, earlier: EarlierTexts = tuple
) -> Report:
    """The report on one sheet. Marks of an earlier run are taken out first; no sheet makes this raise.

    ``find``: gives the reports of other sheets by their number, for values that this one takes from them.
    ``earlier``: gives the sheet's earlier versions, newest first, each with what it is called (a commit and its day); called
    only where a claim differs.
    """
    reading = read_sheet(Sheet(sheet.name, unmark(sheet.text)), settings or Settings())
    on = reading.settings.on or date.today()
    reading = replace(reading, settings=replace(reading.settings, on=on))
    solve_once = solver()
    solutions, faults = _solved(reading.circuits, solve_once)
    versions = _circuits_of(earlier, sheet.name)
    over_tolerances = cache(tolerances)
    states = _states(solve_once, math.sqrt(2) if reading.settings.phasors == "rms" else 1.0)
    judged, findings = judge_sheet(
        reading, solve_once, on, solve_batch, versions, lambda c: _first(states(c)), over_tolerances, _closed_form
    )
    elsewhere = reference_findings(reading, judged, find)
    cautions = caution_findings(reading, solutions)
    assumed = [f for c in reading.circuits if not c.symbols for f in states(c)]
    ratings, passed = _ratings(reading, solutions, solve_once, lambda c: _first(states(c)), over_tolerances)
    beside = (
        *assumed,
        *passed,
        *preferred_findings(reading),
        *_stray_marks(reading),
        *signature_findings(reading),
        *elsewhere,
        *cautions,
    )
    every = sorted((*reading.findings, *beside, *faults, *findings), key=lambda f: f.span.start)
    return Report(
        reading,
        judged,
        tuple(every),
        _figures(reading, solutions),
        tuple(found[0] if found else None for found in solutions),
        ratings,
    )


def _ratings(
    reading: Reading,
    solutions: Sequence[Sequence[Solution]],
    solve_once: Solve,
    fails: Callable[[Circuit], str],
    over_tolerances: Callable[[], Tolerancing],
) -> tuple[tuple[RatingHeld, ...], list[Finding]]:
    """Every rating of the circuits that stand as drawn, the nearest to its limit first, and findings."""
    if not any(e.ratings for c in reading.circuits for e in c.elements):
        return (), []
    from calccheck.judge.ratings import held_ratings  # late: many circuits state no ratings

    ledger = ledger_of(reading, solve_once, points(reading.circuits)[0], fails, over_tolerances)
    held: list[RatingHeld] = []
    findings: list[Finding] = []
    for k, solved in enumerate(solutions):
        if solved and not ledger.fails(ledger.circuits[k]):
            more, said = held_ratings(k, ledger)
            held, findings = held + more, findings + said
    return tuple(sorted(held, key=lambda h: -h.share)), findings


def _closed_form(
    node: Node, meanings: Mapping[Reference, Meaning], symbols: Mapping[str, Dimension], dimension: Dimension
) -> ClosedForm | None:
    from calccheck.solve.closed_form import closed_form  # late: most sheets have no formula that fails

    return closed_form(node, meanings, symbols, dimension)


def _circuits_of(earlier: EarlierTexts, name: str) -> Callable[[], tuple[Earlier, ...]]:
    """The circuits of the earlier versions, read once."""

    @cache
    def read() -> tuple[Earlier, ...]:
        from calccheck.judge.slips.redo import Earlier  # late: only where a claim differs

        texts = ((label, Sheet(name, unmark(text))) for label, text in earlier())
        return tuple(Earlier(label, read_sheet(sheet, Settings()).circuits) for label, sheet in texts)

    return read


def _stray_marks(reading: Reading) -> list[Finding]:
    """Marks that could not be taken out, and so say something of a sheet that nobody has checked."""
    left = stray(reading.sheet.text) if reading.is_calc else []
    return [Finding("mark", RULES["mark"].severity, mark.message, mark.span) for mark in left]


def solver() -> Solve:
    """A solver that solves each circuit once at each frequency and raises ``Doubt`` where one cannot be solved."""
    known: dict[tuple[Circuit, Fraction], Solution | Doubt] = {}
    seen: dict[
        tuple[int, Fraction], tuple[Circuit, Solution | Doubt]
    ] = {}  # hashing a circuit costs more than looking it up

    def solve_once(circuit: Circuit, frequency: Fraction = Fraction(0)) -> Solution:
        here = (id(circuit), frequency)
        if here not in seen:
            if (circuit, frequency) not in known:
                known[circuit, frequency] = _solution(circuit, frequency)
            seen[here] = (circuit, known[circuit, frequency])  # kept, so that no other circuit gets its id
        found = seen[here][1]
        if isinstance(found, Doubt):
            raise Doubt(found.reason, found.span)
        return found

    return solve_once


def _states(solve_once: Solve, crest: float) -> Callable[[Circuit], tuple[Finding, ...]]:
    """Tells of a circuit which parts cannot be in the states that the sheet assumes, with all its sources at work."""

    @cache
    def check(circuit: Circuit) -> tuple[Finding, ...]:
        if not any(e.device is not None for e in circuit.elements):
            return ()
        try:
            whole = {f: total(solve_once(circuit, f)) for f in circuit.frequencies}
        except Doubt:
            return ()  # said where it is not solved
        return state_faults(circuit, whole.get(Fraction(0)), [s for f, s in whole.items() if f != 0], crest)

    return check


def _first(findings: Sequence[Finding]) -> str:
    return findings[0].message if findings else ""


def _solution(circuit: Circuit, frequency: Fraction) -> Solution | Doubt:
    try:
        return solve(circuit, frequency)
    except Unsolvable as u:
        first = u.findings[0]
        return Doubt(f"its circuit cannot be solved: {first.message}", first.span)


def _solved(circuits: Sequence[Circuit], solve_once: Solve) -> tuple[list[list[Solution]], list[Finding]]:
    """Each circuit as drawn, solved at each frequency of its sources or not at all, with the findings that say why not."""
    point = points(circuits)[0]
    solutions: list[list[Solution]] = []
    faults: list[Finding] = []
    for circuit in (instance(c, point) for c in circuits):
        try:
            solutions.append([solve_once(circuit, f) for f in frequencies(circuit)])
        except Doubt:
            solutions.append([])
            faults += _faults(circuit)
    return solutions, faults


def _faults(circuit: Circuit) -> tuple[Finding, ...]:
    """Why a circuit has no solution; what its reader said already is not said twice."""
    if circuit.problems:
        return ()
    for frequency in frequencies(circuit):
        try:
            solve(circuit, frequency)
        except Unsolvable as u:
            return u.findings
    return ()


def _figures(reading: Reading, solutions: Sequence[Sequence[Solution]]) -> tuple[CircuitFigures, ...]:
    """How well the two routes agree on each circuit, at the worst of its frequencies."""
    return tuple(
        CircuitFigures(
            c.name, reading.sheet.line_column(c.span.start)[0], len(c.nodes()), len(c.elements),
            max((s.gap for s in found), default=None), max((s.residual for s in found), default=None),
            max((s.balance for s in found), default=None),
        )
        for c, found in zip(reading.circuits, solutions, strict=True)
    )  # fmt: skip


def work_out(sheet: Sheet, quantity: str, settings: Settings | None = None) -> WorkedQuantity:
    """The independent working of one quantity of a sheet's circuit. Raises ``Doubt`` with the reason where there is none."""
    reading = read_sheet(Sheet(sheet.name, unmark(sheet.text)), settings or Settings())
    point = points(reading.circuits)[0]
    if point:
        raise Doubt("the circuit has free symbols: no number can be worked out")
    ledger = ledger_of(reading, solver(), point, lambda _: "", cache(tolerances))
    piece = whole(quantity)
    return worked_out(parse(piece), piece.span(), ledger)
