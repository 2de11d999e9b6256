"""The reviewer's PDF, read back by pypdf: marks, values, comments, attachment, tags, the same bytes, hostile text.

Rules of the format are those of ISO 32000-1 (PDF 1.7), ISO 19005-3 (PDF/A-3) and ISO 14289-1 (PDF/UA-1), cited from memory.
"""

from __future__ import annotations

import os
import re
import subprocess
import sys
from pathlib import Path

import pytest
from annotate_fixture import EXAMPLE, HOSTILE, example, hostile, report_of, said
from pdf_reading import annotations, flat, read, text_of, words
from pypdf import PdfReader
from pypdf.generic import DictionaryObject

from calccheck import check_text
from calccheck.annotate.marks import MARKS
from calccheck.annotate.record import LIMITS, comment_text, entries
from calccheck.annotate.record_parts import SIGNATORIES
from calccheck.annotate.to_pdf import to_pdf


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
        message = wanted[key].message
        assert message[:1].upper() + message[1:] in annotation["/Contents"]
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
    assert "Theoneclaimstands." in flat(text_of(reader))


def test_no_link_to_a_comment_is_left_over(pdf):
    assert not [a for _, _, a in annotations(pdf, "/Link") if str(a.get("/A", {}).get("/URI", "")).startswith("annot")]


def lands_on(at: float, y: float) -> bool:
    """Whether a jump to this height shows what stands at height ``y`` as the first thing on the screen: a line below."""
    return 8 < at - y < 18


def jumps(reader: PdfReader) -> list[tuple[int, tuple[float, float], int, float]]:
    """Every link inside the file: its page, the middle of its box, the page it leads to, the height there."""
    found = []
    for page, _, link in annotations(reader, "/Link"):
        target = link["/Dest"]
        assert target[1] == "/XYZ"  # a place, not a page alone (ISO 32000-1, 12.3.2.2)
        x0, y0, x1, y1 = (float(v) for v in link["/Rect"])
        to = reader.get_page_number(target[0].get_object())
        assert to is not None
        assert 0 <= float(target[3]) <= float(reader.pages[to].mediabox.height)
        found.append((page.page_number, ((x0 + x1) / 2, (y0 + y1) / 2), to, float(target[3])))
    return found


def test_every_mark_leads_to_the_record_and_back(pdf):
    """From a mark to the row of its claim, from the row's mark to the mark in the sheet, by where the links lie and land."""
    titles = [flat(page.extract_text()) for page in pdf.pages]
    record = next(k for k, page in enumerate(titles) if "Checkrecord" in page)
    checker = next(k for k, page in enumerate(titles) if "Lefttothechecker" in page)
    found = jumps(pdf)
    there = [j for j in found if j[0] < record <= j[2] < checker]
    back = [j for j in found if record <= j[0] < checker and j[2] < record]
    assert len(there) == len(back) == len(entries(example()))
    for page, (_, y), to, at in there:
        rows = [b for b in back if b[0] == to and lands_on(at, b[1][1])]
        assert [b[2] for b in rows if lands_on(b[3], y)] == [page]  # the row leads back to the line that led to it


def test_the_front_and_the_checkers_page_lead_to_the_marks(pdf):
    titles = [flat(page.extract_text()) for page in pdf.pages]
    record = next(k for k, page in enumerate(titles) if "Checkrecord" in page)
    marks = {(j[0], round(j[1][1])) for j in jumps(pdf) if j[0] < record <= j[2]}
    for page in (0, len(titles) - 1):
        inward = [j for j in jumps(pdf) if j[0] == page and j[2] < record]
        assert inward
        for _, _, to, at in inward:
            assert any(to == p and lands_on(at, y) for p, y in marks)


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


def test_a_circuit_is_listed_with_the_sheets_line_numbers(pdf):
    line = next(k for k, s in enumerate(EXAMPLE.splitlines(), 1) if s.startswith("R1:"))
    assert flat(f"{line} R1: 6 Ω,   a to b") in flat(text_of(pdf))


# --- dollar maths ---------------------------------------------------------------------------------------------------

MATHS = r"""---
sheet: EX-8
---

# Maths

```circuit
reference com
V1: 5 V,    a to com
R1: 10 kΩ,  a to b
R2: 10 kΩ,  b to com
```

$$
\begin{aligned}
V_\mathrm{b} \text{ due to V1} &= \frac{V_1 R_2}{R_1 + R_2} \\
 &= \frac{5\,\mathrm{V} \cdot 10\,\mathrm{k\Omega}}{20\,\mathrm{k\Omega}} = 2.5\,\mathrm{V} \\
I_{R_1} &= 0.30\,\mathrm{mA}
\end{aligned}
$$

Within a line $V_\mathrm{b} = 2.5\,\mathrm{V}$ stands, and $a_1 + \frac{b}{c}$ claims nothing.
"""


def test_dollar_maths_is_set_as_it_was_read():
    """No markup of a claim is left, every line bears its number and its mark; what claims nothing stands as written."""
    report = check_text("maths.md", MATHS)
    assert [j.verdict for j in report.claims] == ["agrees", "differs", "agrees"]  # 5 V / 20 kΩ is 0.25 mA
    reader = read(report)
    shown = flat(text_of(reader))
    assert [m for m in re.findall(r"\\[a-zA-Z]+", shown) if m != r"\frac"] == []
    assert r"a_1+\frac{b}{c}" in shown
    for piece in ("2.5V", "0.30mA", "10kΩ", "dueto V1", "✓ agrees1", "✗ differs2", "✓ agrees3"):
        assert flat(piece) in shown
    assert [a["/NM"] for _, _, a in annotations(reader, "/Highlight")] == ["c2"]
    row = next(e for e in entries(report) if e.key == "c2")
    assert (row.printed, row.computed) == ("0.30 mA", "0.25 mA")
