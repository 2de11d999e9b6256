"""Sheets in our own language with the verdicts worked by hand: every claim and every finding held against them.

A case ends in its expectation, an HTML comment:

    <!-- expect
    12 agrees
    2 given
    14:79 differs comes to 7.5625 V
    15:3 agrees coarse
    21:62 finding dimension added to
    -->

First the number of claims that simply agree and of assumptions; then, by line and column, every claim that does not simply
agree, with its verdict and words of its message (of a caution, where it agrees with one), and every finding with its kind and
words of its message. Nothing more, nothing less. The arithmetic behind a verdict stands in the sheet.
"""

from __future__ import annotations

import re
from collections import Counter
from datetime import date
from pathlib import Path

import pytest

from calccheck import Settings, check_text
from calccheck.model import Report

CASES = sorted((Path(__file__).parent / "cases").glob("*.md"))
DAY = date(2026, 12, 1)
_EXPECTATION = re.compile(r"<!-- expect\n(.*)-->\n\Z", re.DOTALL)
_PLACED = re.compile(r"(\d+:\d+) (finding [\w-]+|\w+) (.+)")
_COUNT = re.compile(r"(\d+) (agrees|given)")


def expectation(text: str) -> tuple[Counter[str], list[tuple[str, str, str]]]:
    """Numbers of claims that simply agree and of assumptions; place, verdict or kind, and words of all else."""
    found = _EXPECTATION.search(text)
    assert found, "a case ends in its expectation"
    counts: Counter[str] = Counter()
    placed = []
    for line in found[1].splitlines():
        count, item = _COUNT.fullmatch(line), _PLACED.fullmatch(line)
        if count:
            counts[count[2]] += int(count[1])
        else:
            assert item, f"not understood: {line}"
            placed.append((item[1], item[2], item[3]))
    return counts, placed


def told(report: Report) -> tuple[Counter[str], list[tuple[str, str, str]]]:
    """What the report says, in the same form, all messages and cautions whole."""
    counts: Counter[str] = Counter()
    placed = []
    for j in report.claims:
        simple = j.verdict in ("agrees", "given") and not j.cautions
        if simple:
            counts[j.verdict] += 1
        else:
            words = " · ".join([j.message, *j.cautions]) if j.verdict != "agrees" else " · ".join(j.cautions)
            placed.append((_place(report, j.claim.span.start), j.verdict, words))
    placed += [
        (_place(report, f.span.start), f"finding {f.kind}", f"{f.message} {f.suggestion}") for f in report.findings
    ]
    return counts, placed


def _place(report: Report, offset: int) -> str:
    line, column = report.reading.sheet.line_column(offset)
    return f"{line}:{column}"


def _by_place(items: list[tuple[str, str, str]]) -> list[tuple[str, str, str]]:
    return sorted(items, key=lambda item: ([int(n) for n in item[0].split(":")], item[1]))


@pytest.mark.parametrize("path", CASES, ids=lambda p: p.stem)
def test_case(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    report = check_text(path.name, text, Settings(on=DAY))
    counts, placed = told(report)
    expected_counts, expected = expectation(text)
    everything = "\n".join(f"{place} {kind} {words}" for place, kind, words in _by_place(placed))
    assert [item[:2] for item in _by_place(placed)] == [item[:2] for item in _by_place(expected)], everything
    assert counts == expected_counts, everything
    for (place, kind, words), (_, _, fragment) in zip(_by_place(placed), _by_place(expected), strict=True):
        assert fragment in words, f"{place} {kind}: {words}"


def test_there_are_cases() -> None:
    assert len(CASES) >= 15


def test_an_expectation_that_is_not_met_fails() -> None:
    """The runner itself: a claim or finding too many or too few, a wrong place and a wrong word are all seen."""
    text = "```circuit\nreference com\nVb: 12 V, a to com\nR1: 1 kΩ, a to com\n```\n`I_R1 = 12 mA`, `I_R1 = 13 mA`\n\n<!-- expect\n1 agrees\n6:17 differs comes to 12 mA\n-->\n"
    report = check_text("x.md", text)
    counts, placed = told(report)
    assert (counts, [p[:2] for p in placed]) == (expectation(text)[0], [p[:2] for p in expectation(text)[1]])
    assert "comes to 12 mA" in placed[0][2]
    for wrong in (
        text.replace("1 agrees", "2 agrees"),
        text.replace("6:17", "6:19"),
        text.replace("6:17 differs comes to 12 mA\n", ""),
    ):
        assert (counts, [p[:2] for p in placed]) != (expectation(wrong)[0], [p[:2] for p in expectation(wrong)[1]])
