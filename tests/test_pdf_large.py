"""A sheet of sixty pages and four hundred claims: set whole, in a time that grows with the sheet alone, in bounded memory."""

from __future__ import annotations

import json
import subprocess
import sys
from io import BytesIO
from pathlib import Path

import pytest
from large_sheet import CLAIMS_EACH, SECTIONS, large_sheet
from pdf_reading import flat
from pypdf import PdfReader

HERE = Path(__file__).parent
MEASURE = """
import json, resource, sys, time
sys.path.insert(0, sys.argv[1])
from large_sheet import large_sheet
from calccheck import check_text
from calccheck.annotate.to_html import to_html
from calccheck.annotate.to_pdf import to_pdf
report = check_text("large.md", large_sheet(int(sys.argv[2])))
to_pdf(check_text("small.md", large_sheet(1)))  # what is done once in a process is not the sheet's
marks = [time.process_time()]
for set_out in (to_html, to_pdf):
    made = set_out(report)
    marks.append(time.process_time())
open(sys.argv[3], "wb").write(made)
peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
print(json.dumps({"html": marks[1] - marks[0], "pdf": marks[2] - marks[1], "MB": peak, "counts": report.counts}))
"""


def measured(sections: int, pdf: Path) -> dict[str, float]:
    """Seconds of the processor for either output and the peak of the memory, in a process of its own."""
    command = [sys.executable, "-c", MEASURE, str(HERE), str(sections), str(pdf)]
    return json.loads(subprocess.run(command, capture_output=True, text=True, check=True).stdout)


@pytest.fixture(scope="module")
def large(tmp_path_factory) -> tuple[dict[str, float], bytes]:
    path = tmp_path_factory.mktemp("large") / "large.pdf"
    return measured(SECTIONS, path), path.read_bytes()


def test_every_claim_of_the_large_sheet_is_marked_and_recorded(large):
    figures, pdf = large
    reader = PdfReader(BytesIO(pdf))
    pages = [flat(page.extract_text()) for page in reader.pages]
    assert len(pages) >= 60
    assert figures["counts"] == {
        "agrees": SECTIONS * (CLAIMS_EACH - 1), "differs": SECTIONS,
        "rounded": 0, "unchecked": 0, "accepted": 0, "given": 0,
    }  # fmt: skip
    record = next(k for k, page in enumerate(pages) if "Checkrecord" in page)
    for part in (pages[:record], pages[record:]):
        text = "".join(part)
        assert all(f"agrees{n}" in text or f"differs{n}" in text for n in range(1, SECTIONS * CLAIMS_EACH + 1))
    assert all(f"PAGE{k}of{len(pages)}" in page for k, page in enumerate(pages, 1))


@pytest.mark.undisturbed
@pytest.mark.undisturbed
def test_time_grows_with_the_sheet_and_memory_is_bounded(large, tmp_path):
    """Four times the sheet takes four times as long; six times, and something in it grows faster than the sheet."""
    whole, _ = large
    assert whole["MB"] < 700
    again = min((whole, measured(SECTIONS, tmp_path / "again.pdf")), key=lambda m: m["pdf"])
    part = min((measured(SECTIONS // 4, tmp_path / "part.pdf") for _ in range(2)), key=lambda m: m["pdf"])
    assert again["pdf"] < 6 * part["pdf"]
    assert again["html"] < 6 * part["html"]


def test_the_large_sheet_is_what_it_says():
    assert len(large_sheet().splitlines()) > 800
    assert large_sheet().count("## Divider") == SECTIONS
