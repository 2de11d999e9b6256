"""The marked sheet as one page for the screen: nothing is loaded from elsewhere, nothing in the sheet is ever markup.

The list of findings stands first; every entry leads to its place, every place to the record and back, by plain anchors.
"""

from __future__ import annotations

from base64 import b64encode
from collections.abc import Iterable, Sequence
from hashlib import sha256
from html import escape
from itertools import pairwise
from pathlib import Path

from calccheck import __version__
from calccheck.annotate.characters import told
from calccheck.annotate.headings import heading_levels
from calccheck.annotate.html_page import Setting, blocks_html, said, word_html
from calccheck.annotate.marks import MARKS
from calccheck.annotate.pictures import BY_SOURCE, behind, totals
from calccheck.annotate.places import Places, places
from calccheck.annotate.record import LIMITS, Entry, entries, headline, worst_first
from calccheck.annotate.record_parts import (
    BASES,
    MEANINGS,
    TITLE_FIELDS,
    counts,
    digest,
    figure_cells,
    given_notes,
    settings_line,
    signature_rows,
)
from calccheck.model import Report


def to_html(report: Report) -> str:
    """One self-contained page."""
    rows = entries(report)
    reading = report.reading
    where = places(reading.page, reading.sheet, rows)
    listed = worst_first(rows)
    order = sorted(listed, key=lambda e: e.span.start)
    following = {a.key: b.key for a, b in pairwise(order)}
    setting = Setting(reading.sheet, where, heading_levels(reading.page), following, behind(report))
    title = reading.title.get("subject") or reading.title.get("sheet") or reading.sheet.name
    style = _style()
    lock = b64encode(sha256(style.encode("utf-8")).digest()).decode("ascii")
    policy = f"default-src 'none'; style-src 'sha256-{lock}'; base-uri 'none'; form-action 'none'"
    return (
        '<!DOCTYPE html>\n<html lang="en">\n<head>\n<meta charset="utf-8">\n'
        f'<meta http-equiv="Content-Security-Policy" content="{policy}">\n'
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        f"<title>{escape(MARKS[report.verdict].label)}: {escape(told(title))}</title>\n<style>{style}</style>\n</head>\n<body>\n"
        '<a class="skip" href="#sheet">To the sheet</a>\n'
        f"{_head(report, title)}{_summary(report)}{_list(listed, where)}"
        f'<main id="sheet" class="sheet">\n{blocks_html(setting, reading.page)}</main>\n'
        f"{_record(report, rows, where)}</body>\n</html>\n"
    )


def _style() -> str:
    """The look, with a pair of colours for every mark by day and by night."""
    day = "".join(f".ink-{k}{{color:{m.ink}}}.tint-{k}{{background:{m.tint}}}" for k, m in MARKS.items())
    night = "".join(f".ink-{k}{{color:{m.night_ink}}}.tint-{k}{{background:{m.night_tint}}}" for k, m in MARKS.items())
    look = Path(__file__).with_name("page.css").read_text("utf-8")
    return f"\n{look}{day}\n@media (prefers-color-scheme: dark){{@media screen{{{night}}}}}\n"


# --- the top --------------------------------------------------------------------------------------------------------


def _head(report: Report, title: str) -> str:
    fields = {**TITLE_FIELDS, **{k: k for k in report.reading.title if k not in TITLE_FIELDS}}
    cells = "".join(
        f"<div><dt>{said(label)}</dt><dd>{said(report.reading.title.get(key, ''))}</dd></div>\n"
        for key, label in fields.items()
    )
    return f'<header>\n<h1>{said(title)}</h1>\n<dl class="title">\n{cells}</dl>\n</header>\n'


def _summary(report: Report) -> str:
    verdict = report.verdict
    rows = "".join(
        f'<tr><td><span class="word ink-{kind}">{MARKS[kind].label}</span></td>'
        + "".join(f'<td class="right">{n or "–"}</td>' for n in numbers)
        + f"<td>{MEANINGS[kind]}</td></tr>\n"
        for kind, numbers in counts(report)
    )
    heads = _heads(("Verdict", "By circuit", "By working", "No basis", "Claims", "Meaning"))
    left_out = report.reading.not_read
    unread = (
        f'<p class="soft">Not read, and so not checked: {left_out} other fences and HTML blocks.</p>\n'
        if left_out
        else ""
    )
    return (
        '<section aria-labelledby="summary">\n<h2 id="summary">Check summary</h2>\n'
        f'<p class="verdict ink-{verdict} tint-{verdict}"><strong>{MARKS[verdict].label}</strong> {said(headline(report))}</p>\n'
        f'<table class="record">\n{heads}<tbody>\n{rows}</tbody>\n</table>\n{unread}</section>\n'
    )


def _list(listed: Sequence[Entry], where: Places) -> str:
    placed = where.placed()
    items = "".join(_listed(e, e.key if e.key in placed else f"r-{e.key}") for e in listed)
    body = f'<ol class="findings">\n{items}</ol>' if items else "<p>Nothing is to be mended.</p>"
    return f'<nav aria-labelledby="findings">\n<h2 id="findings">Worst first</h2>\n{body}\n</nav>\n'


def _listed(e: Entry, target: str) -> str:
    facts = [f"line {e.line}", f"recomputed {said(e.computed)}" if e.computed else "", said(e.deviation)]
    told = "".join(f'<span class="told">{said(t)}</span>' for t in (*e.told, *e.cautions))
    what = f"<code>{said(e.text)}</code>" if e.key[0] == "c" else said(e.text)
    return f'<li id="l-{e.key}">{word_html(e, "", target)} {what} <span class="soft">{", ".join(filter(None, facts))}</span>{told}</li>\n'


# --- the record -----------------------------------------------------------------------------------------------------


def _heads(names: Iterable[str]) -> str:
    return f"<thead><tr>{''.join(f'<th scope=col>{escape(n)}</th>' for n in names)}</tr></thead>\n"


def _part(title: str, names: Iterable[str], rows: str) -> str:
    if not rows:
        return ""
    table = f'<table class="record">\n{_heads(names)}<tbody>\n{rows}</tbody>\n</table>'
    return f'<h3>{title}</h3>\n<div class="scroll" tabindex="0" role="group" aria-label="{title}">\n{table}\n</div>\n'


def _row(cells: Iterable[str], key: str = "") -> str:
    anchor = f' id="{key}"' if key else ""
    return f"<tr{anchor}>{''.join(f'<td>{c}</td>' for c in cells)}</tr>\n"


def _record(report: Report, rows: Sequence[Entry], where: Places) -> str:
    placed = where.placed()
    claims = "".join(_claim_row(e, e.key in placed) for e in rows if e.key[0] == "c")
    findings = "".join(_finding_row(e, e.key in placed) for e in rows if e.key[0] == "f")
    opening, points, closing = LIMITS
    return (
        '<section aria-labelledby="record">\n<h2 id="record">Check record</h2>\n'
        f'<p class="soft">SHA-256 of the sheet as checked: <code>{digest(report)}</code><br>\n'
        f"Judged with {said(settings_line(report.reading.settings))}.</p>\n"
        + _part("Claims", ("Mark", "Line", "As written", "Printed", "Recomputed", "Deviation", "Basis"), claims)
        + _part("Findings", ("Mark", "Line", "Finding"), findings)
        + _glance(report, rows)
        + _part(
            "Circuits solved by two routes",
            ("Circuit", "Line", "Nodes", "Parts", "Gap between routes", "Current residual", "Power balance"),
            _circuits(report),
        )
        + _part("Givens, checked against nothing", ("Line", "As written", "Source"), _givens(report, rows))
        + _part("Waivers", ("Line", "As written", "State"), _waivers(report, rows))
        + _part("Signatures in the sheet", ("Role", "Name", "Date", "State"), _signed(report))
        + f"<h3>What this check cannot show</h3>\n<p>{opening}</p>\n<ul>\n"
        + "".join(f"<li>{p}</li>\n" for p in points)
        + f'</ul>\n<p>{closing}</p>\n<p class="soft">Checked by calccheck {__version__}.</p>\n</section>\n'
    )


def _glance(report: Report, rows: Sequence[Entry]) -> str:
    """Bars for every claimed total, each with links to its claims."""
    number = {e.key: e.number for e in rows}
    charts = "".join(
        f"<figure>\n{p.picture.svg}<figcaption>"
        + ("Claim " if len(p.claims) == 1 else "Claims ")
        + ", ".join(f'<a href="#r-{key}">{number[key]}</a>' for key in p.claims)
        + "</figcaption>\n</figure>\n"
        for p in totals(report)
        if p.picture is not None
    )
    if not charts:
        return ""
    return (
        f'<h3>Superposition at a glance</h3>\n<p class="soft">{BY_SOURCE}</p>\n<div class="charts">\n{charts}</div>\n'
    )


def _claim_row(e: Entry, placed: bool) -> str:
    told = "".join(f'<span class="told">{said(t)}</span>' for t in e.told if e.kind != "given")
    told += "".join(
        f'<span class="told"><strong class="ink-caution">{MARKS["caution"].label}</strong> {said(t)}</span>'
        for t in e.cautions
    )
    values = (said(e.printed), said(e.computed), said(e.deviation), BASES.get(e.basis, e.basis))
    spoken = [f'<span class="value">{v}</span>' for v in values]
    return _row((_back(e, placed), str(e.line), f"<code>{said(e.text)}</code>{told}", *spoken), f"r-{e.key}")


def _finding_row(e: Entry, placed: bool) -> str:
    told = "".join(f'<span class="told">{said(t)}</span>' for t in e.told)
    return _row((_back(e, placed), str(e.line), f"{said(e.text)}.{told}"), f"r-{e.key}")


def _back(e: Entry, placed: bool) -> str:
    if placed:
        return word_html(e, "", e.key)
    return f'<span class="word ink-{e.kind}">{MARKS[e.kind].label}<sup>{escape(e.number)}</sup></span>'


def _circuits(report: Report) -> str:
    return "".join(
        _row((said(f.name or "(unnamed)"), str(f.line), str(f.nodes), str(f.elements), *figure_cells(f)))
        for f in report.figures
    )


def _givens(report: Report, rows: Sequence[Entry]) -> str:
    return "".join(
        _row((str(e.line), f"<code>{said(e.text)}</code>", said(given_notes(judged.claim))))
        for judged, e in zip(report.claims, rows, strict=False)
        if judged.verdict == "given"
    )


def _waivers(report: Report, rows: Sequence[Entry]) -> str:
    return "".join(
        _row(
            (
                str(e.line),
                f"<code>{said(j.claim.waiver.text)}</code>",
                "stands" if j.verdict == "accepted" else "does not apply",
            )
        )
        for j, e in zip(report.claims, rows, strict=False)
        if j.claim.waiver is not None
    )


def _signed(report: Report) -> str:
    return "".join(_row(map(said, row)) for row in signature_rows(report))
