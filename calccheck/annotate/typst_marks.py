"""Runs of text with their tints, comments and marks, as typst source."""

from __future__ import annotations

from calccheck.annotate.places import Run
from calccheck.annotate.record import Entry
from calccheck.annotate.typst_text import literal
from calccheck.source import NOWHERE, Piece, Sheet


def line_number(sheet: Sheet, line: Piece) -> str:
    """The number of the sheet's line on which a piece stands."""
    at = next((p for p in line.at if p != NOWHERE), None)
    return "" if at is None else str(sheet.line_column(at)[0])


def run_source(run: Run, body: str, below: bool = False) -> str:
    """One run: tinted by the entry it belongs to, a comment on it where something is to be mended, its marks behind it."""
    if run.entry is not None:
        body = f"#tint({literal(run.entry.kind)})[{body}];"
    body = commented([e.key for e in run.ends if e.to_mend], body)
    return body + "".join(mark_source(e, below) for e in run.ends)


def mark_source(entry: Entry, below: bool = False) -> str:
    """The mark of an entry, linked to its row in the record."""
    sides = f"below: {'true' if below else 'false'}, beside: {'true' if entry.beside else 'false'}"
    extra = '#h(0.4em)#label-of("caution");' if entry.cautions else ""
    return f"#mark({literal(entry.kind)}, {literal(entry.number)}, {literal(entry.key)}, {sides});{extra}"


def commented(keys: list[str], body: str) -> str:
    """The words with a comment on them, where something is to be mended."""
    return f"#comment({literal('+'.join(keys))})[{body}];" if keys and body else body
