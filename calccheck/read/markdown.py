"""A Markdown page as nested blocks and inlines of our own, every one with its place in the sheet.

CommonMark, pipe tables, strikethrough, YAML front matter, dollar maths and footnotes. With
``markdown_blocks`` and ``markdown_inlines``, which turn its tokens into ours, the only user of markdown-it-py.

The parser's rules stay as they are; what its tokens leave out is noted beside them while it parses: where each block
begins, the lines of display maths, and where links and images end. All other places follow from the tokens' contents.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from functools import cache

from markdown_it import MarkdownIt
from markdown_it.rules_block import StateBlock, paragraph
from markdown_it.rules_inline import StateInline, autolink, image, link

from calccheck.document import Block, Inline
from calccheck.read.markdown_blocks import read_blocks
from calccheck.read.markdown_inlines import DEEPEST, read_inlines
from calccheck.read.places import page_from
from calccheck.source import Piece, Span, whole

_SHEET_LINE = re.compile(r"([^\r\n]*)(?:\r\n?|\n|\Z)")


def read_page(text: str) -> tuple[Block, ...]:
    """The page as a tree; offsets are code points of ``text`` as given (CR LF kept, a byte order mark counted)."""
    front = _front_matter(text)
    page = page_from(text, front.span.end if front else int(text.startswith("\ufeff")))
    parser = _parser(
        "$" in page.text, "[^" in page.text, frozenset(mark for mark in _RULES_OF if mark not in page.text)
    )
    begins: dict[int, int] = {}
    notes: dict[str, object] = {"begins": begins}
    tokens = parser.parse(page.text, notes)

    def cell_inlines(cell: Piece) -> tuple[Inline, ...]:
        return read_inlines(parser.inline.parse(cell.text, parser, notes, []), cell)

    body = read_blocks(tokens, page, begins, cell_inlines)
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


_RULES_OF = {
    "<": ("html_block", "html_inline", "autolink"), "&": ("entity",), "\\": ("escape",), "~~": ("strikethrough",),
    "[": ("link",), "![": ("image",), "]:": ("reference",), ">": ("blockquote",), "|": ("table",),
}  # fmt: skip
"""What without which none of these rules finds anything."""


@cache
def _parser(maths: bool, footnotes: bool, absent: frozenset[str]) -> MarkdownIt:
    """A parser with only the plug-ins and rules that a page needs, because each costs time to import and at every character.

    ``absent``: marks that do not stand in the page.
    """
    parser = MarkdownIt("commonmark", {"maxNesting": DEEPEST + 2}).enable(["table", "strikethrough"])
    parser.disable(["normalize", "text_join", "fragments_join"])  # pages are normalized; runs of text are joined here
    parser.block.ruler.before("table", "begin", _begin)
    parser.inline.ruler.at("link", _noting_end("[", link))
    parser.inline.ruler.at("image", _noting_end("!", image))
    parser.inline.ruler.at("autolink", _as_written)
    if maths:
        from mdit_py_plugins.dollarmath import dollarmath_plugin

        parser.use(dollarmath_plugin, double_inline=True)
        rules = parser.block.ruler
        rules.at("math_block", _noting_lines(rules.getRules()[rules.get_active_rules().index("math_block")]))
    if footnotes:
        from mdit_py_plugins.footnote import footnote_plugin

        parser.use(footnote_plugin, inline=False, move_to_end=False)
    return parser.disable([rule for mark in absent for rule in _RULES_OF[mark]])


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


def _as_written(state: StateInline, silent: bool) -> bool:
    """The rule of links between angle brackets, their text as it stands there, not as it would be shown."""
    start = state.pos
    if state.src[start] != "<" or not autolink(state, silent):
        return False
    if not silent:
        state.tokens[-2].content = state.src[start + 1 : state.pos - 1]
    return True


def _noting_lines(rule: _BlockRule) -> _BlockRule:
    """The rule of display maths, leaving in its token where its lines begin and end.

    Where an opening ``$$`` finds no closing one, no later one will; searching again for each would take minutes.
    """

    def noting(state: StateBlock, first: int, last: int, silent: bool) -> bool:
        begin, end = state.bMarks[first] + state.tShift[first], state.eMarks[first]
        if not state.src.startswith("$$", begin) or state.env.get("no maths before") == last:
            return False
        if not rule(state, first, last, silent):
            if "$$" not in state.src[begin + 2 : end]:
                state.env["no maths before"] = last
            return False
        lines = range(first, state.line)
        state.tokens[-1].meta["lines"] = [(state.bMarks[k] + state.tShift[k], state.eMarks[k]) for k in lines]
        return True

    return noting
