"""The sheet as written, as HTML: every block of the page, every claim tinted and followed by its mark, notes behind blocks."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from html import escape

from calccheck.annotate.html_math import formula_html
from calccheck.annotate.html_words import said, told, word_html
from calccheck.annotate.marks import MARKS
from calccheck.annotate.maths_lines import members_on, one_claim, without_markup
from calccheck.annotate.pictures import BY_SOURCE, Shown
from calccheck.annotate.places import Places, marks_in, runs
from calccheck.annotate.record import Entry, note_lines
from calccheck.document import Block, Inline, inlines
from calccheck.model import Judged
from calccheck.source import NOWHERE, Piece, Sheet

_SAFE_LINKS = ("http://", "https://", "mailto:")
_TAGS = {"emphasis": "em", "strong": "strong", "strike": "s"}


@dataclass(frozen=True, slots=True)
class Setting:
    """What the walk needs at every step.

    ``levels``: of each heading by its offset. ``following``: of each listed entry, the one after it in the sheet.
    ``judged``: the judged claims by entry key. ``pictures``: behind blocks, by their offset.
    """

    sheet: Sheet
    where: Places
    levels: dict[int, int]
    following: dict[str, str]
    judged: Mapping[str, Judged]
    pictures: Mapping[int, Sequence[Shown]] = field(default_factory=dict)


def blocks_html(s: Setting, children: Sequence[Block]) -> str:
    """Blocks one behind the other."""
    found = (b for b in children if b.kind in _BLOCKS)
    return "".join(_BLOCKS[b.kind](s, b) + _figure(s, b) for b in found)


def _figure(s: Setting, b: Block) -> str:
    """What stands behind a block: a drawing, or bars side by side, with a caption."""
    shown = s.pictures.get(b.span.start, ())
    if not shown:
        return ""
    caption = next((p.caption for p in shown if p.caption), BY_SOURCE)
    images = "".join(p.picture.svg for p in shown if p.picture is not None)
    scroll = _scrolling("Picture", s, b, images) if images else ""
    return f"<figure>\n{scroll}<figcaption>{said(caption)}</figcaption>\n</figure>\n"


def _scrolling(what: str, s: Setting, b: Block, body: str) -> str:
    """What may be wider than the screen, in a frame of its own that the keyboard reaches."""
    label = f"{what} of line {s.sheet.line_column(b.span.start)[0]}"
    return f'<div class="scroll" tabindex="0" role="group" aria-label="{label}">\n{body}\n</div>\n'


# --- blocks ---------------------------------------------------------------------------------------------------------


def _heading(s: Setting, b: Block) -> str:
    level = min(6, s.levels[b.span.start] + 1)
    return f"<h{level}>{_inlines(s, b.inlines)}</h{level}>\n{_notes(s, b.inlines)}"


def _paragraph(s: Setting, b: Block) -> str:
    return f"<p>{_inlines(s, b.inlines)}</p>\n{_notes(s, b.inlines)}"


def _list(s: Setting, b: Block) -> str:
    items = "".join(f"<li>{_item(s, item)}</li>\n" for item in b.children)
    if b.info == "ordered":
        return f'<ol start="{b.level}">\n{items}</ol>\n'
    return f"<ul>\n{items}</ul>\n"


def _item(s: Setting, b: Block) -> str:
    """A list's item; one that is a paragraph alone stands without its space."""
    if len(b.children) == 1 and b.children[0].kind == "paragraph":
        return _inlines(s, b.children[0].inlines) + _notes(s, b.children[0].inlines)
    return blocks_html(s, b.children)


def _quote(s: Setting, b: Block) -> str:
    return f"<blockquote>\n{blocks_html(s, b.children)}</blockquote>\n"


def _table(s: Setting, b: Block) -> str:
    head, *body = b.children
    heads = "".join(
        _cell(s, c, "th scope=col" if c.inlines else "td") for c in head.children
    )  # an empty cell heads nothing
    rows = "".join(f"<tr>{''.join(_cell(s, c, 'td') for c in row.children)}</tr>\n" for row in body)
    cells = [i for row in b.children for c in row.children for i in c.inlines]
    table = f"<table>\n<thead><tr>{heads}</tr></thead>\n<tbody>\n{rows}</tbody>\n</table>"
    return _scrolling("Table", s, b, table) + _notes(s, cells)


def _cell(s: Setting, c: Block, tag: str) -> str:
    side = f' class="{c.info}"' if c.info in ("right", "center") else ""
    return f"<{tag}{side}>{_inlines(s, c.inlines)}</{tag.split()[0]}>"


def _lines(s: Setting, b: Block) -> str:
    """Lines as written, numbered as in the sheet."""
    caption = f'<span class="line soft">{said(b.info)}</span>' if b.info not in ("", "circuit", "working") else ""
    lines = "".join(
        f'<span class="line" data-line="{_line_number(s.sheet, line)}">{_runs(s, line)}</span>' for line in b.lines
    )
    notes = "".join(note_html(s, e) for e in marks_in(s.where, b.lines) if e.beside)
    return f"<pre><code>{caption}{lines}</code></pre>\n{notes}" if b.lines or caption else ""


def _maths(s: Setting, b: Block) -> str:
    """Lines of dollar maths, what was read of them as formulas."""
    kept = without_markup(s.where, b.lines)
    rows = "".join(
        f'<span class="line" data-line="{_line_number(s.sheet, line)}">{_maths_line(s, line, marks)}</span>'
        for line, marks in kept
    )
    notes = "".join(note_html(s, e) for _, marks in kept for e in marks if e.beside)
    return _scrolling("Maths", s, b, f'<div class="maths">{rows}</div>') + notes if rows else ""


def _maths_line(s: Setting, line: Piece, marks: Sequence[Entry]) -> str:
    owners = {run.entry.key: run.entry for run in runs(s.where, line) if run.entry is not None}
    entry = next(iter(owners.values()), None)
    members = members_on(line, s.judged[entry.key]) if entry is not None and entry.key in s.judged else []
    if entry is None or len(owners) > 1 or not members:
        return f"<code>{_runs(s, line)}</code>"
    body = f'<mark class="tint-{entry.kind}">{formula_html(s.sheet.text, members)}</mark>'
    return body + "".join(word_html(e, e.key, f"r-{e.key}") for e in marks)


def _line_number(sheet: Sheet, line: Piece) -> str:
    at = next((p for p in line.at if p != NOWHERE), None)
    return "" if at is None else str(sheet.line_column(at)[0])


def _rule(s: Setting, b: Block) -> str:
    return "<hr>\n"


def _note(s: Setting, b: Block) -> str:
    return f'<div role="note"><sup>[{said(b.info)}]</sup>\n{blocks_html(s, b.children)}</div>\n'


_BLOCKS: dict[str, Callable[[Setting, Block], str]] = {
    "heading": _heading,
    "paragraph": _paragraph,
    "list": _list,
    "item": _item,
    "quote": _quote,
    "table": _table,
    "fence": _lines,
    "code": _lines,
    "math": _maths,
    "html": _lines,
    "rule": _rule,
    "note": _note,
}


# --- notes ----------------------------------------------------------------------------------------------------------


def _notes(s: Setting, children: Sequence[Inline]) -> str:
    pieces: Iterator[Piece] = (i.text for i in inlines(tuple(children)) if i.text is not None)
    return "".join(note_html(s, e) for e in marks_in(s.where, pieces) if e.beside)


def note_html(s: Setting, e: Entry) -> str:
    """What stands behind a block about one of its claims, with ways to the next and back to the list."""
    kind = e.note_kind
    label = f'<strong class="ink-{kind}">{MARKS[kind].label} {escape(e.number)}</strong>'
    onward = s.following.get(e.key)
    jumps = f'<a href="#l-{e.key}">to the list</a>'
    jumps += f' <a href="#{onward}">to the next</a>' if onward else ""
    return f'<div class="beside ink-{kind}" role="note">{label} <span class="jump">{jumps}</span>{told(note_lines(e))}</div>\n'


# --- inlines --------------------------------------------------------------------------------------------------------


def _inlines(s: Setting, children: Sequence[Inline]) -> str:
    return "".join(_inline(s, i) for i in children)


def _inline(s: Setting, i: Inline) -> str:
    match i.kind:
        case "text":
            return _runs(s, i.text) if i.text else ""
        case "code" | "html":
            return f"<code>{_runs(s, i.text)}</code>" if i.text else ""
        case "math":
            return _inline_maths(s, i.text) if i.text else ""
        case "emphasis" | "strong" | "strike":
            return f"<{_TAGS[i.kind]}>{_inlines(s, i.children)}</{_TAGS[i.kind]}>"
        case "link" | "image":
            return _link(s, i)
        case "break":
            return "<br>\n"
        case "softbreak":
            return "\n"
        case "note":
            return f"<sup>[{said(i.target)}]</sup>"
    return _inlines(s, i.children)


def _inline_maths(s: Setting, piece: Piece) -> str:
    read = one_claim(s.where, s.judged, piece)
    if read is None:
        return f"<code>$ {_runs(s, piece)} $</code>"
    entry, members, ends = read
    words = "".join(word_html(e, e.key, f"r-{e.key}") for e in ends)
    return f'<mark class="tint-{entry.kind}">{formula_html(s.sheet.text, members)}</mark>{words}'


def _link(s: Setting, i: Inline) -> str:
    """A link where its address is one to follow safely and no mark, itself a link, stands in it; else words and address."""
    words = _inlines(s, i.children) or (_runs(s, i.text) if i.text else "")
    safe = i.kind == "link" and i.target.lower().startswith(_SAFE_LINKS) and "<a " not in words
    if safe:
        return f'<a href="{escape(i.target)}" rel="noreferrer noopener">{words}</a>'
    lead = "image: " if i.kind == "image" else ""
    return f'{words} <code class="soft">({lead}{said(i.target)})</code>' if i.target else words


def _runs(s: Setting, piece: Piece) -> str:
    parts = []
    for run in runs(s.where, piece):
        body = said(run.text)
        parts.append(f'<mark class="tint-{run.entry.kind}">{body}</mark>' if run.entry else body)
        parts += [word_html(e, e.key, f"r-{e.key}") for e in run.ends]
    return "".join(parts)
