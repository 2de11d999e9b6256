"""What stands around the entries of the record: title block, counts, settings, circuits, givens, waivers, signatures."""

from __future__ import annotations

from collections.abc import Sequence

from calccheck.annotate.marks import MARKS
from calccheck.annotate.record import Entry
from calccheck.model import ROLES, CircuitFigures, Claim, Report
from calccheck.printing import shown
from calccheck.units import digits

TITLE_FIELDS = {
    "project": "Project", "subject": "Subject", "sheet": "Sheet", "revision": "Revision", "by": "By", "date": "Date",
    "checked": "Checked", "approved": "Approved",
}  # fmt: skip
"""Front matter fields of the title block, in the trade's order, and how they are lettered."""

BASES = {"circuit": "circuit", "working": "working", "": "none"}
"""What a claim's truth rests on: the solved circuit, the sheet's own working, nothing that could be computed."""

MEANINGS = {
    "differs": "is not the recomputed value",
    "unchecked": "could not be read, resolved or solved: not vouched for",
    "accepted": "differs, but stands under a waiver that names both values",
    "rounded": "off by no more than rounding carried on, or a declared approximation, explains",
    "agrees": "is the recomputed value to the last place printed",
    "given": "an assumption, checked against nothing",
}

RAISED = ("hazard", "touch-voltage", "mains", "stored-energy")
"""Kinds of finding that are cautions for people, raised by the circuit or named by the sheet: they stand in front."""

TICK = "Tick what has been verified by other means."

_SUPERSCRIPT = str.maketrans("0123456789-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻")
SIGNATORIES = tuple(role.capitalize() for role in ROLES)


def counts(report: Report) -> list[tuple[str, list[int]]]:
    """Per verdict, worst first: the number of claims on each basis in the order of ``BASES``, then in all."""
    table: list[tuple[str, list[int]]] = []
    for verdict in (name for name in MARKS if name in report.counts):
        row = [sum(j.verdict == verdict and j.basis == basis for j in report.claims) for basis in BASES]
        table.append((verdict, [*row, sum(row)]))
    return table


def digest(report: Report) -> str:
    """SHA-256 of the sheet as UTF-8, in hexadecimal."""
    from hashlib import sha256  # late: the terminal shows none

    return sha256(report.reading.sheet.text.encode("utf-8", "surrogatepass")).hexdigest()


def untitled(report: Report) -> list[str]:
    """The fields of the front matter that neither the title block nor a caution shows."""
    shown = {*TITLE_FIELDS, *(f.kind for f in report.findings if f.kind in RAISED)}
    return [name for name in report.reading.title if name not in shown]


def raised(report: Report, rows: Sequence[Entry]) -> list[Entry]:
    """The entries of the cautions that stand in front."""
    found = zip(report.findings, rows[len(report.claims) :], strict=True)
    return [e for finding, e in found if finding.kind in RAISED]


def givens(report: Report, rows: Sequence[Entry]) -> list[tuple[Entry, str]]:
    """The entries of the values that are given and checked against nothing, each with what stands behind it."""
    found = zip(report.claims, rows, strict=False)
    return [(e, given_notes(j.claim)) for j, e in found if j.verdict == "given"]


def waivers(report: Report, rows: Sequence[Entry]) -> list[tuple[Entry, str, str, str]]:
    """The entries of claims with a waiver: the waiver as written, as a line, and whether it stands."""
    return [
        (e, j.claim.waiver.text, waiver_line(j.claim), "stands" if j.verdict == "accepted" else "does not apply")
        for j, e in zip(report.claims, rows, strict=False)
        if j.claim.waiver is not None
    ]


def waiver_line(claim: Claim) -> str:
    """A waiver as one line: who accepts what, why, until when."""
    w = claim.waiver
    if w is None:
        return ""
    until = f" until {w.until.isoformat()}" if w.until else ""
    return f"Accepted by {w.by}{until}: {w.reason}"


def given_notes(claim: Claim) -> str:
    """What stands behind an assumption: the sheet it comes from."""
    return f"from {claim.from_sheet}" if claim.from_sheet else "stated in this sheet"


def figure_cells(figures: CircuitFigures) -> tuple[str, str, str]:
    """Gap between the routes, current residual, power balance, two figures each."""
    return (_figure(figures.route_gap), _figure(figures.kcl_residual), _figure(figures.power_balance))


def _figure(value: float | None) -> str:
    if value is None:
        return "not solved"
    if value == 0:
        return "0"
    mantissa, exponent = f"{value:.1e}".split("e")
    return f"{mantissa} × 10{str(int(exponent)).translate(_SUPERSCRIPT)}"


def settings_line(report: Report) -> str:
    """The settings that the sheet was judged with, as one line; the day of the check where a waiver runs out on a day."""
    settings = report.reading.settings
    words = [
        f"carry {digits(100 * settings.carry, 3)} %",
        f"approx {digits(100 * settings.approx, 3)} %",
        f"phasors {settings.phasors}",
        f"derate {digits(settings.derate, 3)}",
        f"preferred {settings.preferred or 'none'}",
    ]
    if settings.frequency:
        words.append(f"frequency {settings.frequency}")
    if settings.temperature:
        low, high = (digits(x, 4).replace("-", "−") for x in settings.temperature)
        words.append(f"temperature {low} °C to {high} °C")
    if settings.on and any(j.claim.waiver is not None and j.claim.waiver.until for j in report.claims):
        words.append(f"days judged on {settings.on.isoformat()}")
    return ", ".join(words)


def nearest_rating(report: Report) -> str:
    """The part nearest to one of its ratings, or the furthest beyond it, as a sentence without its end; empty where none is rated."""
    if not report.ratings:
        return ""
    h = report.ratings[0]
    where = ", ".join(
        w for w in (f"in case {h.case}" if h.case else "", h.where, "" if h.proved else "found by a search") if w
    )
    part = f"{h.part} of {h.circuit}" if h.circuit else h.part
    count = len(report.ratings)
    of = "Of one rating held" if count == 1 else f"Of {count} ratings held, each at its worst, the nearest to its limit"
    bears = f"{shown(h.worst, figures=4)} of {shown(h.limit, figures=4)} ({digits(100 * h.share, 3)} %)"
    return f"{of}: {part} with {bears}{f', {where}' if where else ''}"


def signature_rows(report: Report) -> list[tuple[str, str, str, str]]:
    """The signatures in the sheet's front matter: role, name, date, and whether each still holds."""
    doubted = {f.span for f in report.findings}
    return [
        (s.role, s.name, s.on.isoformat(), "see the findings" if s.span in doubted else "holds")
        for s in report.reading.signatures
    ]
