"""Reports made by hand, so that the tests of the outputs do not rest on the judging they show."""

from __future__ import annotations

from calccheck.arithmetic import Amount, Doubt
from calccheck.model import Claim, Finding, Judged, Problem, Reading, Report, Settings
from calccheck.read.expression import parse_chain
from calccheck.read.markdown import read_page
from calccheck.rules import RULES
from calccheck.source import Piece, Sheet, Span, joined, whole


def report_of(
    text: str, *judged: Judged, findings: tuple[Finding, ...] = (), name: str = "sheets/TS-101.md", **more: object
) -> Report:
    """A report on a sheet with these verdicts."""
    sheet = Sheet(name, text)
    front = text.split("---\n")[1] if text.startswith("---\n") else ""
    title = {k.strip(): v.strip() for k, _, v in (line.partition(":") for line in front.splitlines())}
    claims = tuple(j.claim for j in judged)
    reading = Reading(sheet, read_page(text), True, title, Settings(), (), claims, findings, 0)
    return Report(reading, tuple(judged), findings, **more)  # type: ignore[arg-type]


def said(text: str, needle: str, verdict: str, nth: int = 0, **more: object) -> Judged:
    """The verdict on the claim that stands at the nth occurrence of these words, which may run over lines."""
    start = -1
    for _ in range(nth + 1):
        start = text.index(needle, start + 1)
    span = Span(start, start + len(needle))
    place = more.pop("place", "working")
    try:
        members = parse_chain(_joined_lines(needle, start))
    except Doubt as doubt:
        members, problem = (), Problem(str(doubt), span)
    else:
        problem = None
    claim = Claim(needle, span, place, 0, members, verdict == "given", problem=problem)  # type: ignore[arg-type]
    return Judged(claim, verdict, **more)  # type: ignore[arg-type]


def _joined_lines(text: str, start: int) -> Piece:
    pieces, at = [], start
    for line in text.split("\n"):
        pieces.append(whole(line, at))
        at += len(line) + 1
    return joined(pieces, " ")


def finding(text: str, needle: str, kind: str, message: str, suggestion: str = "") -> Finding:
    """A finding at the first occurrence of these words."""
    start = text.index(needle)
    return Finding(kind, RULES[kind].severity, message, Span(start, start + len(needle)), suggestion)


def amount(value: float, dimension: tuple[int, ...]) -> Amount:
    """A value in SI."""
    return Amount(value, dimension)
