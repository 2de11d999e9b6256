"""Reports as lines for a terminal: each finding begins ``path:line:column: word: message``, so that editors make it a link."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from calccheck.annotate.marks import MARKS
from calccheck.annotate.record import BESIDE, LIMITS, Entry, entries
from calccheck.annotate.record_parts import nearest_rating
from calccheck.annotate.visible import one_line, visible
from calccheck.model import Judged, Report, Step
from calccheck.source import Span

# SGR parameters (ECMA-48, 8.3.117): bold, and the colour of each word
_COLOURS = {
    "differs": "31", "unchecked": "33", "error": "31", "caution": "33", "note": "36",
    "accepted": "35", "rounded": "36", "agrees": "32", "given": "34",
}  # fmt: skip


def to_terminal(reports: Sequence[Report], verbose: bool = False, colour: bool = False) -> str:
    """What is to be mended or weighed, in the order of the sheets, then the totals.

    ``verbose``: every claim, and the names of the files that are no calc sheets.
    """
    lines = [line for report in reports for line in sheet_lines(report, verbose, colour)]
    return "\n".join([*lines, *([""] if lines else []), *totals(reports, colour)]) + "\n"


def sheet_lines(report: Report, verbose: bool = False, colour: bool = False) -> list[str]:
    """The lines of one sheet, in its order; the assumptions on one line at the end, with ``verbose`` where they stand."""
    name = visible(report.reading.sheet.name)
    if not report.reading.is_calc:
        return [f"{name}: not a calc sheet"] if verbose else []
    said = bool(report.findings) or any(j.cautions or j.verdict in BESIDE for j in report.claims)
    rows = entries(report) if said or verbose else ()  # most sheets of a register have nothing to be said
    shown = [r for r in rows if verbose or (r.kind != "given" and r.beside) or r.kind == "note"]
    lines = [line for row in sorted(shown, key=_order) for line in _entry_lines(row, report, verbose, colour)]
    givens = [one_line(j.claim.text).removeprefix("given ") for j in report.claims if j.verdict == "given"]
    if givens and not verbose:
        lines.append(f"{name}: {_word('given', colour)}: {'; '.join(givens)}")
    near = nearest_rating(report) if verbose else ""
    return [*lines, f"{name}: {one_line(near)}"] if near else lines


def _order(row: Entry) -> tuple[int, int]:
    return row.span.start, row.span.end


def _entry_lines(row: Entry, report: Report, verbose: bool, colour: bool) -> Iterator[str]:
    where = _where(report, row.span)
    if row.kind not in ("agrees", "rounded", "given") or verbose:
        failing = _failing(row, report)
        line = report.reading.sheet.line_column(failing[0].span.start)[0] if failing else row.line
        first = where if line == row.line else _where(report, failing[0].span)
        yield f"{first}: {_word(row.kind, colour)}: {one_line(_said(row))}"
        yield from _details(row)
        for step in failing[1:]:
            yield f"{_where(report, step.span)}: {_word(row.kind, colour)}: {one_line(step.message)}"
    for caution in row.cautions:
        yield f"{where}: {_word('caution', colour)}: {one_line(caution)}"
        yield _detail("claim", row.text)


def _said(row: Entry) -> str:
    """The message; of what stands, and of an assumption, the claim first."""
    if row.kind in ("agrees", "rounded"):
        return f"{row.text}; {row.message}" if row.message else row.text
    return row.text if row.kind == "given" else row.message or row.text


def _failing(row: Entry, report: Report) -> list[Step]:
    """The steps of a claim's chain that differ, in the order of the sheet."""
    if row.kind != "differs":
        return []
    steps = (s for j in report.claims if j.claim.span == row.span and j.verdict == "differs" for s in j.steps)
    return sorted((s for s in steps if s.verdict == "differs"), key=lambda s: s.span.start)


def _details(row: Entry) -> Iterator[str]:
    """The claim, its recomputed value, the deviation, what may have gone wrong, and what to write instead."""
    if row.kind in ("differs", "unchecked"):
        yield _detail("claim", row.text)
        if row.computed:
            rests = {"circuit": ", from the circuit", "working": ", from the sheet's own working"}.get(row.basis, "")
            yield _detail("recomputed", row.computed + rests)
        if row.deviation:
            yield _detail("deviation", row.deviation)
    for told in row.told:
        if told.startswith("Write: "):
            yield _detail("write", told.removeprefix("Write: "))
        elif row.kind == "differs" and told != row.message:
            yield _detail("likely", told)


def _detail(name: str, text: str) -> str:
    return f"    {name:<12}{one_line(text)}"


def _where(report: Report, span: Span) -> str:
    line, column = report.reading.sheet.line_column(span.start)
    return f"{visible(report.reading.sheet.name)}:{line}:{column}"


def _word(kind: str, colour: bool) -> str:
    return f"\x1b[1;{_COLOURS[kind]}m{MARKS[kind].word}\x1b[0m" if colour else MARKS[kind].word


# --- totals ---------------------------------------------------------------------------------------------------------


def totals(reports: Sequence[Report], colour: bool = False) -> list[str]:
    """How many claims by verdict and by what they were held against, what was not read, and what this check is not."""
    sheets = [r for r in reports if r.reading.is_calc]
    claims = [j for r in sheets for j in r.claims]
    severities = [f.severity for r in sheets for f in r.findings]
    cautions = sum(len(j.cautions) for j in claims) + severities.count("caution")
    lines = [f"{_count(len(sheets), 'calc sheet')}, {_count(len(claims), 'claim')}: " + _by_verdict(claims, colour)]
    lines.append(_by_basis(claims))
    if severities.count("error") or cautions:
        lines.append(f"{_count(severities.count('error'), 'error')} in the sheets, {_count(cautions, 'caution')}.")
    others, unread = len(reports) - len(sheets), sum(r.reading.not_read for r in sheets)
    if others:
        lines.append(f"{_count(others, 'file')} passed over as not a calc sheet.")
    if unread:
        lines.append(f"{_count(unread, 'other fence')} or piece{'s' if unread > 1 else ''} of HTML not read.")
    return [*lines, LIMITS[-1]]


def _count(n: int, noun: str) -> str:
    return f"{n} {noun}{'' if n == 1 else 's'}"


def _by_verdict(claims: Sequence[Judged], colour: bool) -> str:
    parts = []
    for verdict in ("agrees", "rounded", "differs", "unchecked", "accepted", "given"):
        n = sum(j.verdict == verdict for j in claims)
        label = f"{n} {MARKS[verdict].label}"
        parts.append(f"\x1b[1;{_COLOURS[verdict]}m{label}\x1b[0m" if colour and n else label)
    return ", ".join(parts) + "."


def _by_basis(claims: Sequence[Judged]) -> str:
    """Every claim once: what it was held against, or why it was held against nothing."""
    judged = [j for j in claims if j.verdict in ("agrees", "rounded", "differs")]
    against = [
        (sum(j.basis == "circuit" for j in judged), "held against a circuit"),
        (sum(j.basis == "working" for j in judged), "against the sheet's own working alone"),
        (sum(j.basis == "" for j in judged), "against what it states elsewhere"),
        (sum(j.verdict == "accepted" for j in claims), "accepted under a waiver"),
        (sum(j.verdict == "given" for j in claims), "given, held against nothing"),
        (sum(j.verdict == "unchecked" for j in claims), "not checked"),
    ]
    said = [f"{n} {what}" for n, what in against if n or what.startswith("held")]
    return ", ".join(said) + "."
