"""The marked sheet as one page for the screen: nothing is loaded from elsewhere, nothing in the sheet is ever markup.

The list of findings stands first; every entry leads to its place, every place to the record and back, by plain anchors.
"""

from __future__ import annotations

from base64 import b64encode
from hashlib import sha256
from html import escape
from itertools import pairwise
from pathlib import Path

from calccheck.annotate.characters import told
from calccheck.annotate.headings import heading_levels
from calccheck.annotate.html_page import Setting, blocks_html
from calccheck.annotate.html_record import checker, record
from calccheck.annotate.html_summary import head, listing, summary
from calccheck.annotate.marks import MARKS
from calccheck.annotate.pictures import behind
from calccheck.annotate.places import places
from calccheck.annotate.record import entries, worst_first
from calccheck.annotate.record_parts import raised
from calccheck.model import Report

_SKIPS = {"findings": "To the list of findings", "sheet": "To the sheet", "record": "To the check record"}


def to_html(report: Report) -> str:
    """One self-contained page."""
    rows = entries(report)
    reading = report.reading
    where = places(reading.page, reading.sheet, rows)
    placed = where.placed()
    order = sorted(worst_first(rows), key=lambda e: e.span.start)
    following = {a.key: b.key for a, b in pairwise(order)}
    judged = dict(zip((e.key for e in rows), report.claims, strict=False))
    setting = Setting(reading.sheet, where, heading_levels(reading.page), following, judged, behind(report))
    title = reading.title.get("subject") or reading.title.get("sheet") or reading.sheet.name
    in_front = raised(report, rows)
    return (
        f"{_opening(report, title)}"
        f"{head(report, title)}{summary(report, rows, placed)}"
        f"{listing(report, worst_first(e for e in rows if e not in in_front), placed)}"
        f'<main id="sheet" class="sheet">\n{blocks_html(setting, reading.page)}</main>\n'
        f"{record(report, rows, placed)}{checker(report, rows, placed)}</body>\n</html>\n"
    )


def _opening(report: Report, title: str) -> str:
    """What stands before the first word: the head of the page, which lets nothing in but its own style, and ways past the top."""
    style = _style()
    lock = b64encode(sha256(style.encode("utf-8")).digest()).decode("ascii")
    policy = f"default-src 'none'; style-src 'sha256-{lock}'; base-uri 'none'; form-action 'none'"
    skips = "".join(f'<a class="skip" href="#{target}">{words}</a>\n' for target, words in _SKIPS.items())
    return (
        '<!DOCTYPE html>\n<html lang="en">\n<head>\n<meta charset="utf-8">\n'
        f'<meta http-equiv="Content-Security-Policy" content="{policy}">\n'
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        f"<title>{escape(MARKS[report.verdict].label)}: {escape(told(title))}</title>\n<style>{style}</style>\n</head>\n<body>\n"
        f"{skips}"
    )


def _style() -> str:
    """The look, with a pair of colours for every mark by day and by night."""
    day = "".join(f".ink-{k}{{color:{m.ink}}}.tint-{k}{{background:{m.tint}}}" for k, m in MARKS.items())
    night = "".join(f".ink-{k}{{color:{m.night_ink}}}.tint-{k}{{background:{m.night_tint}}}" for k, m in MARKS.items())
    look = Path(__file__).with_name("page.css").read_text("utf-8")
    return f"\n{look}{day}\n@media screen and (prefers-color-scheme: dark){{{night}}}\n"
