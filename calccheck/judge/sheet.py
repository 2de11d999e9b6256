"""All claims of a sheet judged, in the order in which they stand."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from datetime import date
from fractions import Fraction
from functools import cache
from typing import TYPE_CHECKING

from calccheck.judge.chain import judge_claim
from calccheck.judge.miss import Miss
from calccheck.judge.new_names import assumptions
from calccheck.judge.rounding import Printed, fit, printed
from calccheck.judge.scope import Ledger, Solve
from calccheck.judge.symbols import Point, combined, instance, points
from calccheck.model import Circuit, Finding, Judged, Reading, Waiver
from calccheck.rules import RULES

if TYPE_CHECKING:  # late, where they are used: most sheets have no claim that differs, and no free symbols
    from calccheck.judge.right_formula import RightFormulas
    from calccheck.judge.slips.redo import Earlier, Redo, SolveBatch
    from calccheck.sought import Close
    from calccheck.toleranced import Tolerancing


def judge_sheet(
    reading: Reading,
    solve: Solve,
    on: date,
    solve_batch: SolveBatch,
    earlier: Callable[[], Sequence[Earlier]] = tuple,
    fails: Callable[[Circuit], str] = lambda _: "",
    tolerances: Callable[[], Tolerancing] | None = None,
    close: Close | None = None,
) -> tuple[tuple[Judged, ...], tuple[Finding, ...]]:
    """The verdicts of a sheet's claims, with the slips that explain wrong ones, and the findings made on the way.

    ``solve`` gives the solution of a circuit or raises ``Doubt``; ``solve_batch`` the states of many, ``None`` for one that has
    none. ``on``: the day by which waivers are judged. ``earlier``: the circuits of the sheet's earlier versions, newest first;
    called only where a claim differs. ``fails``: says of a circuit why its parts cannot be in the states that the sheet assumes.
    ``tolerances``: works formulas over them. ``close``: writes in symbols what a formula that fails should have been.
    """
    drawn = points(reading.circuits)
    ledgers = [ledger_of(reading, solve, p, fails, tolerances) for p in drawn]

    def depend_on(j: Judged) -> list[str]:
        from calccheck.judge.dependence import depending

        return depending(j, reading, ledgers[0], lambda p: ledger_of(reading, solve, p, fails, tolerances), drawn[-1])

    @cache
    def redo() -> Redo:
        from calccheck.judge.slips.redo import Redo

        return Redo(solve, solve_batch, earlier)

    @cache
    def right() -> RightFormulas | None:
        from calccheck.judge.right_formula import RightFormulas

        return RightFormulas(close, ledgers) if close is not None and drawn[0] else None

    judged: list[Judged] = []
    findings: list[Finding] = []
    for claim in reading.claims:
        found = [judge_claim(claim, ledger) for ledger in ledgers]
        j = _explained(combined([f[0] for f in found], depend_on), [f[2] for f in found], redo, right)
        j, waived = _waived(j, on)
        judged.append(j)
        findings += [*found[0][1], *waived]
    return tuple(judged), tuple(findings)


def ledger_of(
    reading: Reading,
    solve: Solve,
    point: Point,
    fails: Callable[[Circuit], str],
    tolerances: Callable[[], Tolerancing] | None,
) -> Ledger:
    """The ledger of a sheet before its first claim, its symbols having the values of a point."""
    circuits = tuple(instance(c, point) for c in reading.circuits)
    ledger = Ledger(circuits, solve, reading.settings, symbols=point, fails=fails, tolerances=tolerances)
    ledger.assumptions = assumptions(reading.claims, ledger)
    return ledger


def _explained(
    j: Judged, misses: Sequence[Miss | None], redo: Callable[[], Redo], right: Callable[[], RightFormulas | None]
) -> Judged:
    """A claim that differs with the slips that would give its number; where many would, the number does not decide.

    In symbols, with the right formula.
    """
    miss = next((m for m in misses if m is not None), None)
    if j.verdict != "differs" or miss is None:
        return j
    from calccheck.judge.slips.naming import name_slips

    slips, undecided = name_slips(miss, redo())
    if undecided:
        told = f"{len(slips)} kinds of slip give this number, so it does not decide between them"
        j = replace(j, message=f"{j.message}; {told}")
    formulas = right()
    formula = formulas.said(miss) if formulas is not None else ""
    return replace(j, slips=slips, message=f"{j.message}; {formula}" if formula else j.message)


def _waived(j: Judged, on: date) -> tuple[Judged, tuple[Finding, ...]]:
    """A claim that differs accepted under its waiver, where the waiver still stands for these two numbers and this day."""
    waiver = j.claim.waiver
    if waiver is None:
        return j, ()
    if j.verdict in ("agrees", "rounded"):
        return j, (_finding("waiver-idle", "the claim stands without its waiver; take the waiver out", waiver),)
    if j.verdict != "differs":
        return j, (_finding("waiver", f"a waiver accepts a claim that differs; this one is {j.verdict}", waiver),)
    why = _lapsed(waiver, j, on)
    if why:
        return j, (_finding("waiver", f"the waiver has lapsed: {why}", waiver),)
    return replace(j, verdict="accepted", message=f"{j.message}; accepted by {waiver.by}: {waiver.reason}"), ()


def _lapsed(waiver: Waiver, j: Judged, on: date) -> str:
    if waiver.until is not None and on > waiver.until:
        return f"it ran until {waiver.until.isoformat()}"
    shown, truth = printed(waiver.printed), printed(waiver.computed)
    if shown is None or truth is None:
        return "its two numbers cannot be read"
    if j.claimed is None or j.computed is None:
        return "the claim prints no value"
    if shown.amount.dimension != j.claimed.dimension or shown.amount.value != j.claimed.value:
        return "the printed number is no longer the one that it accepts"
    same = truth.amount.dimension == j.computed.dimension
    if not same or isinstance(j.computed.value, complex) or fit(truth, j.computed.value, Fraction(0)) == "no":
        return "the recomputed number is no longer the one that it names"
    return _beyond(j, shown)


def _beyond(j: Judged, accepted: Printed) -> str:
    """What fails in the claim beside the value that the waiver accepts, and what follows from it."""
    if any(s.verdict == "unchecked" for s in j.steps):
        return "another member of the claim is unchecked"
    failing = [s for s in j.steps if s.verdict == "differs"]
    bounds = [s for s in failing if s.relation not in ("=", "≈")]
    if bounds and len(failing) > len(bounds):
        return f"it says nothing of the bound {bounds[0].text}"
    for s in failing:
        a = s.amount
        if s not in bounds and (
            a is None or isinstance(a.value, complex) or fit(accepted, a.value, Fraction(0)) == "no"
        ):
            return f"it says nothing of {s.text}, which differs too"
    return ""


def _finding(kind: str, message: str, waiver: Waiver) -> Finding:
    return Finding(kind, RULES[kind].severity, message, waiver.span)
