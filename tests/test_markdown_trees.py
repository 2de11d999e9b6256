"""Markdown pages as trees, against the rules of CommonMark 0.31.2 and, for tables and strikethrough, of GitHub Flavored
Markdown 0.29 (sections named, the examples our own), against the parser alone, and against laws over random pages.
"""

from __future__ import annotations

import re
import subprocess
import sys
import time

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from markdown_pages import check_laws, check_words, outline, pages
from markdown_plain import plain_outline, same_outline

from calccheck.document import blocks, inlines
from calccheck.read.markdown import read_page

OUTLINES = {
    # 2.2 tabs, 2.4 escapes, 2.5 entities
    "\tcode\n": "code[code]",
    "- a\n\n\tb": "list bullet[item[paragraph[a] paragraph[b]]]",
    "\\*a\\* \\q": "paragraph[*a* \\q]",
    "`\\*`": "paragraph[code[\\*]]",
    "&amp; &copy; &#35; &#x22; &nope;": 'paragraph[& © # " &nope;]',
    "&#42;a&#42;": "paragraph[*a*]",
    "`&amp;`": "paragraph[code[&amp;]]",
    "&#0;": "paragraph[\ufffd]",
    # 4.1 thematic breaks, 4.2 and 4.3 headings
    "***\n- - -\n__": "rule[] rule[] paragraph[__]",
    "a\n***\nb": "paragraph[a] rule[] paragraph[b]",
    "# a\n####### b\n#c": "heading 1[a] paragraph[####### bsoftbreak[]#c]",
    "## a ## b ##\n### c#": "heading 2[a ## b] heading 3[c#]",
    "## \n#\n### ###": "heading 2[] heading 1[] heading 3[]",
    "a *b\nc*\n====": "heading 1[a emphasis[bsoftbreak[]c]]",
    "> a\n---": "quote[paragraph[a]] rule[]",
    "- a\n---": "list bullet[item[paragraph[a]]] rule[]",
    "`a\n----\nb`": "heading 2[`a] paragraph[b`]",
    # 4.4 indented code, 4.5 fences
    "    a\n      b\n\n    c\nd": "code[a/  b//c] paragraph[d]",
    "a\n    b": "paragraph[asoftbreak[]b]",
    "```\na\n~~~\n```": "fence[a/~~~]",
    "````\na\n```\n``````": "fence[a/```]",
    "``` x y\na": "fence x y unclosed[a]",
    "> ```\n> a\nb": "quote[fence unclosed[a]] paragraph[b]",
    "```\n```\n\n```\n": "fence[] fence unclosed[]",
    "``` a`b\n```": "paragraph[``` a`b] fence unclosed[]",
    # 4.6 HTML, 4.7 references, 4.8 paragraphs
    "<div>\n*a*\n\n*b*": "html[<div>/*a*] paragraph[emphasis[b]]",
    "<!-- a\n\nb -->\nc": "html[<!-- a//b -->] paragraph[c]",
    "a\n<b>": "paragraph[asoftbreak[]html[<b>]]",
    "[a]: /u 't'\n\n[a] [A] [c]": "paragraph[link /u[a] link /u[A] [c]]",
    "[a]: /u\n[b]: /v\n[a][b]": "paragraph[link /v[a]]",
    "a\n[b]: /u\n\n[b]": "paragraph[asoftbreak[][b]: /u] paragraph[[b]]",
    "  a\n     b\n\n c": "paragraph[asoftbreak[]b] paragraph[c]",
    # 5.1 quotes, 5.2 items, 5.3 lists
    "> # a\nb": "quote[heading 1[a]] paragraph[b]",
    "> a\nb\n> c": "quote[paragraph[asoftbreak[]bsoftbreak[]c]]",
    ">> a\nb": "quote[quote[paragraph[asoftbreak[]b]]]",
    "> a\n\n> b": "quote[paragraph[a]] quote[paragraph[b]]",
    "1.  a\n\n    b\n  c": "list ordered 1[item[paragraph[a] paragraph[bsoftbreak[]c]]]",
    "-\n\n  a": "list bullet[item[]] paragraph[a]",
    "- a\n-\n- c": "list bullet[item[paragraph[a]] item[] item[paragraph[c]]]",
    "- a\n* b\n1. c\n1) d": "list bullet[item[paragraph[a]]] list bullet[item[paragraph[b]]] "
    "list ordered 1[item[paragraph[c]]] list ordered 1[item[paragraph[d]]]",
    "7. a\n3. b": "list ordered 7[item[paragraph[a]] item[paragraph[b]]]",
    "a\n14. b\n1. c": "paragraph[asoftbreak[]14. b] list ordered 1[item[paragraph[c]]]",
    "1234567890. a": "paragraph[1234567890. a]",
    "- a\n - b\n  - c\n   - d\n    - e": "list bullet[item[paragraph[a]] item[paragraph[b]] item[paragraph[c]] "
    "item[paragraph[dsoftbreak[]- e]]]",
    "- - 2. a": "list bullet[item[list bullet[item[list ordered 2[item[paragraph[a]]]]]]]",
    # 6.1 code, 6.2 emphasis
    "`` a ` b `` `c` `  `": "paragraph[code[a ` b] code[c] code[  ]]",
    "`a\\`b`": "paragraph[code[a\\]b`]",
    "*a **b** c* a_b_c __d__": "paragraph[emphasis[a strong[b] c] a_b_c strong[d]]",
    "***a** b* **a *b***": "paragraph[emphasis[strong[a] b] strong[a emphasis[b]]]",
    "*a `*` b* * c *": "paragraph[emphasis[a code[*] b] * c *]",
    "**a*": "paragraph[*emphasis[a]]",
    # 6.3 links, 6.4 images, 6.5 autolinks, 6.6 HTML, 6.7 and 6.8 breaks
    "[a *b*](</u v> (t)) [c](": "paragraph[link /u%20v[a emphasis[b]] [c](]",
    "[a [b](u)](v)": "paragraph[[a link u[b]](v)]",
    "*[a*](u)": "paragraph[*link u[a*]]",
    "![a ![b](u)](v) !a": "paragraph[image v[a image u[b]] !a]",
    "<https://a.b?c=d> <a@b.c> <d>": "paragraph[link https://a.b?c=d[https://a.b?c=d] link mailto:a@b.c[a@b.c] html[<d>]]",
    "a  \nb\\\n  c\nd  ": "paragraph[abreak[]bbreak[]csoftbreak[]d]",
    # tables and strikethrough (GFM 4.10, 6.5)
    "|a|b|\n|:-|-:|\n|c\\|d|": "table[row head[cell left[a] cell right[b]] row[cell left[c|d] cell right[]]]",
    "a | `b\\|c`\n:-: | -\n\nd": "table[row head[cell center[a] cell[code[b|c]]]] paragraph[d]",
    "|a|\n|-|\nb\n> c": "table[row head[cell[a]] row[cell[b]]] quote[paragraph[c]]",
    "|a|b|\n|-|\n": "paragraph[|a|b|softbreak[]|-|]",
    "~~a *b*~~ ~c~": "paragraph[strike[a emphasis[b]] ~c~]",
    # footnotes, maths, front matter
    "a[^x] [^y]\n\n[^x]: b\n\n    c": "paragraph[anote x[] [^y]] note x[paragraph[b] paragraph[c]]",
    "[^x]: unused": "note x[paragraph[unused]]",
    "a $b$ \\$c$\n\n$$\nd\n$$": "paragraph[a math[b] $c$] math[d]",
    "a $$b$$ c": "paragraph[a math[b] c]",
    "---\na: 1\n---\n---\nb": "front matter[a: 1] rule[] paragraph[b]",
    "---\na: 1\n\nb": "rule[] paragraph[a: 1] paragraph[b]",
    "---\n---": "front matter[]",
    "--- a\n---": "heading 2[--- a]",
    "\n---\na\n---": "rule[] heading 2[a]",
    "": "",
    "\ufeff": "",
    "\ufeff# a": "heading 1[a]",
    " \n\t": "",
}
"""Pages and their outlines."""


@pytest.mark.parametrize("page", OUTLINES)
def test_outline(page):
    tree = read_page(page)
    check_laws(page, tree)
    assert outline(tree) == OUTLINES[page]


@given(pages())
@settings(max_examples=250, deadline=None)
def test_every_page_obeys_the_laws(page):
    tree = read_page(page)
    check_laws(page, tree)
    check_words(page, tree)


@given(pages())
@settings(max_examples=150, deadline=None)
def test_the_tree_is_what_the_parser_alone_makes_of_the_page(page):
    # no front matter, which is ours; no blanks before dollars: the parser then loses characters before the closing ones
    body = "\n" + re.sub("[\u00a0\u3000\u2028\x0b\x1c\x85].*[$][$]", "", page)
    assert same_outline(read_page(body)) == plain_outline(body)


@given(st.text(alphabet="`*_[]()!<>&;\\|-+=#~$^:'\"/ \t\n\r0a\0", max_size=60))
@settings(max_examples=250, deadline=None)
def test_any_text_obeys_the_laws(page):
    check_laws(page, read_page(page))


DEEP = {
    "quotes": "> " * 10_000 + "`a`",
    "lists": "- " * 10_000 + "`a`",
    "lists over lines": "".join("  " * depth + "- b\n" for depth in range(200)) + "  " * 200 + "`a`",
    "notes": "[^1]: " * 5_000 + "`a`",
    "emphasis": "*a " * 10_000 + "`a`" + " b*" * 10_000,
    "stars": "*" * 10_000 + "`a`" + "*" * 10_000,
    "links": "[" * 10_000 + "`a`" + "](u)" * 10_000,
    "images": "![" * 10_000 + "`a`" + "](u)" * 10_000,
    "strikes": "b " + "~~" * 10_000 + "`a`" + "~~" * 10_000,
    "open brackets": "[" * 10_000 + "`a`",
    "open maths": "$$a\n\n" * 10_000 + "`a`",
    "rows": "|b|c|\n|-|-|\n" + "|d|e|\n" * 10_000 + "|`a`|",
    "a line of 10 MB": "word word " * 1_000_000 + "`a`",
}


@pytest.mark.parametrize("page", DEEP.values(), ids=DEEP)
@pytest.mark.undisturbed
def test_deep_and_long_pages_are_read_in_seconds_and_nothing_is_lost(page):
    begin = time.process_time()  # other work on the machine is not counted
    tree = read_page(page)
    assert time.process_time() - begin < 10
    found = [inline for block in blocks(tree) for inline in inlines(block.inlines) if inline.kind == "code"]
    assert [inline.text.text for inline in found] == ["a"]
    assert page[found[0].span.start : found[0].span.end] == "`a`"


def test_deeper_marks_are_passed_over_but_their_text_is_not():
    page = "".join(f"*a{depth} " for depth in range(100)) + "b" + "*" * 100
    texts = [inline.text.text for inline in inlines(read_page(page)[0].inlines) if inline.kind == "text"]
    assert "".join(texts).split() == [f"a{depth}" for depth in range(100)] + ["b"]


def test_plugins_are_imported_only_for_pages_that_need_them():
    script = """
import sys
from calccheck.read.markdown import read_page
for page in ("a `b`", "$c$", "[^d]"):
    read_page(page)
    print(*sorted(name for name in sys.modules if name in ("mdit_py_plugins.dollarmath", "mdit_py_plugins.footnote")))
"""
    run = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True)
    maths, footnotes = "mdit_py_plugins.dollarmath", "mdit_py_plugins.footnote"
    assert run.stdout.split("\n") == ["", maths, f"{maths} {footnotes}", ""]
