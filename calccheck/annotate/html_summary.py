"""The top of the page for the screen: title block, verdict and what nobody should miss, the list of findings."""

from __future__ import annotations

from collections.abc import Collection, Sequence

from calccheck.annotate.html_math import written
from calccheck.annotate.html_tables import part, table
from calccheck.annotate.html_words import code, said, tell, to_mark, told
from calccheck.annotate.marks import MARKS
from calccheck.annotate.record import Entry, headline, note_lines
from calccheck.annotate.record_parts import MEANINGS, TITLE_FIELDS, counts, givens, raised, untitled, waivers
from calccheck.model import Report

_LIST = "Worst first"


def head(report: Report, title: str) -> str:
    """The title block."""
    others = {k: k for k in untitled(report)}
    cells = "".join(
        f"<div><dt>{said(label)}</dt><dd>{said(report.reading.title.get(key, ''))}</dd></div>\n"
        for key, label in (TITLE_FIELDS | others).items()
    )
    return f'<header>\n<h1>{said(title)}</h1>\n<dl class="title">\n{cells}</dl>\n</header>\n'


def summary(report: Report, rows: Sequence[Entry], placed: Collection[str]) -> str:
    """Verdict, cautions, counts by basis, waivers, open assumptions."""
    verdict = report.verdict
    cautions = "".join(_raised(e, placed) for e in raised(report, rows))
    numbers = [
        (
            "",
            (f'<span class="word ink-{kind}">{MARKS[kind].label}</span>', *(str(n or "–") for n in ns), MEANINGS[kind]),
        )
        for kind, ns in counts(report)
    ]
    return (
        '<section aria-labelledby="summary">\n<h2 id="summary">Check summary</h2>\n'
        f'<p class="verdict ink-{verdict} tint-{verdict}"><strong>{MARKS[verdict].label}</strong> {said(headline(report))}</p>\n'
        f"{cautions}"
        + table("Counts", ("Verdict", "By circuit", "By working", "No basis", "Claims", "Meaning"), numbers)
        + _unread(report.reading.not_read)
        + _waived(report, rows, placed)
        + _assumed([e for e, _ in givens(report, rows)])
        + "</section>\n"
    )


def _raised(e: Entry, placed: Collection[str]) -> str:
    """A caution that the circuit raises."""
    return (
        f'<p class="raised tint-caution ink-caution" id="l-{e.key}">{to_mark(e, placed)} '
        f'<span class="plain">{tell(e.sentences((e.message,))[0])}</span> <span class="soft">line {e.line}</span></p>\n'
    )


def _unread(count: int) -> str:
    what = "1 other fence or HTML block" if count == 1 else f"{count} other fences and HTML blocks"
    return f'<p class="soft">Not read, and so not checked: {what}.</p>\n' if count else ""


def _waived(report: Report, rows: Sequence[Entry], placed: Collection[str]) -> str:
    found: list[tuple[str, Sequence[str]]] = [
        (
            "",
            (
                to_mark(e, placed),
                str(e.line),
                code(e.text),
                said(e.computed),
                said(e.deviation),
                said(f"{line}."),
                state,
            ),
        )
        for e, _, line, state in waivers(report, rows)
    ]
    return part("Under a waiver", ("Mark", "Line", "Claim", "Recomputed", "Deviation", "Waiver", "State"), found)


def _assumed(found: Sequence[Entry]) -> str:
    """What is given, each with a way to its row, in running text."""
    if not found:
        return ""
    lead = "One value is given" if len(found) == 1 else f"{len(found)} values are given"
    items = "; ".join(f'<a href="#r-{e.key}">{code(e.text.removeprefix("given "))}</a>' for e in found)
    return f'<h3>Open assumptions</h3>\n<p class="assumed">{lead} and checked against nothing: {items}.</p>\n'


# --- the list of findings -------------------------------------------------------------------------------------------


def listing(report: Report, listed: Sequence[Entry], placed: Collection[str]) -> str:
    """What is to be mended or weighed, each with a way to its place."""
    items = "".join(_listed(report, e, placed) for e in listed)
    body = f'<ol class="findings">\n{items}</ol>' if items else "<p>Nothing is to be mended.</p>"
    return f'<nav aria-labelledby="findings">\n<h2 id="findings">{_LIST}</h2>\n{body}\n</nav>\n'


def _listed(report: Report, e: Entry, placed: Collection[str]) -> str:
    what = written(report, e) if e.key[0] == "c" else said(e.text)
    line = f'<span class="soft">line {e.line}</span>'
    return (
        f'<li id="l-{e.key}" class="ink-{e.note_kind}">{to_mark(e, placed)} <span class="plain">{what}</span> {line}'
        f"{told(note_lines(e))}</li>\n"
    )
