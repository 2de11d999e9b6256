"""A Markdown page as nested blocks and inlines of our own, every one with its place in the sheet.

``read.markdown`` makes it; the reading of claims and every output walk it, so that no one else knows the Markdown library.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal

from calccheck.source import Piece, Span

InlineKind = Literal[
    "text", "code", "math", "emphasis", "strong", "strike", "link", "image", "break", "softbreak", "html", "note"
]
BlockKind = Literal[
    "heading", "paragraph", "list", "item", "quote", "table", "row", "cell",
    "fence", "code", "math", "html", "rule", "front matter", "note",
]  # fmt: skip


@dataclass(frozen=True, slots=True)
class Inline:
    """One run inside a paragraph, heading or cell.

    ``text``: the characters of a text, code, math or html run (code without its backticks; entities and escapes of a
    text run resolved, each resolved character standing where its escape begins).
    ``span``: the run with its markup. ``target``: a link's or image's address, a note's label.
    """

    kind: InlineKind
    span: Span
    text: Piece | None = None
    children: tuple[Inline, ...] = ()
    target: str = ""


@dataclass(frozen=True, slots=True)
class Block:
    """One block.

    ``lines``: of a fence, code, math, html or front matter block, its content line by line, without the fence lines and
    without the indentation that the enclosing containers take.
    ``inlines``: of a heading, paragraph or cell. ``content``: the source of those inlines as one piece.
    ``info``: a fence's info string; a list's ``bullet`` or ``ordered``; a cell's ``left``, ``right``, ``center`` or
    nothing; a note's label. ``level``: a heading's, or the first number of an ordered list; 1 for a row of the table's head.
    ``closed``: of a fence, whether its closing line stands.
    """

    kind: BlockKind
    span: Span
    children: tuple[Block, ...] = ()
    inlines: tuple[Inline, ...] = ()
    lines: tuple[Piece, ...] = ()
    content: Piece | None = None
    info: str = ""
    level: int = 0
    closed: bool = True


def blocks(children: tuple[Block, ...]) -> Iterator[Block]:
    """Every block, outer before inner, in the order of the page."""
    for block in children:
        yield block
        yield from blocks(block.children)


def inlines(children: tuple[Inline, ...]) -> Iterator[Inline]:
    """Every inline, outer before inner, in the order of the page."""
    for inline in children:
        yield inline
        yield from inlines(inline.children)
