"""The end of the page for the screen: the check record, and what is left to the checker."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence

from calccheck import __version__
from calccheck.annotate.html_math import written
from calccheck.annotate.html_tables import TICK_BOX, Row, part, to_tick
from calccheck.annotate.html_words import code, in_record, said, tell, to_mark, told
from calccheck.annotate.marks import MARKS
from calccheck.annotate.pictures import BY_SOURCE, MOVED, Shown, moved, totals
from calccheck.annotate.record import LIMITS, Entry
from calccheck.annotate.record_parts import (
    BASES,
    TICK,
    digest,
    figure_cells,
    givens,
    nearest_rating,
    raised,
    settings_line,
    signature_rows,
    waivers,
)
from calccheck.model import Report


def record(report: Report, rows: Sequence[Entry], placed: Collection[str]) -> str:
    """Every claim and finding, the superposition at a glance, the circuits' figures."""
    claims = [_claim_row(report, e, placed) for e in rows if e.key[0] == "c"]
    findings = [_finding_row(e, placed) for e in rows if e.key[0] == "f"]
    return (
        '<section aria-labelledby="record">\n<h2 id="record">Check record</h2>\n'
        f'<p class="soft">SHA-256 of the sheet as checked: <code>{digest(report)}</code><br>\n'
        f"Judged with {said(settings_line(report))}.{_nearest(report)}</p>\n"
        + part("Claims", ("Mark", "Line", "As written", "Printed", "Recomputed", "Deviation", "Basis"), claims)
        + part("Findings", ("Mark", "Line", "Finding"), findings)
        + _glance(report, rows)
        + part(
            "Circuits solved by two routes",
            ("Circuit", "Line", "Nodes", "Parts", "Gap between routes", "Current residual", "Power balance"),
            _circuits(report),
        )
        + "</section>\n"
    )


def _nearest(report: Report) -> str:
    told = nearest_rating(report)
    return f"<br>\n{said(told)}." if told else ""


def _claim_row(report: Report, e: Entry, placed: Collection[str]) -> Row:
    about = told(e.sentences(e.told)) if e.kind != "given" else ""
    about += "".join(
        f'<span class="told"><strong class="ink-caution">{MARKS["caution"].label}</strong> {tell(t)}</span>'
        for t in e.sentences(e.cautions)
    )
    values = (said(e.printed), said(e.computed), said(e.deviation), BASES.get(e.basis, e.basis))
    spoken = [f'<span class="value">{v}</span>' for v in values]
    return f"r-{e.key}", (in_record(e, placed), str(e.line), written(report, e) + about, *spoken)


def _finding_row(e: Entry, placed: Collection[str]) -> Row:
    return f"r-{e.key}", (in_record(e, placed), str(e.line), f"{said(e.text)}.{told(e.sentences(e.told))}")


def _glance(report: Report, rows: Sequence[Entry]) -> str:
    """Bars for every claimed total, and of what moves what is claimed over its tolerances, each with links to its claims."""
    number = {e.key: e.number for e in rows}
    parts = (("Superposition at a glance", BY_SOURCE, totals(report)), ("What moves it", MOVED, moved(report)))
    return "".join(_pictures(head, words, shown, number) for head, words, shown in parts)


def _pictures(head: str, words: str, shown: Sequence[Shown], number: Mapping[str, str]) -> str:
    charts = "".join(
        f"<figure>\n{p.picture.svg}<figcaption>"
        + ("Claim " if len(p.claims) == 1 else "Claims ")
        + ", ".join(f'<a href="#r-{key}">{number[key]}</a>' for key in p.claims)
        + "</figcaption>\n</figure>\n"
        for p in shown
        if p.picture is not None
    )
    if not charts:
        return ""
    return (
        f'<h3>{head}</h3>\n<p class="soft">{words}</p>\n'
        f'<div class="charts scroll" tabindex="0" role="group" aria-label="{head}">\n{charts}</div>\n'
    )


def _circuits(report: Report) -> list[Row]:
    return [
        ("", (said(f.name or "(unnamed)"), str(f.line), str(f.nodes), str(f.elements), *figure_cells(f)))
        for f in report.figures
    ]


# --- left to the checker --------------------------------------------------------------------------------------------


def checker(report: Report, rows: Sequence[Entry], placed: Collection[str]) -> str:
    """What the check cannot show, cautions, givens and waivers, each with a box to tick; signatures."""
    opening, points, closing = LIMITS
    ticks = "".join(f"<li>{TICK_BOX} {p}</li>\n" for p in points)
    cautions: list[Row] = [
        ("", (to_mark(e, placed), str(e.line), tell(e.sentences((e.message,))[0]))) for e in raised(report, rows)
    ]
    assumed: list[Row] = [
        ("", (to_mark(e, placed), str(e.line), code(e.text), said(source))) for e, source in givens(report, rows)
    ]
    waived: list[Row] = [
        ("", (str(e.line), code(text), said(line), state)) for e, text, line, state in waivers(report, rows)
    ]
    return (
        '<section aria-labelledby="checker">\n<h2 id="checker">Left to the checker</h2>\n'
        f'<h3>What this check cannot show</h3>\n<p>{opening}</p>\n<ul class="ticks">\n{ticks}</ul>\n'
        f"<p>{TICK} {closing}</p>\n"
        + to_tick("Cautions to act upon", ("Mark", "Line", "Caution"), cautions)
        + to_tick("Givens, checked against nothing", ("Mark", "Line", "As written", "Source"), assumed)
        + to_tick("Waivers", ("Line", "As written", "Reason", "State"), waived)
        + part("Signed in the sheet", ("Role", "By", "Date", "State"), _signed(report))
        + f'<p class="soft">Checked by calccheck {__version__}.</p>\n</section>\n'
    )


def _signed(report: Report) -> list[Row]:
    return [("", tuple(map(said, row))) for row in signature_rows(report)]
