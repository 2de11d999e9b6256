"""A Markdown page as nested blocks and inlines of our own, every one with its place in the sheet.

CommonMark, pipe tables, strikethrough, YAML front matter, dollar maths and footnotes. The only user of markdown-it-py.
The parser's rules stay as they are; what its tokens leave out is noted beside them while it parses: where each block
begins, the lines of display maths, and where links and images end. All other places follow from the tokens' contents.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cache

from markdown_it import MarkdownIt
from markdown_it.rules_block import StateBlock, paragraph
from markdown_it.rules_inline import StateInline, image, link
from markdown_it.token import Token

from calccheck.document import Block, BlockKind, Inline
from calccheck.read import places
from calccheck.read.inlines import DEEPEST, read_inlines
from calccheck.read.places import Page
from calccheck.source import NOWHERE, Piece, Span, whole

_SHEET_LINE = re.compile(r"([^\r\n]*)(?:\r\n?|\n|\Z)")


def read_page(text: str) -> tuple[Block, ...]:
    """The page as a tree; offsets are code points of ``text`` as given (CR LF kept, a byte order mark counted)."""
    front = _front_matter(text)
    page = places.page_from(text, front.span.end if front else int(text.startswith("\ufeff")))
    parser = _parser("$" in page.text, "[^" in page.text)
    begins: dict[int, int] = {}
    notes = {"begins": begins}
    tokens = parser.parse(page.text, notes)

    def cell_inlines(cell: Piece) -> tuple[Inline, ...]:
        return read_inlines(parser.inline.parse(cell.text, parser, notes, []), cell)

    body = _tree(tokens, page, begins, cell_inlines)
    return (front, *body) if front else body


def _front_matter(text: str) -> Block | None:
    """YAML between a first line ``---`` and a line ``---`` or ``...``; without the latter there is none."""
    start = int(text.startswith("\ufeff"))
    found = _SHEET_LINE.finditer(text, start)
    if next(found)[1].rstrip(" \t") != "---":
        return None
    lines: list[Piece] = []
    for line in found:
        if line[1].rstrip(" \t") in ("---", "..."):
            return Block("front matter", Span(start, line.start() + 3), lines=tuple(lines))
        lines.append(whole(line[1].replace("\0", "\ufffd"), line.start()))
    return None


# The parser, and what it notes beside its tokens.

_BlockRule = Callable[[StateBlock, int, int, bool], bool]
_InlineRule = Callable[[StateInline, bool], bool]


@cache
def _parser(maths: bool, footnotes: bool) -> MarkdownIt:
    """A parser with only the plug-ins a page needs, because each costs time to import and at every character."""
    parser = MarkdownIt("commonmark", {"maxNesting": DEEPEST + 2}).enable(["table", "strikethrough"])
    parser.disable(["normalize", "text_join", "fragments_join"])  # pages are normalized; runs of text are joined here
    parser.block.ruler.before("table", "begin", _begin)
    parser.inline.ruler.at("link", _noting_end("[", link))
    parser.inline.ruler.at("image", _noting_end("!", image))
    if maths:
        from mdit_py_plugins.dollarmath import dollarmath_plugin

        parser.use(dollarmath_plugin, double_inline=True)
        rules = parser.block.ruler
        rules.at("math_block", _noting_lines(rules.getRules()[rules.get_active_rules().index("math_block")]))
    if footnotes:
        from mdit_py_plugins.footnote import footnote_plugin

        parser.use(footnote_plugin, inline=False, move_to_end=False)
    return parser


def _begin(state: StateBlock, first: int, last: int, silent: bool) -> bool:
    """Tried before all others wherever a block begins: notes the place by the index of the block's first token.

    Beyond ``DEEPEST`` the parser would drop what follows; here it becomes a paragraph.
    """
    state.env["begins"][len(state.tokens)] = state.bMarks[first] + state.tShift[first]
    return state.level >= DEEPEST and paragraph(state, first, last, silent)


def _noting_end(mark: str, rule: _InlineRule) -> _InlineRule:
    """The rule, leaving in its last token where it ended: the length of a link's address cannot be told from tokens."""

    def noting(state: StateInline, silent: bool) -> bool:
        if state.src[state.pos] != mark or not rule(state, silent):
            return False
        if not silent:
            state.tokens[-1].meta["end"] = state.pos
        return True

    return noting


def _noting_lines(rule: _BlockRule) -> _BlockRule:
    """The rule of display maths, leaving in its token where its lines begin and end."""

    def noting(state: StateBlock, first: int, last: int, silent: bool) -> bool:
        if not rule(state, first, last, silent):
            return False
        if not silent:
            lines = range(first, state.line)
            state.tokens[-1].meta["lines"] = [(state.bMarks[k] + state.tShift[k], state.eMarks[k]) for k in lines]
        return True

    return noting


# Blocks.

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


@dataclass(slots=True)
class _Open:
    """A block whose children are still being read. ``start``: in the page's text; ``row``, ``cells``: of a table's row."""

    kind: BlockKind
    token: Token
    start: int
    children: list[Block] = field(default_factory=list)
    row: Piece = whole("")
    cells: list[Piece] = field(default_factory=list)


def _tree(
    tokens: list[Token], page: Page, begins: dict[int, int], cell_inlines: Callable[[Piece], tuple[Inline, ...]]
) -> tuple[Block, ...]:
    top: list[Block] = []
    stack: list[_Open] = []
    for index, token in enumerate(tokens):
        around = stack[-1] if stack else None
        children = around.children if around else top
        if token.type in _CONTAINERS:
            stack.append(_opened(token, begins.get(index), around, page))
        elif token.type in _CLOSING:
            done = stack.pop()
            siblings = stack[-1].children if stack else top
            siblings.append(_closed(done, page, first=not siblings, cell_inlines=cell_inlines))
        elif token.type == "inline" and around and around.kind == "row":
            around.children.append(_cell(tokens[index - 1], token, around))
        elif token.type == "inline":
            children.append(_words(tokens[index - 1], token, begins[index - 1], page))
        elif token.type in _LEAVES:
            children.append(_LEAVES[token.type](token, begins[index], page))
    return tuple(top)


def _lines(token: Token) -> tuple[int, int]:
    """The first line of a block, and the one behind its last."""
    first, behind = token.map or (0, 1)
    return first, behind


def _opened(token: Token, begin: int | None, around: _Open | None, page: Page) -> _Open:
    first, _ = _lines(token)
    if begin is None and around:  # an item or row: the parser tries no rules for it
        begin = places.behind_indent(page, first) if around.children else around.start
    block = _Open(_CONTAINERS[token.type], token, begin or 0)
    if block.kind == "row":
        block.row = places.trimmed(places.piece(page, first, block.start, places.line_end(page, first)))
        block.cells = places.cells(block.row)
    return block


def _closed(block: _Open, page: Page, first: bool, cell_inlines: Callable[[Piece], tuple[Inline, ...]]) -> Block:
    token, children = block.token, block.children
    line, behind = _lines(token)
    start = block.start + page.shifts[line]
    end = children[-1].span.end if children else start
    match block.kind:
        case "row":
            # the parser drops cells beyond the last column
            spare = [_cell_block(cell, cell_inlines(cell)) for cell in block.cells[len(children) :]]
            return Block("row", _extent(block.row), (*children, *spare), level=int(first))
        case "table":
            return Block("table", places.span_to_line_end(page, block.start, line, behind - 1), tuple(children))
        case "list" if token.type == "ordered_list_open":
            return Block(
                "list", Span(start, end), tuple(children), info="ordered", level=int(token.attrs.get("start", 1))
            )
        case "list":
            return Block("list", Span(start, end), tuple(children), info="bullet")
        case "item":
            return Block("item", Span(start, max(end, start + len(token.info) + 1)), tuple(children))
        case "note":
            label = str(token.meta["label"])
            return Block("note", Span(start, max(end, start + len(f"[^{label}]:"))), tuple(children), info=label)
        case kind:
            return Block(kind, Span(start, max(end, start + 1)), tuple(children))


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
    last_line = page.text[page.starts[behind - 1] : places.line_end(page, behind - 1)]
    closed = len(lines) == behind - first - 2 and last_line.rstrip(" \t").endswith(token.markup)
    span = places.span_to_line_end(page, begin, first, behind - 1)
    return Block("fence", span, lines=lines, info=token.info.strip(), closed=closed)


def _verbatim(token: Token, begin: int, page: Page) -> Block:
    first, behind = _lines(token)
    kind: BlockKind = "html" if token.type == "html_block" else "code"
    span = places.span_to_line_end(page, begin, first, behind - 1)
    return Block(kind, span, lines=places.tails(page, token.content, first))


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
