"""Tables of our own on the page for the screen."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from html import escape

_RIGHT = {
    "Line", "By circuit", "By working", "No basis", "Claims", "Printed", "Recomputed", "Deviation", "Nodes", "Parts",
    "Gap between routes", "Current residual", "Power balance",
}  # fmt: skip
TICK_BOX = '<span class="tick" role="img" aria-label="to tick"></span>'

Row = tuple[str, Sequence[str]]  # its anchor or nothing, its cells as HTML


def table(label: str, heads: Sequence[str], rows: Iterable[Row]) -> str:
    """A table that scrolls by itself where the screen is narrow."""
    classes = [' class="right"' if name in _RIGHT else "" for name in heads]
    top = "".join(f"<th scope=col{c}>{escape(name)}</th>" for name, c in zip(heads, classes, strict=True))
    body = "".join(_row(key, cells, classes) for key, cells in rows)
    return (
        f'<div class="scroll" tabindex="0" role="group" aria-label="{escape(label)}">\n'
        f'<table class="record">\n<thead><tr>{top}</tr></thead>\n<tbody>\n{body}</tbody>\n</table>\n</div>\n'
    )


def _row(key: str, cells: Sequence[str], classes: Sequence[str]) -> str:
    anchor = f' id="{key}"' if key else ""
    return f"<tr{anchor}>{''.join(f'<td{c}>{cell}</td>' for cell, c in zip(cells, classes, strict=True))}</tr>\n"


def part(title: str, heads: Sequence[str], rows: Sequence[Row]) -> str:
    """A heading and its table; nothing where the table would be empty."""
    return f"<h3>{escape(title)}</h3>\n{table(title, heads, rows)}" if rows else ""


def to_tick(title: str, heads: Sequence[str], rows: Sequence[Row]) -> str:
    """The same with a box to tick in front of every row."""
    return part(title, ("Seen", *heads), [(key, (TICK_BOX, *cells)) for key, cells in rows])
