"""The sheet as written, as typst source: every block of the page, every claim tinted and followed by its mark."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from itertools import zip_longest

from calccheck.annotate.pictures import Shown
from calccheck.annotate.places import Places, marks_in, runs
from calccheck.annotate.sentences import unparted
from calccheck.annotate.typst_marks import commented, line_number, mark_source, run_source
from calccheck.annotate.typst_pictures import figure
from calccheck.annotate.typst_text import literal, shown
from calccheck.annotate.typst_working import inline_formula, math_rows
from calccheck.document import Block, Inline
from calccheck.model import Judged
from calccheck.source import Piece, Sheet

_DEEPEST = 8  # lists and quotes nested deeper keep their words but gain no further indent
_LONG_CELL = 900  # characters; a row with such a cell may break across pages, any other stands on one
_LED_UP_TO = ("fence", "math", "table")
_FEW_LINES = 240  # characters of a paragraph that stays with such a block behind it
_ONE_PAGE = 22  # lines of a fence that is not parted by a page's end
_CODE_SIZE, _SMALLEST = 8.2, 6.4  # points
_CODE_ROOM, _ROOM_BESIDE_MARKS = 545.0, 455.0  # points of size times characters that a fence's line has room for


@dataclass(frozen=True, slots=True)
class Setting:
    """What the walk over the page needs at every step.

    ``judged``: the judged claims by entry key. ``levels``: of each heading by its offset, such that none is skipped.
    ``missing``: characters that no font has. ``pictures``: behind blocks, by their offset. ``below``: marks go under the text (in cells). ``deep``: containers around.
    """

    sheet: Sheet
    where: Places
    judged: dict[str, Judged]
    levels: dict[int, int]
    missing: frozenset[str]
    pictures: Mapping[int, Sequence[Shown]] = field(default_factory=dict)
    below: bool = False
    deep: int = 0

    def deeper(self) -> Setting:
        """The setting inside one more container."""
        return replace(self, deep=self.deep + 1)


def typeset(s: Setting, children: Sequence[Block]) -> str:
    """Blocks one behind the other."""
    found = [b for b in children if b.kind in _BLOCKS]
    set_out = ""
    for b, following in zip_longest(found, found[1:]):
        source = _BLOCKS[b.kind](s, b)
        leads_on = b.kind == "paragraph" and following is not None and following.kind in _LED_UP_TO and _is_short(b)
        set_out += (f"#leading-on[{source}]" if leads_on else source) + _pictures(s, b)
    return set_out


def _is_short(b: Block) -> bool:
    return b.span.end - b.span.start < _FEW_LINES


def _pictures(s: Setting, b: Block) -> str:
    found = s.pictures.get(b.span.start)
    return figure(b.span.start, found, s.missing, s.deep) if found else ""


# --- blocks ---------------------------------------------------------------------------------------------------------


def _heading(s: Setting, b: Block) -> str:
    return f"#sheet-heading({s.levels[b.span.start]}, {max(1, min(6, b.level))})[{_inlines(s, b.inlines)}]\n\n"


def _paragraph(s: Setting, b: Block) -> str:
    return f"\n\n{_inlines(s, b.inlines)}\n\n"


def _list(s: Setting, b: Block) -> str:
    if s.deep >= _DEEPEST:
        return typeset(s, b.children)
    items = "".join(f"[{typeset(s.deeper(), item.children)}]," for item in b.children)
    spaced = any(len(item.children) > 1 for item in b.children)
    tight = f"tight: {'false' if spaced else 'true'}"
    return (
        f"\n\n#enum({tight}, start: {b.level}, {items})\n\n"
        if b.info == "ordered"
        else f"\n\n#list({tight}, {items})\n\n"
    )


def _item(s: Setting, b: Block) -> str:
    return typeset(s, b.children)


def _quote(s: Setting, b: Block) -> str:
    if s.deep >= _DEEPEST:
        return typeset(s, b.children)
    return f"\n\n#quoted[{typeset(s.deeper(), b.children)}]\n\n"


def _table(s: Setting, b: Block) -> str:
    inside = replace(s, below=True)
    head, *body = b.children
    columns = len(head.children)
    rows = "".join(f"({''.join(_cell(inside, c) for c in row.children[:columns])})," for row in body)
    heads = "".join(f"[{_inlines(inside, c.inlines)}]," for c in head.children)
    sides = "".join(f"{c.info or 'left'} + top," for c in head.children)
    pieces = (i.text for c in head.children for i in _leaves(c.inlines) if i.text is not None)
    repeat = "false" if marks_in(s.where, pieces) else "true"  # a mark is the target of a link and must stand once
    return f"\n\n#sheet-table({columns}, ({sides}), {repeat}, ({heads}), ({rows}))\n\n"


def _cell(s: Setting, c: Block) -> str:
    content = f"[{_inlines(s, c.inlines)}]"
    if c.span.end - c.span.start > _LONG_CELL:
        return f"table.cell(breakable: true){content},"
    return f"{content},"


def _fence(s: Setting, b: Block) -> str:
    return _working(s, b) if (b.info.split() or [""])[0] == "working" else _listing(s, b)


def _working(s: Setting, b: Block) -> str:
    rows = math_rows(s.sheet, s.where, s.judged, s.missing, b.lines)
    return f"\n\n#working({_whole(b)}, ({rows}))\n\n" if rows else ""


def _listing(s: Setting, b: Block) -> str:
    """Lines as written, numbered as in the sheet, small enough to keep their columns where that is still readable."""
    longest = max((len(line.text) for line in b.lines), default=0)
    room = _ROOM_BESIDE_MARKS if marks_in(s.where, b.lines) else _CODE_ROOM
    size = max(_SMALLEST, min(_CODE_SIZE, room / max(longest, 1)))
    rows = "".join(_line(s, line) for line in b.lines)
    plain = b.info in ("", "circuit")  # the bare word that every circuit bears says nothing
    caption = "none" if plain else f"[{shown(b.info, s.missing)}]"
    return f"\n\n#listing({size:.2f}, {_whole(b)}, {caption}, ({rows}))\n\n" if rows else ""


def _line(s: Setting, line: Piece) -> str:
    found = runs(s.where, line)
    body = "".join(run_source(replace(run, ends=()), shown(run.text, s.missing)) for run in found)
    marks = "".join(mark_source(e) for run in found for e in run.ends)
    to_mend = [e.key for run in found for e in run.ends if e.to_mend]
    return f"({literal(line_number(s.sheet, line))}, [{commented(to_mend, body)}], [{marks}]),"


def _whole(b: Block) -> str:
    """Whether a fence stands on one page: typst's ``true`` for those that surely fit on one."""
    short = len(b.lines) <= _ONE_PAGE and sum(len(line.text) for line in b.lines) <= 80 * _ONE_PAGE
    return "true" if short else "false"


def _rule(s: Setting, b: Block) -> str:
    return "\n\n#line(length: 100%, stroke: hair)\n\n"


def _note(s: Setting, b: Block) -> str:
    label = shown(f"[{b.info}]", s.missing)
    return f"\n\n#sheet-note([{label}], [{typeset(s.deeper(), b.children)}])\n\n"


_BLOCKS: dict[str, Callable[[Setting, Block], str]] = {
    "heading": _heading,
    "paragraph": _paragraph,
    "list": _list,
    "item": _item,
    "quote": _quote,
    "table": _table,
    "fence": _fence,
    "code": _listing,
    "math": _working,
    "html": _listing,
    "rule": _rule,
    "note": _note,
}


# --- inlines --------------------------------------------------------------------------------------------------------


def _leaves(children: Sequence[Inline]) -> Iterator[Inline]:
    for inline in children:
        yield inline
        yield from _leaves(inline.children)


def _inlines(s: Setting, children: Sequence[Inline]) -> str:
    return "".join(_inline(s, i) for i in children)


def _inline(s: Setting, i: Inline) -> str:
    match i.kind:
        case "text":
            return _runs(s, i.text) if i.text else ""
        case "math" if i.text and (set_as_read := inline_formula(s.sheet, s.where, s.judged, i.text)):
            return set_as_read
        case "code" | "math" | "html":
            return f"#code[{_runs(s, i.text)}];" if i.text else ""
        case "emphasis" | "strong" | "strike" if s.deep < _DEEPEST:
            name = {"emphasis": "emph", "strong": "strong", "strike": "strike"}[i.kind]
            return f"#{name}[{_inlines(s.deeper(), i.children)}];"
        case "link" | "image":
            return _link(s, i)
        case "break":
            return "#linebreak();"
        case "softbreak":
            return " "
        case "note":
            return f"#super[{shown(f'[{i.target}]', s.missing)}];"
    return _inlines(s, i.children)


def _link(s: Setting, i: Inline) -> str:
    """A link's words with its address behind them, an image's description with its file's name: paper has no links."""
    words = _inlines(s, i.children) or (_runs(s, i.text) if i.text else "")
    label = f"#address[{shown(' (' + ('image: ' if i.kind == 'image' else '') + i.target + ')', s.missing)}];"
    return words + (label if i.target else "")


def _runs(s: Setting, piece: Piece) -> str:
    found = runs(s.where, piece)
    return "".join(run_source(run, shown(unparted(run.text), s.missing), s.below) for run in found)
