"""Where a thing stands: the sheet's text, spans of it, and pieces that remember where each character came from."""

from __future__ import annotations

import re
from bisect import bisect_right
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

_LINE_END = re.compile(r"\r\n?|\n")
NOWHERE = -1  # a character with none of its own in the sheet: an expanded tab, a joint between lines


@dataclass(frozen=True, slots=True)
class Span:
    """A half-open range of code points in ``Sheet.text``, as written (CR LF kept)."""

    start: int
    end: int


@dataclass(frozen=True)
class Sheet:
    """One calc sheet: its name (a path, or ``-``) and its text."""

    name: str
    text: str

    @cached_property
    def line_starts(self) -> list[int]:
        """Offsets at which the lines begin; CR LF, LF and CR each end a line."""
        return [0] + [m.end() for m in _LINE_END.finditer(self.text)]

    def line_column(self, offset: int) -> tuple[int, int]:
        """Line and column of an offset, both from 1, columns in code points."""
        line = bisect_right(self.line_starts, offset)
        return line, offset - self.line_starts[line - 1] + 1


@dataclass(frozen=True, slots=True)
class Piece:
    """Text as read, with the sheet offset of every character.

    ``at`` is one longer than ``text``: its last entry is the offset behind the last character.
    """

    text: str
    at: Sequence[int]

    def span(self, start: int = 0, end: int | None = None) -> Span:
        """The span in the sheet of ``text[start:end]``, skipping characters that stand nowhere."""
        stop = len(self.text) if end is None else end
        if start < stop:
            first, last = self.at[start], self.at[stop - 1]
            if first != NOWHERE and last != NOWHERE:
                return Span(first, last + 1)
        placed = [p for p in self.at[start:stop] if p != NOWHERE]
        if not placed:
            here = next((p for p in self.at[stop:] if p != NOWHERE), 0)
            return Span(here, here)
        return Span(placed[0], placed[-1] + 1)

    def part(self, start: int, end: int) -> Piece:
        """The piece ``text[start:end]``."""
        at = self.at[start : end + 1]
        if at[-1] == NOWHERE:  # a joint or a cut tab follows
            last = max(at)
            at = [*at[:-1], self.span(end).start if last == NOWHERE else last + 1]
        return Piece(self.text[start:end], at)

    def strip(self) -> Piece:
        """The piece without white space at its ends."""
        if self.text == self.text.strip():
            return self
        lead = len(self.text) - len(self.text.lstrip())
        return self.part(lead, max(lead, len(self.text.rstrip())))


def whole(text: str, offset: int = 0) -> Piece:
    """A piece whose characters stand one behind the other from ``offset`` on."""
    return Piece(text, range(offset, offset + len(text) + 1))


def joined(pieces: Sequence[Piece], joint: str = "\n") -> Piece:
    """Pieces one behind the other, ``joint`` (which stands nowhere) between them."""
    if len(pieces) == 1:
        return pieces[0]
    text, at, last = "", [], 0
    for k, piece in enumerate(pieces):
        if k:
            text += joint
            at += [NOWHERE] * len(joint)
        text += piece.text
        at += piece.at[: len(piece.text)]
        last = piece.at[len(piece.text)]
    return Piece(text, [*at, last])
