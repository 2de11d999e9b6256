"""Marks put into sheets and taken out again: nothing of the author's is ever lost, and marking twice is marking once."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from markdown_it import MarkdownIt
from mdit_py_plugins.footnote import footnote_plugin
from mdit_py_plugins.front_matter import front_matter_plugin

from calccheck import check_text
from calccheck.annotate.to_markdown import escaped, to_markdown
from calccheck.edits import Edit, put_in, stray, unmark
from calccheck.model import Settings
from calccheck.read.sheet import read_sheet
from calccheck.source import Sheet

SHEETS = sorted(Path(__file__).parents[1].glob("sheets/**/*.md"))
CIRCUIT = "```circuit\nreference g\nV1: 10 V, a to g\nR1: 1 kΩ, a to b\nR2: 3 kΩ, b to g\n```\n"
LIST = "<!-- calccheck marks, written by the program; `calccheck mark --remove` takes them out -->"
END = "<!-- calccheck marks end here 0123456789abcdef -->"

# what a text may hold that looks like a mark, stands at the edge of one, or breaks lines in an unusual way
NASTY = [
    "  # ", "#", " ", "\t", "\n", "\r\n", "\r", "\n\n", "\v", "\f", "\u0085", "\u2028", "\ufeff", "\u202e", "\x1b[31m",
    "[^calccheck-1]", "[^calccheck-1m]", "[^calccheck2-1]", "[^calccheck-1]: mine\n", "[^1]", "[^1]: note\n",
    "  # ✓ agrees (calccheck-abcdef)", " (calccheck-abcdef)", "\n\nAbove: [^calccheck-1m]", "<!---->", "(", "[", "](x)",
    LIST, END, "calccheck", "-", "> ", "- ", "1. ", "|", "\\", "`", "```\n", "~~~\n", "$$", "$", "<!--", "-->", "**", "&amp;",
]  # fmt: skip
CLAIMS = [
    "`V_b = 7.5 V`", "`V_b = 7.6 V`", "`I_R1 = 2.5 mA` ", "[`V_b = 7.5 V`](x)", "**V_b = 7.5 V**", "V_b = 7.5 V", "&Omega;",
    "`given x = 3 V`", "`V_b ≤ 8 V`", "`V_c = 1 V`", "$V_b = 7.5$", "\n\n$$\nV_b = 7.5\n$$\n", "\n> `V_b = 7.5 V`\n",
    "\n| | value |\n|-|-|\n| `V_b` | 7.5 V |\n| `I_R1` | 2.6 mA |\n",
    "\n```working\nV_b = V1 × R2 / (R1 + R2)  # mine\n    = 10 V × 3/4 = 7.6 V\n```\n", "\n- a\n\n  ```working\n  V_b = 7.5 V\n  ```\n",
    "`V_b = 7.7 V` <!-- calccheck: accept 7.7 V for 7.5 V \"measured\" by QD -->",
]  # fmt: skip
texts = st.lists(st.sampled_from(NASTY) | st.text(max_size=4), max_size=12).map("".join)
bodies = st.lists(st.sampled_from(CLAIMS) | st.sampled_from(NASTY) | st.text(max_size=3), max_size=10).map("".join)
words = st.lists(st.sampled_from(["✓ agrees", "#", "(calccheck-abcdef)", LIST, "x"]), min_size=1, max_size=3).map(
    " ".join
)
edits = st.lists(
    st.builds(Edit, st.integers(0, 60), words, st.sampled_from(["note", "comment", "below"])), max_size=5
)  # fmt: skip


def marked(text: str) -> str:
    return to_markdown(check_text("a.md", text))


# --- laws -----------------------------------------------------------------------------------------------------------


@settings(max_examples=1500, deadline=None)
@given(texts, edits, st.lists(words.map("- {}".format), max_size=2))
def test_what_is_put_in_anywhere_in_any_text_comes_out_again(text, wanted, closing):
    text = unmark(text)
    placed = [Edit(min(e.at, len(text)), e.words, e.form) for e in wanted]
    result = put_in(text, placed, closing)
    assert (result == text) == (not placed and not closing)
    assert unmark(result) == text


@settings(max_examples=250, deadline=None)
@given(bodies, st.sampled_from(["\n", "\r\n"]), st.sampled_from(["", "\ufeff"]))
def test_marking_any_sheet_loses_nothing_and_twice_is_once(body, end, start):
    text = start + (CIRCUIT + body).replace("\r\n", "\n").replace("\n", end)
    once = marked(text)
    assert once != text
    assert unmark(once) == text
    assert marked(once) == once


@settings(max_examples=500, deadline=None)
@given(texts)
def test_a_text_is_touched_only_if_it_ends_in_a_list_of_marks(text):
    if not text.rstrip().endswith("-->"):
        assert unmark(text) == text


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.stem)
def test_sheets_of_the_register(path):
    text = path.read_bytes().decode()
    once = marked(text)
    assert unmark(once) == text and marked(once) == once
    before, after = check_text("a", text), check_text("a", once)
    assert [j.verdict for j in before.claims] == [j.verdict for j in after.claims]


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.stem)
def test_a_marked_sheet_reads_the_same_even_with_its_marks_in(path):
    """The marked copy is a valid sheet for any reader: the marks are part of no claim."""
    text = path.read_bytes().decode()
    plain, once = read_sheet(Sheet("a", text), Settings()), marked(text)
    found = read_sheet(Sheet("a", once), Settings()).claims
    body = [c.text for c in found if c.place != "prose" and c.span.start < once.index(LIST)]
    assert body == [c.text for c in plain.claims if c.place != "prose"]


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.stem)
def test_every_footnote_is_referred_to_and_defined(path):
    """Held against markdown-it-py with its footnote plug-in, a general-purpose reader of Markdown."""
    once = marked(path.read_bytes().decode())
    reader = MarkdownIt().enable("table").use(footnote_plugin).use(front_matter_plugin)
    page = reader.render(once)
    defined = once.count("\n[^calccheck-")
    assert page.count('class="footnote-item"') == defined
    assert page.count('class="footnote-ref"') == defined
    assert defined == once.split(LIST)[0].count("[^calccheck-")


# --- where marks stand ----------------------------------------------------------------------------------------------


def test_a_table_a_quote_a_list_and_a_link():
    text = (
        CIRCUIT
        + "\n> 1. see [`V_b = 7.5 V`](x), *so* `I_R1 = 2.5 mA`(rounded)\n\n| | value |\n|-|-|\n| `V_b` | 7.6 V  |\n"
    )
    once = marked(text)
    assert "> 1. see [`V_b = 7.5 V`](x)[^calccheck-1], *so* `I_R1 = 2.5 mA`[^calccheck-2]<!---->(rounded)\n" in once
    assert "| `V_b` | 7.6 V[^calccheck-3]  |\n" in once
    assert "\n[^calccheck-1]: ✓ agrees" in once and "\n[^calccheck-3]: ✗ differs" in once


def test_comments_stand_behind_the_authors_own_where_the_mismatch_is():
    text = CIRCUIT + "\n```working\nV_b = V1 × R2 / (R1 + R2)  # divider\n    = 7.6 V # measured\n```\n"
    lines = marked(text).split("\n")
    formula = next(line for line in lines if line.startswith("V_b ="))
    value = next(line for line in lines if line.startswith("    = 7.6 V"))
    assert formula.startswith("V_b = V1 × R2 / (R1 + R2)  # divider  # ✓ agrees: 7.5")
    assert value.startswith("    = 7.6 V # measured  # ✗ differs: ")
    assert "7.5" in value.partition("differs")[2]


def test_display_mathematics_gets_its_mark_below_in_the_same_container():
    text = CIRCUIT + "\n- so\n\n  $$\n  V_b = 7.5\n  $$\n\nend\n"
    assert "\n  $$\n  \n  Above: [^calccheck-1m]\n\nend\n" in marked(text)


def test_without_a_final_newline_and_with_crlf():
    once = marked((CIRCUIT + "\n`V_b = 7.5 V`").replace("\n", "\r\n"))
    assert "`V_b = 7.5 V`[^calccheck-1]\r\n\r\n<!-- calccheck marks" in once
    assert "\n" not in once.replace("\r\n", "") and once.endswith(" -->")


def test_footnotes_of_the_authors_own_stay():
    text = CIRCUIT + "\n`V_b = 7.5 V`[^1] and [^calccheck-1]\n\n[^1]: mine\n[^calccheck-1]: mine as well\n"
    once = marked(text)  # the author's calccheck-1 is named as no mark of this sheet's, and stays
    assert "`V_b = 7.5 V`[^calccheck2-1][^1] and [^calccheck-1]\n" in once
    assert unmark(once) == text


def test_a_file_that_is_no_calc_sheet_is_left_alone():
    assert marked("# Reading list\n\n`x = 3`\n") == "# Reading list\n\n`x = 3`\n"


def test_the_words_of_a_note_are_safe_markdown():
    assert escaped("a*b_ [x] <i> $5 V_{a,b}") == r"a\*b\_ \[x\] \<i> \$5 V\_{a,b}"
    assert escaped("put `V_{a,b} = *` in code") == "put `V_{a,b} = *` in code"
    assert escaped("one ` tick") == r"one \` tick"


# --- sheets changed after marking -----------------------------------------------------------------------------------

SHEET = CIRCUIT + "\n`V_b = 7.6 V` and `I_R1 = 2.5 mA`\n\n```working\nV_b = 7.5 V\nI_R2 = 2.5 mA\n```\n"


def test_an_author_goes_on_working_in_a_marked_copy():
    once = marked(SHEET)
    mended = once.replace("V_b = 7.6 V", "V_b = 7.5 V").replace("# ✓", "# checked by hand  # ✓", 1)
    mended = "\n".join(line for line in mended.split("\n") if not line.startswith("I_R2 ="))
    wanted = SHEET.replace("7.6", "7.5").replace("7.5 V\nI_R2 = 2.5 mA\n", "7.5 V  # checked by hand\n")
    assert unmark(mended) == wanted
    assert marked(mended) == marked(wanted)


def test_an_editor_that_ends_the_file_otherwise():
    once = marked(SHEET)
    assert unmark(once + "\n") == SHEET + "\n"
    assert unmark(once.rstrip("\n")) == SHEET.rstrip("\n")
    assert unmark(once.replace("\n", "\r\n")) == SHEET.replace("\n", "\r\n")


def test_words_written_into_a_mark_are_kept_and_named():
    once = marked(SHEET)
    line = next(line for line in once.split("\n") if line.startswith("V_b = 7.5 V  #"))
    changed = once.replace(line, line.replace("agrees", "agrees, says QD,"))
    assert "✓ agrees, says QD," in unmark(changed)
    report = check_text("a.md", changed)
    assert [f.kind for f in report.findings] == ["mark"] and not report.clean
    assert (
        report.reading.sheet.line_column(report.findings[0].span.start)[0] == SHEET.split("\n").index("V_b = 7.5 V") + 1
    )


@pytest.mark.parametrize(
    "change",
    [lambda t: t + "\n## More\n", lambda t: t.replace("]: ✗ differs", "]: ✓ agrees")],
    ids=["behind", "inside"],
)
def test_a_list_that_was_changed_is_left_and_named_once(change):
    changed = change(marked(SHEET))
    assert unmark(changed) == changed
    report = check_text("a.md", changed)
    found = [f for f in report.findings if f.kind == "mark"]
    assert len(found) == 1 and found[0].severity == "error" and "cannot be taken out" in found[0].message
    assert unmark(to_markdown(report)) == changed


def test_a_line_copied_from_a_marked_sheet_vouches_for_nothing():
    line = next(line for line in marked(SHEET).split("\n") if line.startswith("V_b = 7.5 V  #"))
    text = CIRCUIT + f"\n```working\n{line.replace('7.5', '7.6')}\n```\n"
    report = check_text("a.md", text)
    assert [f.kind for f in report.findings] == ["mark"]
    assert stray(text)[0].message.startswith("# ✓ agrees")
    assert unmark(marked(text)) == text
