"""The page of the sheet language: every example in it is read and checked as the page says, every anchor to it exists.

An example is a fence behind a comment ``<!-- example NAME -->``; one behind ``<!-- example on NAME -->`` stands below the
circuits of that one. In ``circuit`` and ``working`` fences a comment that begins with a verdict, ``error`` or ``caution`` says
what is made of its line (``caution``: it stands, with a caution), of a circuit's in the program's own words; a line without one
agrees, or is read without a finding. A ``markdown`` fence is counted instead, by
the comment before it: ``: 2 agrees; 1 rounded; 1 caution``.
"""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path

import pytest

from calccheck import Report, check_text
from calccheck.document import Block, blocks
from calccheck.model import Judged
from calccheck.read.markdown import read_page
from calccheck.rules import RULES

DOCS = Path(__file__).parent.parent / "docs"
PAGE = DOCS / "sheet-language.md"
TEXT = PAGE.read_text(encoding="utf-8")
COMMENT = re.compile(r"<!-- example (?:on (?P<on>\w+)|(?P<name>\w+))(?:: (?P<counts>[^>]+))? -->")
SAID = re.compile(r"#\s*(?P<kind>agrees|rounded|differs|unchecked|given|error|caution)\b(?:: (?P<why>.+))?")
COUNT = re.compile(r"(\d+) (agrees|rounded|differs|unchecked|accepted|given|errors?|cautions?)")


@dataclass(frozen=True)
class Example:
    """A fence of the page with what its comment says, as a whole sheet; its own part of that starts at ``line`` (from 1)."""

    label: str
    sheet: str
    line: int
    kind: str
    counts: str


def fence_text(block: Block) -> str:
    return "\n".join(piece.text for piece in block.lines) + "\n"


def examples() -> list[Example]:
    page = read_page(TEXT)
    found: list[Example] = []
    named: dict[str, str] = {}
    for before, fence in pairwise(page):
        comment = COMMENT.fullmatch(TEXT[before.span.start : before.span.end].strip())
        if fence.kind != "fence" or comment is None:
            continue
        line = TEXT.count("\n", 0, fence.span.start) + 1
        text = fence_text(fence)
        whole = text if fence.info == "markdown" else f"```{fence.info}\n{text}```\n"
        if comment["name"]:
            assert comment["name"] not in named, comment["name"]
            named[comment["name"]] = whole
        lead = circuits(named[comment["on"]]) if comment["on"] else ""
        found.append(Example(f"line {line}", lead + whole, lead.count("\n") + 1, fence.info, comment["counts"] or ""))
    return found


def circuits(sheet: str) -> str:
    """The circuit fences of a sheet, and its settings."""
    front = re.match(r"---\n.*?\n---\n", sheet, re.DOTALL)
    fences = [b for b in blocks(read_page(sheet)) if b.kind == "fence" and b.info.startswith("circuit")]
    return (front[0] if front else "") + "".join(f"```{b.info}\n{fence_text(b)}```\n\n" for b in fences)


EXAMPLES = examples()


def word(j: Judged) -> str:
    return "caution" if j.cautions and j.verdict in ("agrees", "rounded") else j.verdict


def told(report: Report, start: int) -> list[tuple[int, int, str, str]]:
    """First and last line, verdict or severity, and message of all that is said from a line on."""
    at = report.reading.sheet.line_column
    claims = [(j.claim.span, word(j), f"{j.claim.text}: {j.message} {j.cautions}") for j in report.claims]
    findings = [(f.span, f.severity, f.message) for f in report.findings if f.kind != "dimension"]
    spans = [(at(s.start)[0], at(max(s.end - 1, s.start))[0], kind, m) for s, kind, m in [*claims, *findings]]
    return [s for s in spans if s[0] >= start]


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda e: e.label)
def test_examples_are_checked_as_the_page_says(example: Example) -> None:
    report = check_text("page.md", example.sheet)
    said = told(report, example.line)
    if example.kind == "markdown":
        counts = Counter(
            {m[2].rstrip("s") if m[2][0] in "ec" else m[2]: int(m[1]) for m in COUNT.finditer(example.counts)}
        )
        assert Counter(kind for _, _, kind, _ in said) == counts, said
        return
    lines = example.sheet.split("\n")
    for first, last, kind, message in said:
        comment = next((m for text in lines[first - 1 : last] if (m := SAID.search(text))), None)
        expected = (kind,) if comment and comment["kind"] == kind else () if comment else ("agrees", "given")
        assert kind in expected, (lines[first - 1], kind, message)
        if comment and example.kind == "circuit":
            assert comment["why"] in message
    covered = {n for first, last, _, _ in said for n in range(first, last + 1)}
    for number, text in enumerate(lines[example.line - 1 :], example.line):
        assert not SAID.search(text) or number in covered, f"nothing is said of: {text}"
    if example.kind == "working":
        assert said


def test_every_fence_of_the_page_is_an_example() -> None:
    fences = [b for b in read_page(TEXT) if b.kind == "fence" and b.info.split()[:1] != ["text"]]
    assert len(fences) == len(EXAMPLES) > 15


def anchors(text: str) -> set[str]:
    """The anchors of a page's headings, as forges make them: small letters, blanks as hyphens, punctuation left out."""
    headings = re.findall(
        r"^#+ (.+)$", re.sub(r"^(`{3,}).*?^\1$", "", text, flags=re.MULTILINE | re.DOTALL), re.MULTILINE
    )
    return {re.sub(r"[^\w\- ]", "", h.lower()).replace(" ", "-") for h in headings}


@pytest.mark.parametrize(
    "page", sorted({r.anchor.partition("#")[0] for r in RULES.values() if (DOCS / r.anchor.partition("#")[0]).exists()})
)
def test_anchors_of_findings_exist(page: str) -> None:
    wanted = {r.anchor.partition("#")[2] for r in RULES.values() if r.anchor.startswith(f"{page}#")}
    assert wanted
    assert wanted <= anchors((DOCS / page).read_text(encoding="utf-8"))


def test_this_page_is_among_them() -> None:
    assert PAGE.exists() and any(r.anchor.startswith("sheet-language.md#") for r in RULES.values())
