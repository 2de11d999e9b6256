"""What the editor server rests on, without it: places in the editor's units, marks passed over, the text under the pointer."""

from __future__ import annotations

import pytest
from annotate_fixture import EXAMPLE, example, hostile
from hypothesis import given
from hypothesis import strategies as st

from calccheck import check_text
from calccheck.annotate.positions import offset_of, position_of, units
from calccheck.annotate.to_hover import claim_at, to_hover
from calccheck.annotate.visible import one_line
from calccheck.edits import Edit, kept, put_in, unmark
from calccheck.source import Sheet

ENCODINGS = ("utf-8", "utf-16", "utf-32")
SIGNS = st.text(st.sampled_from("aé漢\U0001f600\r\n\x0c\u2028"))


@given(st.text(), st.sampled_from(ENCODINGS))
def test_units_are_those_of_the_encoding(text, encoding):
    """The Unicode Standard, chapter 3.9: code units of 8, 16 and 32 bits; Python's own codecs count them."""
    codec, width = {"utf-8": ("utf-8", 1), "utf-16": ("utf-16-le", 2), "utf-32": ("utf-32-le", 4)}[encoding]
    assert units(text, encoding) == len(text.encode(codec)) // width


@given(SIGNS, st.sampled_from(ENCODINGS))
def test_every_place_leads_back_to_its_character(text, encoding):
    sheet = Sheet("a.md", text)
    for offset in range(len(text) + 1):
        line, column = position_of(sheet, offset, encoding)
        back = offset_of(sheet, line, column, encoding)
        inside_a_line_end = text[max(0, offset - 1) : offset + 1] == "\r\n"
        assert back == (offset - 1 if inside_a_line_end else offset)


@given(SIGNS, st.integers(0, 9), st.integers(0, 9), st.sampled_from(ENCODINGS))
def test_places_that_do_not_exist_lead_into_the_text(text, line, column, encoding):
    assert 0 <= offset_of(Sheet("a.md", text), line, column, encoding) <= len(text)


@given(st.lists(st.tuples(st.integers(0, len(EXAMPLE)), st.sampled_from(["note", "comment", "below"])), max_size=6))
def test_what_is_kept_of_a_marked_text_stands_where_it_stood(places):
    marked = put_in(EXAMPLE, [Edit(at, "differs", form) for at, form in places])
    at = kept(marked)
    assert unmark(marked) == "".join(marked[k] for k in at[:-1])
    assert at[-1] == len(marked) and len(at) == len(unmark(marked)) + 1
    assert list(at) == sorted(set(at))


def test_the_claim_under_the_pointer_and_nothing_elsewhere():
    report = example()
    for judged in report.claims:
        span = judged.claim.span
        assert claim_at(report, span.start) is judged and claim_at(report, span.end - 1) is judged
    for words in ("project:", "Some *plain*", "reference com", "The end."):
        assert claim_at(report, EXAMPLE.index(words)) is None
    assert claim_at(report, -1) is None


@pytest.mark.parametrize("report", [example(), hostile()], ids=["every verdict", "hostile text"])
def test_what_is_shown_is_plain_and_says_everything(report):
    for judged in report.claims:
        shown = to_hover(report, judged).split("\n")
        assert all(line.isprintable() for line in shown)
        assert judged.verdict in shown[1]
        assert [line for line in shown if line.startswith("caution ")] == [
            f"caution     {one_line(c)}" for c in judged.cautions
        ]
        slips = judged.slips if judged.verdict == "differs" else ()
        assert [line for line in shown if line.startswith("likely ")] == [
            f"likely      {one_line(s.text)}" for s in slips
        ]


def test_parts_by_source_and_their_sum():
    """Superposition by hand: 10 V × 3/(1 + 3) = 7.5 V (divider) and 2 mA × (1 kΩ ∥ 3 kΩ) = 1.5 V make 9 V."""
    circuit = "```circuit\nreference g\nV1: 10 V, a to g\nR1: 1 kΩ, a to b\nR2: 3 kΩ, b to g\nI1: 2 mA, g to b\n```\n\n"
    report = check_text("a.md", circuit + "`V_b = 9.0 V`, `P_R2 = 27.0 mW`\n")
    voltage, power = (to_hover(report, j).split("\n") for j in report.claims)
    rows = {line[:10].strip(): line[10:].split() for line in voltage}
    assert rows["due to V1"][:2] == ["7.5", "V"] and rows["due to I1"][:2] == ["1.5", "V"]
    assert rows["sum"] == ["9", "V"]
    assert not [line for line in power if line.startswith("due to")]  # a power is no sum of parts by source
