"""The Markdown parser's block tokens as blocks of our own, with their places."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field

from markdown_it.token import Token

from calccheck.document import Block, BlockKind, Inline
from calccheck.read import places
from calccheck.read.markdown_inlines import read_inlines
from calccheck.read.places import Page
from calccheck.source import NOWHERE, Piece, Span, whole

_CONTAINERS: dict[str, BlockKind] = {
    "blockquote_open": "quote",
    "bullet_list_open": "list",
    "ordered_list_open": "list",
    "list_item_open": "item",
    "footnote_reference_open": "note",
    "table_open": "table",
    "tr_open": "row",
}
_CLOSING = {opening.replace("open", "close") for opening in _CONTAINERS}

_NO_ROW = whole("")


@dataclass(slots=True)
class _Open:
    """A block whose children are still being read. ``start``: in the page's text; ``row``, ``cells``: of a table's row."""

    kind: BlockKind
    token: Token
    start: int
    children: list[Block] = field(default_factory=list)
    row: Piece = _NO_ROW
    cells: list[Piece] = field(default_factory=list)


def read_blocks(
    tokens: Sequence[Token],
    page: Page,
    begins: Mapping[int, int],
    inlines_of: Callable[[Piece], tuple[Inline, ...]],
) -> tuple[Block, ...]:
    """The blocks of a page's tokens.

    ``begins``: where the blocks begin in the page's text, by the index of their first tokens. ``inlines_of`` parses a
    cell that the parser has dropped because it stands beyond the table's last column.
    """
    stack = [_Open("quote", Token("", "", 0), 0)]  # the outermost is the page itself
    for index, token in enumerate(tokens):
        around = stack[-1]
        if token.type in _CONTAINERS:
            stack.append(_opened(token, begins.get(index), around, page))
        elif token.type in _CLOSING:
            stack.pop()
            first = not stack[-1].children
            done = _row(around, first, inlines_of) if around.kind == "row" else _closed(around, page)
            stack[-1].children.append(done)
        elif token.type == "inline" and around.kind == "row":
            around.children.append(_cell(tokens[index - 1], token, around))
        elif token.type == "inline":
            around.children.append(_words(tokens[index - 1], token, begins[index - 1], page))
        elif token.type in _LEAVES:
            around.children.append(_LEAVES[token.type](token, begins[index], page))
    return tuple(stack[0].children)


def _lines(token: Token) -> tuple[int, int]:
    """The first line of a block, and the one behind its last."""
    first, behind = token.map or (0, 1)
    return first, behind


def _opened(token: Token, begin: int | None, around: _Open, page: Page) -> _Open:
    line, _ = _lines(token)
    if begin is None:  # an item or row: the parser tries no rules for it
        begin = places.behind_indent(page, line) if around.children else around.start
    block = _Open(_CONTAINERS[token.type], token, begin)
    if block.kind == "row":
        block.row = places.trimmed(places.piece(page, line, begin, places.line_end(page, line)))
        block.cells = places.cells(block.row)
    return block


def _row(row: _Open, first: bool, inlines_of: Callable[[Piece], tuple[Inline, ...]]) -> Block:
    """A table's row, the first being its head, with the cells beyond the last column: the parser drops them."""
    spare = [_cell_block(cell, inlines_of(cell)) for cell in row.cells[len(row.children) :]]
    return Block("row", _extent(row.row), (*row.children, *spare), level=int(first))


def _closed(block: _Open, page: Page) -> Block:
    token, children = block.token, tuple(block.children)
    line, behind = _lines(token)
    start = block.start + page.shifts[line]

    def upto(mark: int) -> Span:
        return Span(start, children[-1].span.end if children else start + mark)

    match block.kind:
        case "table":
            return Block("table", places.span_to_line_end(page, block.start, line, behind - 1), children)
        case "list" if token.type == "ordered_list_open":
            return Block("list", upto(0), children, info="ordered", level=int(token.attrs.get("start", 1)))
        case "list":
            return Block("list", upto(0), children, info="bullet")
        case "item":
            return Block("item", upto(len(token.info) + 1), children)
        case "note":
            label = str(token.meta["label"])
            return Block("note", upto(len(f"[^{label}]:")), children, info=label)
        case kind:
            return Block(kind, upto(1), children)


def _extent(content: Piece) -> Span:
    return Span(content.at[0], content.at[-1]) if content.at[0] != NOWHERE else content.span()


def _cell(opener: Token, token: Token, row: _Open) -> Block:
    """One of a row's cells; those that a short row lacks stand at its end."""
    column = len(row.children)
    here = len(row.row.text)
    cell = row.cells[column] if column < len(row.cells) else row.row.part(here, here)
    if cell.text != token.content:
        cell = places.nowhere(token.content, row.row.at[-1])
    align = str(opener.attrs.get("style", "")).removeprefix("text-align:")
    return _cell_block(cell, read_inlines(token.children or (), cell), align)


def _cell_block(cell: Piece, inlines: tuple[Inline, ...], align: str = "") -> Block:
    return Block("cell", _extent(cell), inlines=inlines, content=cell, info=align)


def _words(opener: Token, token: Token, begin: int, page: Page) -> Block:
    """A paragraph or heading."""
    first, behind = _lines(token)
    if opener.markup.startswith("#"):
        content = places.heading(page, first, begin + len(opener.markup), token.content)
    else:
        content = places.flow(page, token.content, range(first, behind), begin)
    inlines = read_inlines(token.children or (), content)
    if opener.type == "paragraph_open":
        return Block("paragraph", _extent(content), inlines=inlines, content=content)
    span = places.span_to_line_end(page, begin, first, _lines(opener)[1] - 1)
    return Block("heading", span, inlines=inlines, content=content, level=int(opener.tag[1:]))


def _rule(token: Token, begin: int, page: Page) -> Block:
    first, _ = _lines(token)
    return Block("rule", places.span_to_line_end(page, begin, first, first))


def _fence(token: Token, begin: int, page: Page) -> Block:
    first, behind = _lines(token)
    lines = places.tails(page, token.content, first + 1)
    span = places.span_to_line_end(page, begin, first, behind - 1)
    closed = first + 1 + len(lines) + 1 == behind
    return Block("fence", span, lines=lines, info=token.info.strip(), closed=closed)


def _verbatim(token: Token, begin: int, page: Page) -> Block:
    """Indented code or HTML; blanks before it that no container takes are part of it."""
    first, behind = _lines(token)
    lines = places.tails(page, token.content, first)
    end = places.span_to_line_end(page, begin, first, behind - 1).end
    kind: BlockKind = "html" if token.type == "html_block" else "code"
    return Block(kind, Span(lines[0].span().start, end), lines=lines)


def _maths(token: Token, begin: int, page: Page) -> Block:
    """Display maths; blanks before a line mean nothing there, and a line with only ``$$`` is none of its lines."""
    first, behind = _lines(token)
    starts = [start for start, _ in token.meta["lines"]]
    ends = [end for _, end in token.meta["lines"]]
    starts[0] += len(token.markup)
    ends[-1] = page.text.rfind(token.markup, starts[-1], ends[-1])
    lines = [places.piece(page, first + k, start, end) for k, (start, end) in enumerate(zip(starts, ends, strict=True))]
    if not lines[0].text.strip():
        lines.pop(0)
    if lines and not lines[-1].text.strip():
        lines.pop()
    span = places.span_to_line_end(page, begin, first, behind - 1)
    return Block("math", span, lines=tuple(lines), info=token.info)


_LEAVES: dict[str, Callable[[Token, int, Page], Block]] = {
    "hr": _rule,
    "fence": _fence,
    "code_block": _verbatim,
    "html_block": _verbatim,
    "math_block": _maths,
    "math_block_label": _maths,
}
