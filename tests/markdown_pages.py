"""Markdown pages for tests: an outline to compare a tree with, the laws every tree obeys, and random nasty pages."""

from __future__ import annotations

import re
from collections.abc import Iterator

from hypothesis import strategies as st

from calccheck.document import Block, Inline, blocks, inlines
from calccheck.source import NOWHERE, Piece, Span

WORD = re.compile(r"w\d{3}")


def outline(tree: tuple[Block, ...]) -> str:
    """The tree on one line: ``kind attribute[children, inlines or lines]``, lines parted by ``/``."""
    return " ".join(_block(block) for block in tree)


def _block(block: Block) -> str:
    level = str(block.level) if block.level and block.kind != "row" else ""
    head = " ".join(
        filter(None, (block.kind, block.info, level, "head" if block.kind == "row" and block.level else ""))
    )
    inside = outline(block.children) + "".join(map(_inline, block.inlines)) + "/".join(p.text for p in block.lines)
    return f"{head}[{inside}]" if block.closed else f"{head} unclosed[{inside}]"


def _inline(inline: Inline) -> str:
    if inline.kind == "text" and inline.text:
        return inline.text.text
    inside = "".join(map(_inline, inline.children)) + (inline.text.text if inline.text else "")
    return " ".join(filter(None, (inline.kind, inline.target))) + f"[{inside}]"


def pieces(tree: tuple[Block, ...]) -> Iterator[tuple[Piece, bool]]:
    """Every piece of a tree, and whether escapes and entities are resolved in it."""
    for block in blocks(tree):
        for piece in (*block.lines, *([block.content] if block.content else [])):
            yield piece, False
        for inline in inlines(block.inlines):
            if inline.text:
                yield inline.text, inline.kind == "text"


def check_laws(source: str, tree: tuple[Block, ...]) -> None:
    """What holds for every page: see each function."""
    for piece, resolved in pieces(tree):
        check_characters(source, piece, resolved)
    check_spans(source, tree, Span(0, len(source)))
    for block in blocks(tree):
        if block.kind == "fence":
            check_fence(source, block)
        check_inline_spans(source, block.inlines, block.span)
        if block.content:
            check_covered(block.content, block.inlines)
        for inline in inlines(block.inlines):
            if inline.kind == "code":
                check_code(source, inline)


def check_characters(source: str, piece: Piece, resolved: bool) -> None:
    """A placed character is the sheet's; placed ones follow one another; what stands nowhere is a joint, a cut tab
    or the second character of an entity.
    """
    assert len(piece.at) == len(piece.text) + 1
    last = -1
    for character, offset in zip(piece.text, piece.at, strict=False):
        if offset == NOWHERE:
            assert character in " \n" or (resolved and last >= 0 and source[last] == "&")
            continue
        own = source[offset].replace("\0", "\ufffd")
        assert own == character or (resolved and own in "\\&"), (piece, character, offset)
        assert last < offset
        last = offset
    assert last < piece.at[-1] <= len(source)
    for word in WORD.finditer(piece.text):  # each stands once in the page, so there is one right place
        assert piece.at[word.start()] == source.index(word.group())


MARKS = {"quote": ">", "item": "-+*0123456789", "fence": "`~", "rule": "*-_", "note": "[", "math": "$"}


def check_spans(source: str, tree: tuple[Block, ...], around: Span) -> None:
    """Blocks stand inside the block around them, one behind the other, from their mark to the end of a line."""
    here = around.start
    for block in tree:
        assert here <= block.span.start <= block.span.end <= around.end, block
        here = block.span.end
        assert source[block.span.start] in MARKS[block.kind] if block.kind in MARKS else True, block
        if block.kind not in ("quote", "list", "item", "note", "cell"):
            rest = re.match(r"[^\r\n]*", source[block.span.end :])
            assert rest and not rest.group().strip(), block
        check_spans(source, block.children, block.span)


def check_inline_spans(source: str, children: tuple[Inline, ...], around: Span) -> None:
    """Inlines stand inside what is around them, one behind the other, their text inside them; none is empty, but for a
    line's break right behind an image's opening bracket.
    """
    here = around.start
    for inline in children:
        assert here <= inline.span.start <= inline.span.end <= around.end, inline
        assert inline.span.start < inline.span.end or inline.kind in ("softbreak", "break"), inline
        here = inline.span.end
        check_inline_spans(source, inline.children, inline.span)
        if inline.text:
            text = inline.text.span()
            assert inline.span.start <= text.start <= text.end <= inline.span.end


def check_covered(content: Piece, children: tuple[Inline, ...]) -> None:
    """The outermost inlines cover all of a content but blanks: nothing written is lost."""
    covered = {offset for inline in children for offset in range(inline.span.start, inline.span.end)}
    missing = [c for c, offset in zip(content.text, content.at, strict=False) if offset not in covered | {NOWHERE}]
    assert not "".join(missing).strip(), (content.text, children)


def check_fence(source: str, block: Block) -> None:
    """A closed fence ends with a run at least as long as the one it begins with, on a line of its own."""
    written = source[block.span.start : block.span.end]
    opening = re.match("`+|~+", written)
    lines = re.split(r"\r\n?|\n", written)
    assert opening
    assert not block.closed or (len(lines) > 1 and lines[-1].endswith(opening.group()))


def check_code(source: str, inline: Inline) -> None:
    """Between equal runs of backticks, of which neither is part of a longer one, stands the code (CommonMark 6.1)."""
    written = source[inline.span.start : inline.span.end]
    ticks = re.match("`+", written)
    assert ticks and inline.text
    run = ticks.group()
    assert written.endswith(run) and written[-len(run) - 1] != "`"
    before, behind = source[: inline.span.start], source[inline.span.end :]
    assert not behind.startswith("`") and (not before.endswith("`") or re.search(r"\\`$", before))
    inside = written[len(run) : -len(run)]
    if not re.search(r"[\r\n]", inside):
        bare = inside.replace("\0", "\ufffd")
        if bare.strip(" ") and bare[0] == bare[-1] == " ":
            bare = bare[1:-1]
        assert inline.text.text in (bare, bare.replace("\\|", "|"))


def check_words(source: str, tree: tuple[Block, ...]) -> None:
    """Every word of the page stands in a block's content or lines, or behind a fence's opening mark (random pages have
    none in addresses).
    """
    infos = "".join(block.info for block in blocks(tree))
    placed = {
        offset
        for block in blocks(tree)
        for piece in (*block.lines, *([block.content] if block.content else []))
        for offset in piece.at[:-1]
    }
    for word in WORD.finditer(source):
        assert word.start() in placed or word.group() in infos, word.group()


# Random pages: lines made of marks that mean something, and numbered words that stand only once.

# fmt: off
ATOMS = [
    "§", "§ ", " ", "`§`", "`§`", "``§`§``", "`` `§` ``", "`§\\|§`", "`§|§`", "`", "``", "`` ` ``", "\\`", "\\\\", "\\|",
    "*§*", "**§ `§` §**", "*", "**", "_", "~~`§`~~", "~~~", "~~", "[§ `§`](u)", "![§ `§`](u)", "[", "]", "](u)", "![",
    "<http://a/`>", "<b>", "<i title='`'>", "<!-- § -->", "<", "&amp;", "&NotEqualTilde;", "&#0;", "&", "\\a", "\\*",
    "$§$", "$`§`$", "$$§$$", "$", "[^1]", "[^2]", "^[§]", "|", " | ", "#", " :", "-", "=", "1 kΩ", "𝐼", "\0", "\t", "  ",
    "\u00a0", "\u3000", "\u2028", "\x0b", "\x1c", "\x85", "\ufeff", "[`r`]", "µ∥", "§ = §",
]
PREFIXES = [
    "", "", "", "> ", ">", ">\t", "- ", "-\t", "1. ", "10) ", "  ", "   ", "    ", "\t", " \t", "# ", "### ", "[^1]: ",
]
LINES = [
    "", "", "---", "===", "|--|--|", "| - | :-: |", "--|--", "```", "~~~", "``` x", "$$", "$$ § $$", "> ```", "- ```", "  ```",
    "> $$", "- $$", "[`r`]: x", "<div>", "<!--", "-->", "> |-|-|", "\u00a0", "> \u00a0", "***", "...", "-", ">",
]
# fmt: on

_line = st.tuples(
    st.lists(st.sampled_from(PREFIXES), max_size=3).map("".join),
    st.lists(st.sampled_from(ATOMS), max_size=7).map("".join),
).map("".join)


@st.composite
def _table(draw: st.DrawFn) -> str:
    """A table's lines, some rows short, some long, some without outer borders."""
    prefix = draw(st.sampled_from(["", "", "> ", "- ", "1. ", "> - ", "[^1]: "]))
    columns = draw(st.integers(1, 3))
    rows = draw(st.lists(st.lists(st.sampled_from(ATOMS), min_size=1, max_size=4), max_size=3))
    head = draw(st.lists(st.sampled_from(ATOMS), min_size=columns, max_size=columns))
    borders = draw(st.sampled_from(["|{}|", "| {} |", "{}|", "|{}", "{}"]))
    lines = [borders.format(" | ".join(row)) for row in (head, ["-"] * columns, *rows)]
    behind = "".join(">" if mark == ">" else " " for mark in prefix)
    return prefix + f"\n{behind}".join(lines)


def numbered(page: str) -> str:
    """The page with its words numbered, so that each stands once."""
    parts = page.split("§")
    return parts[0] + "".join(f"w{number:03d}{part}" for number, part in enumerate(parts[1:]))


def pages() -> st.SearchStrategy[str]:
    """Random pages with one kind of line end each."""
    lines = st.lists(st.one_of(_line, _line, st.sampled_from(LINES), _table()), min_size=1, max_size=9)
    return st.builds(
        lambda start, lines, end: numbered((start + "\n".join(lines)).replace("\n", end)),
        st.sampled_from(["", "", "", "\ufeff", "---\na: §\n---\n"]),
        lines,
        st.sampled_from(["\n", "\n", "\r\n", "\r"]),
    )
