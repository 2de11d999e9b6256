"""Which characters of the page belong to which entry of the record, and where each mark stands.

Both printed outputs cut every run of text by ``runs`` and set the marks of ``Run.ends`` behind it.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from itertools import groupby

from calccheck.annotate.record import Entry
from calccheck.document import Block, blocks, inlines
from calccheck.source import NOWHERE, Piece, Sheet

NOBODY = -1


@dataclass(frozen=True, slots=True)
class Places:
    """``owner``: for each character of the sheet, the entry that it belongs to, or ``NOBODY``; ``ends``: by the offset of a
    shown character, the entries whose marks stand behind it."""

    entries: tuple[Entry, ...]
    owner: list[int]
    ends: dict[int, tuple[int, ...]]

    def placed(self) -> set[str]:
        """The keys of the entries whose marks stand on the page."""
        return {self.entries[k].key for found in self.ends.values() for k in found}


@dataclass(frozen=True, slots=True)
class Run:
    """Text of one owner, and the entries whose marks stand behind it."""

    text: str
    entry: Entry | None
    ends: tuple[Entry, ...]


def places(page: tuple[Block, ...], sheet: Sheet, rows: tuple[Entry, ...]) -> Places:
    """Give every character to the shortest entry that covers it, to a claim before a finding.

    An entry of which nothing is shown gets its mark behind the nearest character before it on its line, else behind the
    next one shown.
    """
    owner = [NOBODY] * len(sheet.text)
    for k in sorted(range(len(rows)), key=lambda k: (rows[k].key[0] == "c", rows[k].span.start - rows[k].span.end)):
        span = rows[k].span
        owner[span.start : span.end] = [k] * len(owner[span.start : span.end])
    shown = sorted({at for piece in shown_pieces(page) for at in piece.at[: len(piece.text)] if at != NOWHERE})
    last = {owner[at]: at for at in shown if owner[at] != NOBODY}
    ends: dict[int, tuple[int, ...]] = {}
    for k, row in enumerate(rows):
        at = last[k] if k in last else _nearest(row, shown, sheet)
        if at != NOWHERE:
            ends[at] = (*ends.get(at, ()), k)
    return Places(rows, owner, ends)


def _nearest(row: Entry, shown: list[int], sheet: Sheet) -> int:
    """The last shown character up to the end of an entry, on the lines that it stands on; else the next, else the last."""
    k = bisect_right(shown, max(row.span.start, row.span.end - 1)) - 1
    line = sheet.line_starts[sheet.line_column(row.span.start)[0] - 1]
    if k >= 0 and shown[k] >= line:
        return shown[k]
    return shown[min(k + 1, len(shown) - 1)] if shown else NOWHERE


def shown_pieces(page: tuple[Block, ...]) -> Iterator[Piece]:
    """Every piece of text that the page shows, in its order."""
    for block in blocks(page):
        if block.kind != "front matter":
            yield from block.lines
            yield from (i.text for i in inlines(block.inlines) if i.text is not None)


def runs(where: Places, piece: Piece) -> list[Run]:
    """A piece cut where its owner changes; characters that stand nowhere go with the one before."""
    owners: list[int] = []
    for at in piece.at[: len(piece.text)]:
        before = owners[-1] if owners else NOBODY
        owners.append(where.owner[at] if 0 <= at < len(where.owner) else before)
    cut, start = [], 0
    for owner, group in groupby(owners):
        end = start + sum(1 for _ in group)
        here = [k for at in piece.at[start:end] for k in where.ends.get(at, ())]
        ends = tuple(where.entries[k] for k in dict.fromkeys(here))
        cut.append(Run(piece.text[start:end], None if owner == NOBODY else where.entries[owner], ends))
        start = end
    return cut


def marks_in(where: Places, pieces: Iterable[Piece]) -> list[Entry]:
    """The entries whose marks stand behind these pieces, in their order."""
    return list(dict.fromkeys(entry for piece in pieces for run in runs(where, piece) for entry in run.ends))
