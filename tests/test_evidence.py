"""Published worked examples, written as calc sheets: the verdicts are held against those worked out from the print.

Every sheet in ``tests/evidence`` names its published source and ends in its expectation, for example

    <!-- expect: 12 agrees; 1 rounded at 24; 2 differs at 31 32; 3 given -->

that is the number of claims by verdict and, for every verdict but ``agrees`` and ``given``, the line of each. The figures
stand as published; the verdicts follow from them and from the recomputed values by the rule of rounding, not from the program.
"""

from __future__ import annotations

import re
from collections import Counter
from pathlib import Path

import pytest
import yaml

from calccheck import check_text

FOLDER = Path(__file__).parent / "evidence"
SHEETS = sorted(FOLDER.glob("*.md"))
DOCS = Path(__file__).parent.parent / "docs" / "evidence.md"
EXPECTATION = re.compile(r"<!-- expect: (.+) -->\n\Z")
ITEM = re.compile(r"(\d+) (agrees|rounded|differs|unchecked|accepted|given)(?: at (\d+(?: \d+)*))?")
WITHOUT_LINES = ("agrees", "given")

each_sheet = pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.stem)


def read(path: Path) -> str:
    return path.read_text(encoding="utf-8")


def expectation(text: str) -> tuple[Counter[str], dict[str, list[int]]]:
    """Number of claims by verdict and the lines of those that do not simply agree."""
    found = EXPECTATION.search(text)
    assert found, "no expectation in the last line"
    items = [ITEM.fullmatch(item) for item in found[1].split("; ")]
    assert all(items), f"expectation not understood: {found[1]}"
    counts = Counter({m[2]: int(m[1]) for m in items if m})
    lines = {m[2]: [int(n) for n in m[3].split()] for m in items if m and m[3]}
    return counts, lines


def front_matter(text: str) -> dict[str, str]:
    return yaml.safe_load(text.split("---\n")[1])


def line(report, judged) -> int:
    return report.reading.sheet.line_column(judged.claim.span.start)[0]


def told(report) -> str:
    """The claims that do not agree, for the message of a failed test."""
    rest = [j for j in report.claims if j.verdict not in WITHOUT_LINES]
    words = [f"{line(report, j)}: {j.claim.text}: {j.verdict}: {j.message}" for j in rest]
    return "\n".join(words + [f"finding: {f.message}" for f in report.findings])


@each_sheet
def test_verdicts_are_those_of_the_published_figures(path: Path) -> None:
    text = read(path)
    counts, lines = expectation(text)
    report = check_text(path.name, text)
    got = Counter(j.verdict for j in report.claims)
    got_lines: dict[str, list[int]] = {}
    for judged in report.claims:
        if judged.verdict not in WITHOUT_LINES:
            got_lines.setdefault(judged.verdict, []).append(line(report, judged))
    assert (got, got_lines) == (counts, lines), told(report)


@each_sheet
def test_a_changed_figure_is_found(path: Path) -> None:
    """One digit of one agreeing figure changed, far beyond the printed rounding: that claim differs."""
    text = read(path)
    report = check_text(path.name, text)
    agreeing = [j.claim.span for j in report.claims if j.verdict == "agrees"]
    assert agreeing
    for span in agreeing:
        changed = text[: span.start] + with_other_figure(text[span.start : span.end]) + text[span.end :]
        again = check_text(path.name, changed)
        verdict = next(j.verdict for j in again.claims if j.claim.span.start == span.start)
        assert verdict == "differs", (text[span.start : span.end], changed[span.start : span.end])


def with_other_figure(claim: str) -> str:
    """The leading digit of the last number made one larger, or 8 where it is 9; a formula without one is doubled."""
    code = claim.split("#")[0].rstrip()
    number = list(re.finditer(r"(?<![\w.′^])(?<!_\{)\d[\d.]*", code))[-1:]
    if not number:
        start, end = code.rindex("=") + 1, len(code.rstrip("$\n"))
        return f"{code[:start]} 2 ({code[start:end]}){code[end:]}"
    number = number[0]
    at = number.start() + re.search("[1-9]", number[0]).start()
    return claim[:at] + ("8" if claim[at] == "9" else str(int(claim[at]) + 1)) + claim[at + 1 :]


@each_sheet
def test_every_sheet_names_its_source_and_states_its_expectation(path: Path) -> None:
    text = read(path)
    counts, lines = expectation(text)
    title = front_matter(text)
    assert title["sheet"] == path.stem
    assert len(title["source"]) > 10
    assert re.search(r"[Rr]ead at the source|second hand|read from", text), "who read the figures is not said"
    assert sum(counts.values()) > 0
    for verdict, number in counts.items():
        if verdict not in WITHOUT_LINES:
            assert len(lines.get(verdict, [])) == number, f"a line for every claim that is {verdict}"


def test_there_are_enough_published_sheets() -> None:
    assert len({front_matter(read(path))["sheet"] for path in SHEETS}) >= 25
    wrong = [path.stem for path in SHEETS if expectation(read(path))[0]["differs"]]
    assert len(wrong) >= 5, "published figures that are themselves wrong"


def test_the_page_of_evidence_lists_every_sheet_as_it_is() -> None:
    rows = [[cell.strip() for cell in row.split("|")[1:-1]] for row in read(DOCS).splitlines() if row.startswith("| [")]
    listed = {row[0].split("]")[0].lstrip("["): (row[1], row[3], row[4]) for row in rows}
    expected = {}
    for path in SHEETS:
        text = read(path)
        counts, _ = expectation(text)
        values = sum(n for verdict, n in counts.items() if verdict != "given")
        expected[path.stem] = (front_matter(text)["subject"], str(values), EXPECTATION.search(text)[1])
    assert listed == expected
