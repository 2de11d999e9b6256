"""The reviewer's PDF, read back by pypdf: marks, values, comments, attachment, tags, the same bytes, hostile text.

Rules of the format are those of ISO 32000-1 (PDF 1.7), ISO 19005-3 (PDF/A-3) and ISO 14289-1 (PDF/UA-1), cited from memory.
"""

from __future__ import annotations

import os
import re
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from io import BytesIO
from itertools import pairwise
from pathlib import Path

import pytest
from annotate_fixture import EXAMPLE, HOSTILE, example, hostile, report_of, said
from pypdf import PageObject, PdfReader
from pypdf.generic import DictionaryObject, IndirectObject

from calccheck.annotate.marks import MARKS
from calccheck.annotate.record import LIMITS, comment_text, entries
from calccheck.annotate.record_parts import SIGNATORIES
from calccheck.annotate.to_pdf import to_pdf
from calccheck.model import Report

MM = 72 / 25.4


@dataclass(frozen=True, slots=True)
class Word:
    """A piece of text with the place of its baseline, points from the page's lower left corner."""

    x: float
    y: float
    text: str


def words(page: PageObject) -> list[Word]:
    found: list[Word] = []

    def visit(text: str, cm: list[float], tm: list[float], _font: object, _size: float) -> None:
        x = tm[4] * cm[0] + tm[5] * cm[2] + cm[4]
        y = tm[4] * cm[1] + tm[5] * cm[3] + cm[5]
        if text.strip():
            found.append(Word(x, y, text.strip()))

    page.extract_text(visitor_text=visit)
    return found


def read(report: Report, number: int = 1, of: int = 1) -> PdfReader:
    return PdfReader(BytesIO(to_pdf(report, number, of)), strict=True)


def text_of(reader: PdfReader) -> str:
    return "\n".join(page.extract_text() for page in reader.pages)


def flat(text: str) -> str:
    """Without white space: where a line breaks, and what pypdf takes for a space, is not the sheet's doing."""
    return re.sub(r"\s", "", text)


def annotations(reader: PdfReader, subtype: str) -> Iterator[tuple[PageObject, IndirectObject, DictionaryObject]]:
    for page in reader.pages:
        for reference in page.get("/Annots", []):
            if reference.get_object()["/Subtype"] == subtype:
                yield page, reference, reference.get_object()


@pytest.fixture(scope="module")
def pdf() -> PdfReader:
    return read(example(), 2, 3)


@pytest.fixture(scope="module")
def nasty() -> PdfReader:
    return read(hostile())


# --- what stands on the paper ---------------------------------------------------------------------------------------


def test_every_mark_stands_with_sign_word_and_number_behind_its_claim(pdf):
    shown = flat(text_of(pdf))
    for entry in entries(example()):
        assert flat(f"{MARKS[entry.kind].label}{entry.number}") in shown
    for claim in (
        "V_b = 3 V✓ agrees1",
        "I_R1 = 1.50 A✗ differs2",
        "3.0 V ≈ rounded5",
        "8.8 V ◇ accepted6",
        "3.3 V? unchecked7",
    ):
        assert flat(claim) in shown


def test_the_record_gives_printed_recomputed_deviation_and_why(pdf):
    shown = flat(text_of(pdf))
    row = "I_R1=1.50AI_R1isnotwhatthecircuitgives.ThenumberfollowsifR2isleftout.1.50A1A+50%circuit"
    assert row in shown
    assert "7W6W+16.7%circuit" in shown
    assert "givenVmin=2.5Vstatedinthissheet" in shown
    assert "3.1×10⁻¹⁶" in shown


def test_the_limits_of_the_check_and_the_boxes_to_sign(pdf):
    shown = flat(text_of(pdf))
    opening, points, closing = LIMITS
    for sentence in (opening, *points, closing, *SIGNATORIES):
        assert flat(sentence) in shown
    assert shown.count("Signature") >= len(SIGNATORIES)


def test_title_block_on_every_page(pdf):
    for k, page in enumerate(pdf.pages, 1):
        shown = flat(page.extract_text())
        for piece in ("EX-7", "Two resistors in series", "2026-03-04", "sheet 2 of 3", f"PAGE{k} of {len(pdf.pages)}"):
            assert flat(piece) in shown


def test_front_matter_that_has_no_place_in_the_title_block_stands_in_the_summary(pdf):
    assert flat("hazard Hot surfaces") in flat(pdf.pages[0].extract_text())


def test_the_summary_names_the_worst_first(pdf):
    front = flat(pdf.pages[0].extract_text())
    front = front[front.index("Worstfirst") :]
    order = ["differs2", "differs4", "unchecked7", "errorF2", "cautionF1", "accepted6"]
    assert sorted(order, key=front.index) == order


def test_the_sheets_own_words_all_stand(pdf):
    shown = flat(text_of(pdf))
    for line in (
        "Divider & its powers",
        "Some plain words before",
        "# supply",
        "a to b",
        "second item, where",
        "The end.",
    ):
        assert flat(line) in shown


# --- comments -------------------------------------------------------------------------------------------------------


def test_a_comment_on_each_claim_to_be_mended_and_on_no_other(pdf):
    found = {a["/NM"]: a for _, _, a in annotations(pdf, "/Highlight")}
    wanted = {e.key: e for e in entries(example()) if e.kind in ("differs", "unchecked", "error")}
    assert set(found) == set(wanted) == {"c2", "c4", "c7", "f2"}
    for key, annotation in found.items():
        assert annotation["/Contents"] == comment_text(wanted[key])
        assert annotation["/Subj"] == MARKS[wanted[key].kind].word
        assert wanted[key].message in annotation["/Contents"]
        assert annotation["/F"] == 4  # prints (ISO 19005-3, 6.3.2)
        assert annotation["/AP"]["/N"].get_object()["/Subtype"] == "/Form"


def test_comments_lie_on_their_words_inside_the_page(pdf):
    commented = {"c2": "1.50 A", "c7": "V_b is 3.3 V", "f2": "R2: 3"}
    for page, _, a in annotations(pdf, "/Highlight"):
        x0, y0, x1, y1 = (float(v) for v in a["/Rect"])
        assert 0 <= x0 < x1 <= float(page.mediabox.width)
        assert 0 <= y0 < y1 <= float(page.mediabox.height)
        quads = [float(v) for v in a["/QuadPoints"]]
        assert len(quads) % 8 == 0
        assert all(x0 - 0.01 <= x <= x1 + 0.01 for x in quads[::2])
        assert all(y0 - 0.01 <= y <= y1 + 0.01 for y in quads[1::2])
        if a["/NM"] in commented:
            inside = [w.text for w in words(page) if x0 - 1 <= w.x <= x1 and y0 <= w.y <= y1]
            assert flat(commented[a["/NM"]]) in flat("".join(inside))


def test_no_comment_where_all_is_well():
    text = EXAMPLE.replace("8.8 V", "9.0 V")
    reader = read(report_of(text, said(text, "V_b = 3 V", "agrees", place="code", basis="circuit")))
    assert not list(annotations(reader, "/Highlight"))
    assert "All1claimsstand" in flat(text_of(reader))


def test_no_link_to_a_comment_is_left_over(pdf):
    assert not [a for _, _, a in annotations(pdf, "/Link") if str(a.get("/A", {}).get("/URI", "")).startswith("annot")]


def test_every_mark_leads_to_the_record_and_back(pdf):
    record = next(k for k, page in enumerate(pdf.pages) if "Checkrecord" in flat(page.extract_text()))
    there, back = 0, 0
    for page, _, link in annotations(pdf, "/Link"):
        target = link["/Dest"]
        to = pdf.get_page_number(target[0].get_object())
        there += page.page_number < record <= to
        back += page.page_number >= record > to
    placed = len(entries(example()))
    assert there == placed
    assert back == placed


# --- the file -------------------------------------------------------------------------------------------------------


def test_the_sheet_is_attached_byte_for_byte(pdf, nasty):
    assert pdf.attachments["TS-101.md"] == [EXAMPLE.encode()]
    (name,) = nasty.attachments
    assert re.fullmatch(r"[\w.-]+\.md", name)
    assert nasty.attachments[name] == [HOSTILE.encode()]


def test_line_ends_of_the_attachment_are_kept():
    text = '# Head\r\n\r\nText\rand \\ "more"\r\n'
    assert read(report_of(text)).attachments["TS-101.md"] == [text.encode()]


def test_archivable_and_tagged_after_the_comments_are_in(pdf):
    root = pdf.trailer["/Root"]
    meta = root["/Metadata"].get_object().get_data().decode()
    assert "<pdfaid:part>3</pdfaid:part>" in meta
    assert "<pdfaid:conformance>A</pdfaid:conformance>" in meta
    assert "<pdfuaid:part>1</pdfuaid:part>" in meta
    assert root["/MarkInfo"]["/Marked"]
    assert root["/Lang"] == "en"
    assert root["/OutputIntents"]
    assert pdf.trailer["/ID"][0]
    assert "2026-03-04" in meta
    assert pdf.pdf_header == "%PDF-1.7"
    assert f"{pdf.metadata.creation_date:%Y-%m-%d}" == f"{pdf.metadata.modification_date:%Y-%m-%d}" == "2026-03-04"


def test_every_comment_has_its_place_in_the_tagged_text(pdf):
    """ISO 14289-1, 7.18.1: annotations are enclosed in an Annot tag (ISO 32000-1, 14.7.4.4 for the way there)."""
    numbers = pdf.trailer["/Root"]["/StructTreeRoot"]["/ParentTree"]["/Nums"]
    parents = {int(numbers[k]): numbers[k + 1].get_object() for k in range(0, len(numbers), 2)}
    seen = 0
    for page, reference, annotation in annotations(pdf, "/Highlight"):
        element = parents[annotation["/StructParent"]]
        assert element["/S"] == "/Annot"
        children = element["/K"] if isinstance(element["/K"], list) else [element["/K"]]
        objects = [k.get_object() for k in children if isinstance(k.get_object(), DictionaryObject)]
        assert reference.idnum in [o.raw_get("/Obj").idnum for o in objects if o.get("/Type") == "/OBJR"]
        assert page["/Tabs"] == "/S"
        seen += 1
    assert seen == 4


def test_same_sheet_same_bytes_here_and_in_another_process_and_folder(tmp_path):
    here = to_pdf(example(), 1, 2)
    assert to_pdf(example(), 1, 2) == here
    code = (
        "import sys; sys.path.insert(0, sys.argv[1]); from annotate_fixture import example; "
        "from calccheck.annotate.to_pdf import to_pdf; sys.stdout.buffer.write(to_pdf(example(), 1, 2))"
    )
    environment = {**os.environ, "PYTHONHASHSEED": "7", "TZ": "Asia/Tokyo", "TMPDIR": str(tmp_path)}
    ran = subprocess.run(
        [sys.executable, "-c", code, str(Path(__file__).parent)],
        cwd=tmp_path, env=environment, capture_output=True, check=True,
    )  # fmt: skip
    assert ran.stdout == here


def test_a_sheet_without_a_date_bears_none_of_its_own(nasty):
    assert nasty.metadata.creation_date.year == 1970


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
    assert all('no "]) #panic() <b>&amp;</b> \\ $x$ [U+202E]' in c for c in contents)


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


def test_a_circuit_is_listed_with_the_sheets_line_numbers(pdf):
    line = next(k for k, s in enumerate(EXAMPLE.splitlines(), 1) if s.startswith("R1:"))
    assert flat(f"{line} R1: 6 Ω,   a to b") in flat(text_of(pdf))
