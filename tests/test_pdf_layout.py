"""The layout of the PDF on hard sheets: notes that crowd, long title blocks, breaks of pages, text that is meant to break out."""

from __future__ import annotations

import re
from itertools import pairwise

import pymupdf
import pytest
from annotate_fixture import hostile, report_of, said
from pdf_reading import MM, Word, annotations, flat, read, text_of, words
from pypdf import PageObject, PdfReader

from calccheck.annotate.to_pdf import to_pdf
from calccheck.model import Report, Slip


@pytest.fixture(scope="module")
def nasty() -> PdfReader:
    return read(hostile())


# --- hostile text ---------------------------------------------------------------------------------------------------


def test_hostile_text_is_shown_as_text(nasty):
    shown = flat(text_of(nasty))
    for piece in (
        '"]) #let x = 1 [', "#panic(1) $x$ <b>bold</b> & 'q'", '#import "@preview/x:1"', "<script>alert(1)</script>",
        'Text #panic("x") ] [ ) ( } {', '#code("x") ] $', '<b onclick="x">bold</b> & #', 'V_<i> = "]#panic()? unchecked',
        "click](javascript:alert(1))", "c2 (annot:c1)", '# ] #panic() $ \\ "', '<div onclick="x">#panic()</div>',
        'no "]) #panic() <b>&amp;</b> \\ $x$', 'circuit #bad "info', "<!-- c -->",
    ):  # fmt: skip
        assert flat(piece) in shown


def test_what_is_unseen_or_in_no_font_stands_as_its_code_point(nasty):
    shown = flat(text_of(nasty))
    for name in ("U+202E", "U+2066", "U+0007", "U+00AD", "U+200B", "U+1F600", "U+6F22", "U+5B57"):
        assert name in shown
    assert not set("\u202e\u2066\u00ad\U0001f600") & set(shown)


def test_nothing_in_a_sheet_becomes_an_action(nasty):
    kinds = set()
    for page in nasty.pages:
        for reference in page.get("/Annots", []):
            a = reference.get_object()
            kinds.add(str(a.get("/A", {}).get("/S", "internal")))
    assert kinds == {"internal"}
    assert "/OpenAction" not in nasty.trailer["/Root"]
    assert "/AA" not in nasty.trailer["/Root"]


def test_comments_bear_hostile_words_too(nasty):
    contents = [a["/Contents"] for _, _, a in annotations(nasty, "/Highlight")]
    assert len(contents) == 4
    assert all('"]) #panic() <b>&amp;</b> \\ $x$ [U+202E]' in c for c in contents)


def test_deep_nesting_and_endless_words_lose_nothing():
    deep = "> " * 40 + "innermost\n\n" + "".join("  " * k + f"- level{k}\n" for k in range(30))
    text = f"# Head\n\n### Skips two\n\n{deep}\n\n{'x' * 900}\n\n```\n{'y' * 900}\n```\n\n{'*a **b ' * 80}\n"
    shown = flat(text_of(read(report_of(text))))
    assert "innermost" in shown
    assert all(f"level{k}" in shown for k in range(30))
    assert shown.count("x") >= 900
    assert shown.count("y") >= 900


def test_a_lone_surrogate_is_no_crash():
    assert "U+DCFF" in flat(text_of(read(report_of("# Head \udcff\n"))))


# --- layout ---------------------------------------------------------------------------------------------------------


def crowded() -> Report:
    rows = "".join(f"| `V_b` | {100 + k}.0 V | {200 + k}.0 V |\n" for k in range(45))
    long = "a very long field that needs several lines of the title block " * 4
    text = (
        f"---\nsubject: {long}\nproject: {long}\nsheet: CR-1\n---\n\n# Head\n\n| q | one | two |\n|---|---|---|\n{rows}"
    )
    found = [
        said(text, f"{n + k}.0 V", "differs", place="table", message="a sentence " * 12)
        for k in range(45)
        for n in (100, 200)
    ]
    return report_of(text, *found)


@pytest.fixture(scope="module")
def full() -> PdfReader:
    return read(crowded())


def beside(page: PageObject) -> list[Word]:
    """What stands in the margin of a page of the sheet, from the top down; the title block left out."""
    found = [w for w in words(page) if w.x > 153 * MM]
    block = min((w.y for w in words(page) if w.text == "PAGE"), default=0.0)
    return sorted((w for w in found if w.y < block - 15), key=lambda w: -w.y)


def pages_of_the_sheet(reader: PdfReader) -> list[PageObject]:
    record = next(k for k, page in enumerate(reader.pages) if "Checkrecord" in flat(page.extract_text()))
    return list(reader.pages)[:record]


def assert_notes_apart(page: PageObject) -> int:
    """No two lines of notes on one another, each note's head on a line of its own; the number of heads."""
    margin = beside(page)
    lines = sorted({round(w.y, 1) for w in margin}, reverse=True)
    assert all(
        a - b > 6.5 or a - b < 0.6 for a, b in pairwise(lines)
    )  # signs and words of one line sit on one baseline
    assert all(y > 16 * MM for y in lines)  # above the foot of the page
    heads = [w.y for w in margin if w.text.startswith("differs")]
    assert all(a - b > 6.5 for a, b in pairwise(heads))
    return len(heads)


def test_crowded_margin_notes_never_collide(full):
    notes = sum(assert_notes_apart(page) for page in pages_of_the_sheet(full))
    told = " ".join(w.text for page in pages_of_the_sheet(full) for w in beside(page))
    assert notes + sum(int(n) for n in re.findall(r"(\d+) more on this page", told)) == 90


@pytest.mark.parametrize("filler", [0, 5, 21])
def test_long_margin_notes_stack_and_stay_on_the_page(filler):
    """Five claims on one line: right below the summary, further down, and on the last lines of the page."""
    claims = " ".join(f"`V_b = {k} V`" for k in range(1, 6))
    text = f"# Head\n\n{''.join(f'Line {k}.' + chr(10) * 2 for k in range(filler))}{claims}\n"
    sentence = "a message of some length that fills more than two lines of the margin, as they do, closing word"
    found = [said(text, f"V_b = {k} V", "differs", place="code", message=f"{sentence}{k}.") for k in range(1, 6)]
    (page,) = pages_of_the_sheet(read(report_of(text, *found)))
    assert assert_notes_apart(page) == 5
    head = next(w.y for w in words(page) if w.text == "Head")
    assert all(w.y < head + 12 for w in beside(page))
    told = flat("".join(w.text for w in beside(page)))
    assert all(f"closingword{k}." in told for k in range(1, 6))


def twenty_in_a_row(form: str) -> Report:
    """Twenty wrong claims in consecutive lines, each with a message and two slips of several lines in the margin."""
    claims = [f"V_n{k} = {k}.25 V" for k in range(1, 21)]
    rows = "\n".join({"working": "{}", "list": "- `{}`", "table": "| `{}` | b |"}[form].format(c) for c in claims)
    around = {"working": "```working\n{}\n```", "list": "{}", "table": "| a | b |\n|---|---|\n{}"}[form]
    text = f"# Head\n\n{around.format(rows)}\n\nThe end.\n"
    sentence = "comes to a value that is said with some words around it, so that it fills lines of the margin"
    slips = tuple(Slip(name, f"consistent with the {name} thing, {sentence}") for name in ("first", "second"))
    place = {"working": "working", "list": "code", "table": "table"}[form]
    return report_of(
        text, *(said(text, c, "differs", place=place, message=f"{c[:5]} {sentence}", slips=slips) for c in claims)
    )


@pytest.mark.parametrize("form", ["working", "list", "table"])
def test_twenty_wrong_claims_in_a_row_have_notes_that_never_touch(form):
    """By the boxes of words and of the bars beside the notes, as a second program sees them."""
    notes = 0
    with pymupdf.open(stream=to_pdf(twenty_in_a_row(form))) as pdf:
        record = next(k for k, page in enumerate(pdf) if "Check record" in page.get_text())
        for page in list(pdf)[:record]:
            left = page.rect.width - 56.5 * MM
            top = next((w[1] for w in page.get_text("words") if w[4] == "Head"), 30 * MM)  # below the summary
            boxes = [pymupdf.Rect(w[:4]) for w in page.get_text("words") if w[0] > left and w[1] > top]
            assert all(b.x1 < page.rect.width - 10 * MM and b.y1 < page.rect.height - 12 * MM for b in boxes)
            for k, one in enumerate(boxes):  # a box is as high as the font, some of which is white: 1.5 points
                assert not [b for b in boxes[k + 1 :] if _both(one, b).width > 0.5 and _both(one, b).height > 1.5]
            bars = sorted(
                (d["rect"].y0, d["rect"].y1)
                for d in page.get_drawings()
                if left - 4 < d["rect"].x0 and d["rect"].y0 > top and d["rect"].width < 2 and d["rect"].height > 5
            )
            assert all(a[1] < b[0] for a, b in pairwise(bars))
            notes += len(bars)
            text = " ".join(w[4] for w in page.get_text("words") if w[0] > left)
            notes += sum(int(n) for n in re.findall(r"(\d+) more on this page", text))
    assert notes == 20


def _both(a: pymupdf.Rect, b: pymupdf.Rect) -> pymupdf.Rect:
    """What two boxes share; of no width and height where they share nothing."""
    shared = pymupdf.Rect(max(a.x0, b.x0), max(a.y0, b.y0), min(a.x1, b.x1), min(a.y1, b.y1))
    return shared if shared.x1 > shared.x0 and shared.y1 > shared.y0 else pymupdf.Rect()


def test_a_long_title_block_pushes_the_text_down(full):
    for page in full.pages:
        found = words(page)
        block = min(w.y for w in found if w.text in ("BY", "CHECKED", "APPROVED", "PAGE"))
        body = [w.y for w in found if w.x < 150 * MM and w.y < block - 15]
        assert body
        assert max(w.y for w in found) < float(page.mediabox.height) - 8 * MM
        assert max(body) < block - 20  # the value under the label, and white


def test_heads_of_tables_repeat_and_rows_stay_whole(full):
    pages = [flat(p.extract_text()) for p in full.pages]
    sheet = pages[: next(k for k, p in enumerate(pages) if "Checkrecord" in p)]
    bearing = [p for p in sheet if re.search(r"V_b1\d\d\.0V", p)]
    assert len(bearing) > 1
    assert all("qonetwo" in p for p in bearing)


def test_no_row_is_parted_by_the_end_of_a_page():
    rows = "".join(f"| first{k}. {'words and more ' * 55} last{k}. | b |\n" for k in range(24))
    reader = read(report_of(f"# Head\n\n| a | b |\n|---|---|\n{rows}"))
    pages = [flat(p.extract_text()) for p in reader.pages]
    assert len(pages) > 2
    for k in range(24):
        (first,) = [n for n, p in enumerate(pages) if f"first{k}." in p]
        (last,) = [n for n, p in enumerate(pages) if f"last{k}." in p]
        assert first == last


def test_no_heading_is_left_alone_at_the_foot_of_a_page():
    """Headings at every height: between them runs of paragraphs whose number steps through all remainders of a page."""
    parts = "".join(f"## Heading{k}.\n\nFollowing{k}.\n\n" + "Line.\n\n" * (k % 11 + 3) for k in range(60))
    pages = [flat(p.extract_text()) for p in read(report_of(f"# Head\n\n{parts}")).pages]
    assert len(pages) > 8
    for k in range(60):
        assert any(f"Heading{k}.Following{k}." in page for page in pages)
