"""Where marks stand: every character to one entry, every mark behind the last character shown of its claim."""

from __future__ import annotations

import pytest
from annotate_fixture import finding, report_of, said
from hypothesis import given
from hypothesis import strategies as st

from calccheck.annotate.places import marks_in, places, runs, shown_pieces
from calccheck.annotate.record import entries
from calccheck.model import Report
from calccheck.source import NOWHERE


def cut(report: Report) -> list[tuple[str, str, tuple[str, ...]]]:
    """The page's runs that have an owner or a mark: text, owner, marks."""
    rows = entries(report)
    where = places(report.reading.page, report.reading.sheet, rows)
    found = [run for piece in shown_pieces(report.reading.page) for run in runs(where, piece)]
    return [(r.text, r.entry.key if r.entry else "", tuple(e.key for e in r.ends)) for r in found if r.entry or r.ends]


def test_inline_code_with_and_without_its_backticks():
    text = "See `V_b = 3 V` and `V_a = 9 V` too.\n"
    report = report_of(text, said(text, "V_b = 3 V", "agrees"), said(text, "`V_a = 9 V`", "differs"))
    assert cut(report) == [("V_b = 3 V", "c1", ("c1",)), ("V_a = 9 V", "c2", ("c2",))]


def test_a_stretch_of_prose_over_code_and_emphasis():
    text = "Then `V_b` is *about* 3 V here.\n"
    report = report_of(text, said(text, "`V_b` is *about* 3 V", "unchecked", place="prose"))
    assert cut(report) == [("V_b", "c1", ()), (" is ", "c1", ()), ("about", "c1", ()), (" 3 V", "c1", ("c1",))]


def test_lines_of_working_up_to_its_last():
    text = "```working\nP = 2 V × 3 A   # why\n  = 6 W   # so\n```\n"
    report = report_of(text, said(text, "P = 2 V × 3 A   # why\n  = 6 W", "agrees"))
    assert cut(report) == [("P = 2 V × 3 A   # why", "c1", ()), ("  = 6 W", "c1", ("c1",))]


def test_the_shorter_of_two_claims_has_the_characters_and_both_have_marks():
    text = "All of V_b is `V_b = 3 V` here.\n"
    report = report_of(text, said(text, "V_b is `V_b = 3 V` here", "unchecked"), said(text, "V_b = 3 V", "agrees"))
    assert ("V_b = 3 V", "c2", ("c2",)) in cut(report)
    assert cut(report)[-1] == (" here", "c1", ("c1",))


def test_a_claim_before_a_finding_on_the_same_words():
    text = "```circuit\nR1: 5 Ω, a to b\n```\n"
    report = report_of(text, said(text, "R1: 5 Ω", "unchecked"), findings=(finding(text, "R1: 5 Ω", "letter", "odd"),))
    assert cut(report)[0] == ("R1: 5 Ω", "c1", ("c1", "f1"))


@pytest.mark.parametrize("needle", ["title: x", "```circuit", "\n\n```circuit"])
def test_what_the_page_does_not_show_is_marked_nearby(needle):
    text = "---\ntitle: x\n---\n\nWords.\n\n```circuit\nR1: 5 Ω, a to b\n```\n"
    report = report_of(text, findings=(finding(text, needle, "structure", "why"),))
    (mark,) = cut(report)
    assert mark[2] == ("f1",)


@given(st.lists(st.tuples(st.integers(0, 60), st.integers(1, 30)), max_size=8))
def test_every_claim_has_one_mark_and_no_character_is_lost(spans):
    text = "Some `code = 1 V` words\n\n| a | b |\n|---|---|\n| c | d = 2 V |\n\n> quoted *text* here\n"
    claims = [said(text, text[a : min(a + n, len(text))], "agrees") for a, n in spans if text[a : a + n].strip()]
    report = report_of(text, *claims)
    rows = entries(report)
    where = places(report.reading.page, report.reading.sheet, rows)
    pieces = list(shown_pieces(report.reading.page))
    assert ["".join(r.text for r in runs(where, p)) for p in pieces] == [p.text for p in pieces]
    marked = [e.key for p in pieces for r in runs(where, p) for e in r.ends]
    assert sorted(marked) == sorted(e.key for e in rows)
    assert where.placed() == set(marked)
    assert {e.key for e in marks_in(where, pieces)} == set(marked)
    assert all(at == NOWHERE or at < len(text) for at in where.ends)
