"""Levels of headings as accessible documents demand them."""

from __future__ import annotations

from collections.abc import Sequence

from calccheck.document import Block, blocks


def heading_levels(page: Sequence[Block]) -> dict[int, int]:
    """Of each heading, by its offset: beginning at 1, none skipped on the way down (ISO 14289-1, 7.4.2)."""
    levels: dict[int, int] = {}
    last = 0
    for block in blocks(tuple(page)):
        if block.kind == "heading":
            last = levels[block.span.start] = min(block.level, last + 1)
    return levels
