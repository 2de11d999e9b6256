"""Where the characters of a page stand in the sheet: the arithmetic of offsets behind ``read.markdown``.

The Markdown parser is given the text from some offset on, with LF line ends and no NUL. It hands back the contents of
blocks without saying where their characters came from; but a block's line is always the tail of a line of the text
(what the enclosing containers take stands in front of it), so the places follow from the line and the content.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from itertools import accumulate

from calccheck.source import NOWHERE, Piece, Span, joined

# What Markdown trims from paragraphs and cells: tab, line ends, VT, FF and Unicode's space, line and paragraph separators.
BLANKS = "\t\n\v\f\r \u00a0\u1680\u2000\u2001\u2002\u2003\u2004\u2005\u2006\u2007\u2008\u2009\u200a\u2028\u2029\u202f\u205f\u3000"

_LINE_END = re.compile(r"\r\n?|\n")
_BORDER = re.compile(r"(?<!\\)\|")
_INDENT = re.compile(r"[ \t>]*")


@dataclass(frozen=True, slots=True)
class Page:
    """The text as the parser is given it, the offset of each of its lines (and one behind the last), and for each line
    what has to be added to an offset in ``text`` to get the offset in the sheet. ``plain``: whether every line of the sheet
    ends as the parser's do.
    """

    text: str
    starts: list[int]
    shifts: list[int]
    plain: bool


def page_from(sheet_text: str, offset: int) -> Page:
    """The part of a sheet from ``offset`` on, as the parser is given it (CommonMark 0.31.2, sections 2.1 and 2.3)."""
    source = sheet_text[offset:]
    text = _LINE_END.sub("\n", source) if "\r" in source else source
    text = text.replace("\0", "\ufffd")
    starts = list(accumulate(map(len, text.split("\n")), lambda start, length: start + length + 1, initial=0))
    if len(text) == len(source):
        return Page(text, starts, [offset] * (len(starts) - 1), "\r" not in source)
    own_starts = [0, *(end.end() for end in _LINE_END.finditer(source))]
    return Page(text, starts, [offset + own - start for own, start in zip(own_starts, starts, strict=False)], False)


def piece(page: Page, line: int, start: int, end: int) -> Piece:
    """The characters from ``start`` to ``end`` (offsets in ``page.text``), all of one line."""
    shift = page.shifts[line]
    return Piece(page.text[start:end], range(start + shift, end + shift + 1))


def line_end(page: Page, line: int) -> int:
    """The offset in ``page.text`` behind the last character of a line."""
    return page.starts[line + 1] - 1


def span_to_line_end(page: Page, start: int, first: int, last: int) -> Span:
    """From ``start`` in line ``first`` to the end of line ``last``, without blanks at its end."""
    begin = page.starts[last]
    end = begin + len(page.text[begin : line_end(page, last)].rstrip(BLANKS))
    return Span(start + page.shifts[first], max(start + page.shifts[first], end + page.shifts[last]))


def behind_indent(page: Page, line: int) -> int:
    """Where a list item or table row begins that is not on the first line of its containers: only blanks and the
    marks of block quotes can stand before it.
    """
    indent = _INDENT.match(page.text, page.starts[line], line_end(page, line))
    return indent.end() if indent else page.starts[line]


def nowhere(text: str, offset: int) -> Piece:
    """Text whose characters cannot be placed, at ``offset`` as a whole."""
    return Piece(text, [NOWHERE] * len(text) + [offset])


def heading(page: Page, line: int, start: int, content: str) -> Piece:
    """A heading's content, which follows its number signs (but for blanks); more signs may close it."""
    begin = page.text.find(content, start, line_end(page, line))
    return piece(page, line, begin, begin + len(content)) if begin >= 0 else tail(page, line, content, start)


def tail(page: Page, line: int, text: str, floor: int) -> Piece:
    """``text`` as the tail of a line, not before ``floor``; blanks may be trimmed from the line's end.

    A tab that a container's indentation cuts in two leaves spaces which stand nowhere.
    """
    end = line_end(page, line)
    start = page.text.rfind(text, floor, end)
    if start >= 0:
        return piece(page, line, start, start + len(text))
    body = text.lstrip(" \t")
    begin = start = page.text.rfind(body, floor, end)
    if start < 0:
        return nowhere(text, end + page.shifts[line])
    spaces = len(text) - len(body)
    while spaces and start > floor and page.text[start - 1] == text[spaces - 1]:
        start, spaces = start - 1, spaces - 1
    own = piece(page, line, start, begin + len(body))
    return Piece(" " * spaces + own.text, [NOWHERE] * spaces + list(own.at))


def flow(page: Page, content: str, lines: range, place: int) -> Piece:
    """A paragraph's content, which begins at ``place`` (but for blanks) and stands in ``lines``."""
    if page.text.startswith(content, place) and (page.plain or "\n" not in content):
        return piece(page, lines.start, place, place + len(content))
    texts = content.split("\n")
    line = lines.start
    while lines.stop - line > len(texts) and page.text.find(texts[0], place, line_end(page, line)) < 0:
        line += 1  # a line of nothing but no-break spaces is trimmed away, with its line end
        place = page.starts[line]
    if page.text.find(texts[0], place, line_end(page, line)) < 0:
        place = page.starts[line]  # behind tabs and block quotes the parser may leave a list's mark in the content
    pieces = [tail(page, line, texts[0], place)]
    for text in texts[1:]:
        line = min(line + 1, lines.stop - 1)
        pieces.append(tail(page, line, text, page.starts[line]))
    return joined(pieces)


def tails(page: Page, content: str, first: int) -> tuple[Piece, ...]:
    """A fence's, code or HTML block's content line by line, its first line being ``first``."""
    texts = content.split("\n")
    if not texts[-1]:
        texts.pop()
    return tuple(tail(page, first + k, text, page.starts[first + k]) for k, text in enumerate(texts))


def trimmed(text: Piece, start: int = 0, end: int | None = None) -> Piece:
    """``text[start:end]`` without blanks at its ends; nothing but blanks leaves nothing, at its start."""
    whole_part = text.text[start:end]
    part = whole_part.strip(BLANKS)
    start += whole_part.find(part)
    return text.part(start, start + len(part))


def cells(row: Piece) -> list[Piece]:
    """The cells, trimmed, of a trimmed table row (GitHub Flavored Markdown 0.29, section 4.10): a pipe behind a
    backslash is no border and loses the backslash; the outermost borders may be left out.
    """
    text = row.text
    ends = [*(border.start() for border in _BORDER.finditer(text)), len(text)]
    bounds = list(zip([0, *(end + 1 for end in ends)], ends, strict=False))
    if ends[0] == 0:
        bounds.pop(0)
    if bounds and bounds[-1][0] == len(text):
        bounds.pop()
    found = [trimmed(row, start, end) for start, end in bounds]
    return [_without_escapes(cell) if "\\|" in cell.text else cell for cell in found]


def _without_escapes(cell: Piece) -> Piece:
    kept = [k for k in range(len(cell.text)) if not cell.text.startswith("\\|", k)]
    return Piece(cell.text.replace("\\|", "|"), [*(cell.at[k] for k in kept), cell.at[-1]])
