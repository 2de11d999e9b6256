"""Markdown pages: where what is read stands. Lines and columns are counted by hand."""

from __future__ import annotations

import pytest
from markdown_pages import check_laws

from calccheck.document import Block, blocks, inlines
from calccheck.read.markdown import read_page
from calccheck.source import NOWHERE, Sheet, Span

CODE = {
    "twice on a line": ("a `x` b `x` c `x`", [("x", 1, 3), ("x", 1, 9), ("x", 1, 15)]),
    "escaped backticks": (r"a \`no\` `y` \\`z`", [("y", 1, 10), ("z", 1, 16)]),
    "doubled backticks": ("``a`b`` and `` `c` ``", [("a`b", 1, 1), ("`c`", 1, 13)]),
    "unmatched run": ("`a``b` `c", [("a``b", 1, 1)]),
    "only backticks": ("` `` ` `b`", [("``", 1, 1), ("b", 1, 8)]),
    "only spaces": ("`  ` `a`", [("  ", 1, 1), ("a", 1, 6)]),
    "lazy lines": ("> - `q1`\n>   text `q2`\nlazy `q3`", [("q1", 1, 5), ("q2", 2, 10), ("q3", 3, 6)]),
    "lists in lists": (
        "1. a `b`\n   - c `d`\n     > e `f` `f`",
        [("b", 1, 6), ("d", 2, 8), ("f", 3, 10), ("f", 3, 14)],
    ),
    "pipes in tables": (
        "| a | b |\n|---|---|\n| `p\\|q` | `p` |\n| x `p` `p` | |",
        [("p|q", 3, 3), ("p", 3, 12), ("p", 4, 5), ("p", 4, 9)],
    ),
    "table without borders": ("> a | b\n> --|--\n> `u` | `u`", [("u", 3, 3), ("u", 3, 9)]),
    "table in a list": ("- a | b\n  --|--\n  `u` | `u`", [("u", 3, 3), ("u", 3, 9)]),
    "table in a note": ("[^1]: a|b\n    -|-\n    `u`|`u`", [("u", 3, 5), ("u", 3, 9)]),
    "paragraphs": ("x\n`a` `a`\n\n- `b`\n", [("a", 2, 1), ("a", 2, 5), ("b", 4, 3)]),
    "tabs": ("-\t`t1`\n\n\t`t2` tab\t`t3`", [("t1", 1, 3), ("t2", 3, 2), ("t3", 3, 11)]),
    "quotes, tabs, list": (">\t>\t- `t1`\nx `t2`", [("t1", 1, 7), ("t2", 2, 3)]),
    "quote and tab": (">\t`t1`\n>\tx `t2`", [("t1", 1, 3), ("t2", 2, 5)]),
    "beyond 16 bits": ("𝐼𝐼 `n𝐼` 😀 `m`", [("n𝐼", 1, 4), ("m", 1, 11)]),
    "across lines": ("a `multi\n   line` b\nc `multi line`", [("multi    line", 1, 3), ("multi line", 3, 3)]),
    "across quoted lines": ("> a `multi\n> line` `b`", [("multi line", 1, 5), ("b", 2, 9)]),
    "across lazy lines": ("> a `multi\nline` `b`", [("multi line", 1, 5), ("b", 2, 7)]),
    "headings": ("# H `a` ##\n\n## `a` #\n\nS `b`\n===", [("a", 1, 5), ("a", 3, 4), ("b", 5, 3)]),
    "heading in a quote": ("> # `a` `a`", [("a", 1, 5), ("a", 1, 9)]),
    "setext over two lines": ("`a`\n`a` b\n---", [("a", 1, 1), ("a", 2, 1)]),
    "links, images, emphasis": (
        '[l `a`](u "t") ![i `a`](u) **b `a`** `a`',
        [("a", 1, 4), ("a", 1, 20), ("a", 1, 32), ("a", 1, 38)],
    ),
    "link title with code": ('[`a`](u "`t`") `b`', [("a", 1, 2), ("b", 1, 16)]),
    "image in a link": ("[![`a`](u) `b`](v) `c`", [("a", 1, 4), ("b", 1, 12), ("c", 1, 20)]),
    "references": ("[`a`]: x\n[`a`]\n\n`a` [t][`a`] ![`a`][]", [("a", 2, 2), ("a", 4, 1), ("a", 4, 16)]),
    "html": ('`a` <b title="`q`"> `a`', [("a", 1, 1), ("a", 1, 21)]),
    "autolink": ("~~`s`~~ *`t`* <http://a.b/`x`> `u`", [("s", 1, 3), ("t", 1, 10), ("u", 1, 32)]),
    "front matter": ("---\nk: v\n---\n`a`", [("a", 4, 1)]),
    "front matter with dots": ("---\nk: `v`\n...\n\n`a`", [("a", 5, 1)]),
    "footnotes": ("t[^1] `a`\n\n[^1]: note `a` x\n    more `a`\n", [("a", 1, 7), ("a", 3, 12), ("a", 4, 10)]),
    "byte order mark": ("\ufeff`a`\n`b`", [("a", 1, 2), ("b", 2, 1)]),
    "byte order mark and front matter": ("\ufeff---\nk: v\n---\n`a`", [("a", 4, 1)]),
    "odd line ends": (
        "a\x0b`b`\x0c`c`\u2028`d`\u0085`e`",
        [("b", 1, 3), ("c", 1, 7), ("d", 1, 11), ("e", 1, 15)],
    ),
    "no-break spaces": ("\u00a0`a`\u3000\n`b`\u00a0", [("a", 1, 2), ("b", 2, 1)]),
    "a line of no-break spaces": ("> \u00a0\n> `b` `b`", [("b", 2, 3), ("b", 2, 7)]),
    "nul": ("`a\0b` `a`", [("a\ufffdb", 1, 1), ("a", 1, 7)]),
    "breaks": ("a `b`  \nc `d`\\\n`e` &amp; `f`", [("b", 1, 3), ("d", 2, 3), ("e", 3, 1), ("f", 3, 11)]),
    "odd tildes": ("x ~~~`a`~~~ `b`", [("a", 1, 6), ("b", 1, 13)]),
    "dollars": ("$`a`$ `b` 3 $ `c`", [("b", 1, 7), ("c", 1, 15)]),
    "spare cell": ("|a|\n|-|\n|`b`|`c`|", [("b", 3, 2), ("c", 3, 6)]),
}
"""By name: a page, and the inline code in it with the line and column where its mark-up begins."""

LINES = {
    "fences": (
        "```calc\nV = 1\n  I = 2\n\nR\n```\n> ~~~\n> x\n>  y\n> ~~~\n",
        [("V = 1", 2, 1), ("  I = 2", 3, 1), ("", 4, 1), ("R", 5, 1), ("x", 8, 3), (" y", 9, 3)],
    ),
    "fence in a list": ("- ```\n  a\n    b\n  ```\n", [("a", 2, 3), ("  b", 3, 3)]),
    "indented fence": ("  ```\n  a\n b\n   c\n  ```", [("a", 2, 3), ("b", 3, 2), (" c", 4, 3)]),
    "fence in a quoted list": ("> 1. ```\n>    a\n>    ```", [("a", 2, 6)]),
    "fenced quote mark": ("> ```\n> >\n> ```", [(">", 2, 3)]),
    "open fence": ("```\na\n\nb", [("a", 2, 1), ("", 3, 1), ("b", 4, 1)]),
    "fence and tabs": ("```\n\ta\n```\n- ```\n\tb\n  ```", [("\ta", 2, 1), ("  b", 5, 2)]),
    "indented code": ("    code\n\ttab\n\n      two\n", [("code", 1, 5), ("tab", 2, 2), ("", 3, 1), ("  two", 4, 5)]),
    "indented code in a list": ("-     a\n\n      b", [("a", 1, 7), ("", 2, 1), ("b", 3, 7)]),
    "cut tab": (">\t\tcode", [("  code", 1, 4)]),
    "html": (
        "<div>\n  a\n</div>\n\n- <!-- x\n  y -->",
        [("<div>", 1, 1), ("  a", 2, 1), ("</div>", 3, 1), ("<!-- x", 5, 3), ("y -->", 6, 3)],
    ),
    "maths": ("$$\na = 1\n  b\n$$", [("a = 1", 2, 1), ("b", 3, 3)]),
    "maths in a quote": ("> $$x\n> y$$", [("x", 1, 5), ("y", 2, 3)]),
    "maths in a list": ("- $$\n  x = 1\n  $$", [("x = 1", 2, 3)]),
    "maths on a line": ("$$ a = 1 $$\n\n$$b$$ (eq)", [(" a = 1 ", 1, 3), ("b", 3, 3)]),
    "maths and dollars": ("$$\na $$ b $$", [("a $$ b ", 2, 1)]),
    "maths behind other dollars": ("    $$\n\n$$a$$ b\n\n$$\nc\n$$", [("$$", 1, 5), ("c", 6, 1)]),
    "maths behind a no-break space": ("$$\n\u00a0b = 1$$", [("\u00a0b = 1", 2, 1)]),
    "front matter": ("---\na: 1\n\nb: 2\n---\nx", [("a: 1", 2, 1), ("", 3, 1), ("b: 2", 4, 1)]),
}
"""By name: a page, and the lines of its blocks that have lines."""

PLACES = {
    "items": (
        "item",
        "- a\n- - b\n    1) c\n> * d",
        [("- a", 1, 1), ("- - b\n    1) c", 2, 1), ("- b\n    1) c", 2, 3), ("1) c", 3, 5), ("* d", 4, 3)],
    ),
    "empty items": ("item", "10)\n\n>-", [("10)", 1, 1), ("-", 3, 2)]),
    "cells": (
        "cell",
        "| h | `k` |\n|--|--|\n|  1 kΩ|  |\n| a \\| b | `c` | extra |\n| s |",
        [
            ("h", 1, 3),
            ("`k`", 1, 7),
            ("1 kΩ", 3, 4),
            ("", 3, 9),
            ("a \\| b", 4, 3),
            ("`c`", 4, 12),
            ("extra", 4, 18),
            ("s", 5, 3),
            ("", 5, 6),
        ],
    ),
    "rows": ("row", "> |a|\n> |-|\n>  | b | \nc", [("|a|", 1, 3), ("| b |", 3, 4)]),
    "table": ("table", "x\n\na|b\n-|-\n1|2  \n\ny", [("a|b\n-|-\n1|2", 3, 1)]),
    "headings": ("heading", "  ## a ##  \n\nb\nc\n---\n#", [("## a ##", 1, 3), ("b\nc\n---", 3, 1), ("#", 6, 1)]),
    "quotes": ("quote", " > a\nb\n\n>", [("> a\nb", 1, 2), (">", 4, 1)]),
    "paragraphs": ("paragraph", "  a\n  b  \n\n- c\n\n  d", [("a\n  b", 1, 3), ("c", 4, 3), ("d", 6, 3)]),
    "fences": ("fence", "- ```x\n  a\n  ```  \n~~~\nb", [("```x\n  a\n  ```", 1, 3), ("~~~\nb", 4, 1)]),
    "code": ("code", "a\n\n      b  \n\n    c\n\n- d\n\n      e", [("  b  \n\n    c", 3, 5), ("e", 9, 7)]),
    "html": ("html", "  <div>\na\n\n- <b>", [("  <div>\na", 1, 1), ("<b>", 4, 3)]),
    "rules": ("rule", "- ***\n\n * * *  ", [("***", 1, 3), ("* * *", 3, 2)]),
    "notes": ("note", "> [^a]: b\n\n[^c]:\n", [("[^a]: b", 1, 3), ("[^c]:", 3, 1)]),
    "lists": ("list", "1. a\n2. b\n\n- c", [("1. a\n2. b", 1, 1), ("- c", 4, 1)]),
    "front matter": ("front matter", "\ufeff---\na: 1\n---  \nb", [("---\na: 1\n---", 1, 2)]),
}
"""By name: a kind of block, a page, and the blocks of that kind as they stand in the page."""

INLINES = {
    "emphasis": ("emphasis", "a *b* ***c***", [("*b*", 1, 3), ("***c***", 1, 7)]),
    "strong": ("strong", "***c*** __d__", [("**c**", 1, 2), ("__d__", 1, 9)]),
    "strike": ("strike", "~~a~~ ~~~b~~~", [("~~a~~", 1, 1), ("~~b~~", 1, 8)]),
    "links": (
        "link",
        '[a](u "t (x)") [b][r] [r] <http://a>\n\n[r]: v',
        [('[a](u "t (x)")', 1, 1), ("[b][r]", 1, 16), ("[r]", 1, 23), ("<http://a>", 1, 27)],
    ),
    "images": ("image", "x ![a [b](u)](v) ![](w)", [("![a [b](u)](v)", 1, 3), ("![](w)", 1, 18)]),
    "maths": ("math", "$I_{R2} = 3$ and $a$ $$b$$", [("$I_{R2} = 3$", 1, 1), ("$a$", 1, 18), ("$$b$$", 1, 22)]),
    "notes": ("note", "a[^1] [^2]\n\n[^1]: b", [("[^1]", 1, 2)]),
    "html": ("html", "a <b\nc> <!-- d -->", [("<b\nc>", 1, 3), ("<!-- d -->", 2, 4)]),
    "breaks": ("break", "a  \n  b\\\nc", [("  \n  ", 1, 2), ("\\\n", 2, 4)]),
    "soft breaks": ("softbreak", "> a \n> b\nc", [(" \n> ", 1, 4), ("\n", 2, 4)]),
    "text": ("text", "\\*a &amp; b\\c*d*\ne", [("\\*a &amp; b\\c", 1, 1), ("d", 1, 15), ("e", 2, 1)]),
}
"""By name: a kind of inline, a page, and the inlines of that kind as they stand in the page."""


def with_line_end(page: str, end: str) -> str:
    return page.replace("\n", end)


LINE_ENDS = pytest.mark.parametrize("end", ["\n", "\r\n", "\r"], ids=["LF", "CRLF", "CR"])


@LINE_ENDS
@pytest.mark.parametrize("page, expected", CODE.values(), ids=CODE)
def test_code_stands_where_it_is_written(page, expected, end):
    sheet = Sheet("x", with_line_end(page, end))
    tree = read_page(sheet.text)
    check_laws(sheet.text, tree)
    found = [inline for block in blocks(tree) for inline in inlines(block.inlines) if inline.kind == "code"]
    assert [(inline.text.text, *sheet.line_column(inline.span.start)) for inline in found] == expected


@LINE_ENDS
@pytest.mark.parametrize("page, expected", LINES.values(), ids=LINES)
def test_lines_stand_where_they_are_written(page, expected, end):
    sheet = Sheet("x", with_line_end(page, end))
    tree = read_page(sheet.text)
    check_laws(sheet.text, tree)
    found = [line for block in blocks(tree) for line in block.lines]
    assert [(line.text, *sheet.line_column(line.span().start)) for line in found] == expected


@LINE_ENDS
@pytest.mark.parametrize("kind, page, expected", PLACES.values(), ids=PLACES)
def test_blocks_reach_from_their_mark_to_their_end(kind, page, expected, end):
    sheet = Sheet("x", with_line_end(page, end))
    tree = read_page(sheet.text)
    check_laws(sheet.text, tree)
    spans = [block.span for block in blocks(tree) if block.kind == kind]
    assert [written(sheet, span) for span in spans] == [(with_line_end(text, end), *at) for text, *at in expected]


@LINE_ENDS
@pytest.mark.parametrize("kind, page, expected", INLINES.values(), ids=INLINES)
def test_inlines_reach_over_their_markup(kind, page, expected, end):
    sheet = Sheet("x", with_line_end(page, end))
    tree = read_page(sheet.text)
    check_laws(sheet.text, tree)
    spans = [inline.span for block in blocks(tree) for inline in inlines(block.inlines) if inline.kind == kind]
    assert [written(sheet, span) for span in spans] == [(with_line_end(text, end), *at) for text, *at in expected]


def written(sheet: Sheet, span: Span) -> tuple[str, int, int]:
    return sheet.text[span.start : span.end], *sheet.line_column(span.start)


def test_blocks_know_what_their_marks_say():
    page = "3. a\n\n- b\n\n``` calc x \n```\n\n## c\n\n|d|\n|:-:|\n|e|\n\n~~~\n"
    tree = list(blocks(read_page(page)))

    def only(kind: str) -> list[Block]:
        return [block for block in tree if block.kind == kind]

    assert [(block.info, block.level) for block in only("list")] == [("ordered", 3), ("bullet", 0)]
    assert [(block.info, block.closed) for block in only("fence")] == [("calc x", True), ("", False)]
    assert [block.level for block in only("heading")] == [2]
    assert [block.level for block in only("row")] == [1, 0]
    assert [block.info for block in only("cell")] == ["center", "center"]


def test_escapes_stand_where_they_begin():
    (paragraph,) = read_page("a\\*b &amp; c&NotEqualTilde;")
    (text,) = paragraph.inlines
    assert text.text.text == "a*b & c≂̸"
    assert list(text.text.at) == [0, 1, 3, 4, 5, 10, 11, 12, NOWHERE, 27]


def test_content_is_the_source_of_the_inlines():
    (quote,) = read_page("> a `b`\r\n>   c &lt;\r\nd ")
    (paragraph,) = quote.children
    assert paragraph.content.text == "a `b`\n  c &lt;\nd"
    assert list(paragraph.content.at) == [2, 3, 4, 5, 6, NOWHERE, *range(11, 19), NOWHERE, 21, 22]
    (heading,) = read_page("# # #")
    assert (heading.content.text, list(heading.content.at)) == ("#", [2, 3])


def test_spaces_of_a_tab_cut_in_two_stand_nowhere():
    (quote,) = read_page(">\t\t  a")
    (line,) = quote.children[0].lines
    assert (line.text, list(line.at)) == ("    a", [NOWHERE, NOWHERE, 3, 4, 5, 6])


@pytest.mark.parametrize("page", ["```\na\n``` \t\n", "> ```\n> a\n> ````", "- ~~~\n  ~~~"])
def test_closed_fences(page):
    assert [block.closed for block in blocks(read_page(page)) if block.kind == "fence"] == [True]


@pytest.mark.parametrize(
    "page", ["```\na", "> ```\n> a\n>", "```\na\n~~~", "```\na ```", "- ```\n  a\n\nb", "````\n```"]
)
def test_open_fences(page):
    assert [block.closed for block in blocks(read_page(page)) if block.kind == "fence"] == [False]
