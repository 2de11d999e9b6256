"""What moves a quantity over its tolerances: the changes by hand, the bars in proportion, the pictures in page and PDF.

A divider of two 1 kΩ on 10 V, R1 ±10 %, R2 ±5 %: V_m = 10 V·R2/(R1 + R2). R1 at 0.9 kΩ: 10/1.9 = 5.2632 V, at 1.1 kΩ:
10/2.1 = 4.7619 V; R2 at 0.95 kΩ: 9.5/1.95 = 4.8718 V, at 1.05 kΩ: 10.5/2.05 = 5.1220 V (voltage divider, by hand).
"""

from __future__ import annotations

import re
from io import BytesIO
from xml.etree import ElementTree

import pypdf
import pytest

from calccheck import check_text
from calccheck.annotate.moves import picture
from calccheck.annotate.to_html import to_html
from calccheck.annotate.to_pdf import to_pdf

SHEET = """---
sheet: M-1
---
# Divider

```circuit
V1: 10 V, a to gnd
R1: 1 kΩ ±10 %, a to m
R2: 1 kΩ ±5 %, m to gnd
```

`worst V_m = 4.634 V … 5.385 V`, `V_m = 5.00 V`.
"""


@pytest.fixture(scope="module")
def report():
    return check_text("m.md", SHEET)


def test_changes_are_those_of_the_divider(report) -> None:
    over, plain = report.claims
    assert over.verdict == "agrees", over.message
    assert [m.name for m in over.moves] == ["R1", "R2"]
    for move, low, high in zip(
        over.moves, (10 / 1.9 - 5, 9.5 / 1.95 - 5), (10 / 2.1 - 5, 10.5 / 2.05 - 5), strict=True
    ):
        assert float(move.low.value) == pytest.approx(low, rel=1e-9)
        assert float(move.high.value) == pytest.approx(high, rel=1e-9)
    assert plain.moves == ()


def test_bars_are_in_proportion(report) -> None:
    svg = picture("V_m", report.claims[0].moves, "V").svg
    root = ElementTree.fromstring(svg)
    said = "".join(root.itertext())
    assert "+0.2632 V … −0.2381 V" in said
    assert "−0.1282 V … +0.1220 V" in said
    boxes = [float(w) for w in re.findall(r'<rect [^>]*?width="([\d.]+)"', svg)]
    changes = [10 / 1.9 - 5, 5 - 10 / 2.1, 5 - 9.5 / 1.95, 10.5 / 2.05 - 5]
    assert len(boxes) == len(changes)
    for width, change in zip(boxes, changes, strict=True):
        assert width / boxes[0] == pytest.approx(change / changes[0], abs=0.01)


def test_page_and_pdf_show_them(report) -> None:
    assert "What moves it" in to_html(report)
    text = "".join(page.extract_text() for page in pypdf.PdfReader(BytesIO(to_pdf(report))).pages)
    assert "What moves it" in text
    without = check_text("n.md", SHEET.replace("`worst V_m = 4.634 V … 5.385 V`, ", ""))
    assert "What moves it" not in to_html(without)
