"""What nobody should miss stands in front, what is left to people stands at the end with a box to tick: PDF and page alike."""

from __future__ import annotations

import re
from datetime import date
from html import unescape
from itertools import pairwise

import pymupdf
import pytest
from pdf_reading import MM, flat

from calccheck import check_text
from calccheck.annotate.record import LIMITS
from calccheck.annotate.to_html import to_html
from calccheck.annotate.to_pdf import to_pdf
from calccheck.model import Report, Settings

# 230 V over 100 µF stand at their crest of 325 V: ½ · 100 µF · (325 V)² is 5.3 J, so the capacitor is not dangerous; the
# touch voltage and the frequency of the mains are. 230 V through 1 kΩ drive 230 mA.
SHEET = """---
sheet: LP-1
date: 2026-03-04
hazard: the enclosure is live with the door open
---

# Live parts

```circuit
reference n
Vm: 230 V,       live to n, 50 Hz
R1: 1 kΩ,        live to n
C1: 100 µF,      live to n
```

```working
given margin = 1.25      # from the customer
given spare = 3
limit = 200 mA × margin × 1 = 250 mA
```

`|I_R1| = 230 mA` and `|V_{live,n}| = 231 V` <!-- calccheck: accept 231 V for 230 V "meter M-3" by AB until 2031-01-31 -->.
"""
CAUTIONS = (
    "The enclosure is live with the door open.",
    "230 V r.m.s. stand between live and n",
    "50 Hz is the frequency of the mains",
)


@pytest.fixture(scope="module")
def report() -> Report:
    found = check_text("lp.md", SHEET, Settings(on=date(2026, 3, 5)))
    assert found.counts["given"] == 2
    assert found.counts["accepted"] == 1
    assert {f.kind for f in found.findings} == {"hazard", "touch-voltage", "mains"}
    return found


@pytest.fixture(scope="module")
def pages(report) -> list[str]:
    with pymupdf.open(stream=to_pdf(report)) as pdf:
        return [flat(page.get_text()) for page in pdf]


@pytest.fixture(scope="module")
def sections(report) -> dict[str, str]:
    """The words of the page for the screen by the heading that they stand under."""
    words = re.sub(r"<[^>]+>", " ", to_html(report).split("</style>")[1])
    parts = re.split("(Check summary|Worst first|Check record|Left to the checker)", unescape(words))
    return {name: flat(body) for name, body in zip(parts[1::2], parts[2::2], strict=False)}


def test_cautions_waivers_and_assumptions_stand_in_front(pages, sections):
    for front in (pages[0], sections["Check summary"]):
        for words in (
            *CAUTIONS,
            "Under a waiver",
            "meter M-3",
            "AB until 2031-01-31",
            "Open assumptions",
            "margin = 1.25",
            "spare = 3",
        ):
            assert flat(words) in front
        assert flat("2 values are given") in front
        assert front.index(flat(CAUTIONS[0])) < front.index("Meaning")  # before the counts


def test_nothing_is_told_twice_in_front(pages):
    for words in CAUTIONS:
        assert pages[0].split("Liveparts")[0].count(flat(words)) == 1


def test_what_is_left_stands_on_the_last_page_with_boxes(report, pages, sections):
    opening, points, closing = LIMITS
    for last in (pages[-1], sections["Left to the checker"]):
        for words in (opening, *points, closing, *CAUTIONS, "given margin = 1.25", "given spare = 3", "meter M-3"):
            assert flat(words) in last
    wanted = len(points) + len(CAUTIONS) + 2 + 1  # givens, waiver
    assert to_html(report).count('class="tick"') == wanted
    with pymupdf.open(stream=to_pdf(report)) as pdf:
        side = 2.4 * MM
        boxes = [
            d["rect"]
            for d in pdf[-1].get_drawings()
            if abs(d["rect"].width - side) < 0.2 > abs(d["rect"].height - side)
        ]
    assert len(boxes) == wanted
    assert all(a.y1 < b.y0 for a, b in pairwise(boxes))


def test_a_sheet_without_any_of_it_has_no_empty_parts(sections):
    plain = check_text("p.md", "# P\n\n```circuit\nreference n\nV: 5 V, a to n\nR: 1 kΩ, a to n\n```\n\n`I_R = 5 mA`\n")
    with pymupdf.open(stream=to_pdf(plain)) as pdf:
        shown = flat("".join(page.get_text() for page in pdf))
    for text in (shown, flat(to_html(plain))):
        for words in ("Under a waiver", "Open assumptions", "Cautions to act upon", "Givens, checked", "Waivers"):
            assert flat(words) not in text
    assert "Theoneclaimstands." in shown
