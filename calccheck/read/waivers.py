"""Waivers: ``accept 2.71 A for 2.66 A "measured, TR-7" by QD until 2027-03-01``, behind the claim they accept."""

from __future__ import annotations

import re
from datetime import date

from calccheck.arithmetic import Doubt
from calccheck.model import Waiver
from calccheck.read.expression import parse_value
from calccheck.source import Piece, Span

_LEAD = re.compile(r"\s*(?:<!--\s*calccheck:\s*)?(?=accept\b)|\s*<!--\s*calccheck:")
_WAIVER = re.compile(
    r"""accept\s+(?P<printed>.+?)\s+for\s+(?P<computed>.+?)\s+["“”](?P<reason>[^"“”]*)["“”]
        \s+by\s+(?P<by>\S.*?)(?:\s+until\s+(?P<until>\S+))?\s*(?:-->)?\s*$""",
    re.VERBOSE | re.DOTALL,
)
FORM = 'accept PRINTED for COMPUTED "REASON" by NAME until YYYY-MM-DD'


def waiver_text(text: str) -> bool:
    """Whether a comment means to be a waiver."""
    return _LEAD.match(text) is not None


def read_waiver(piece: Piece, span: Span) -> Waiver:
    """The waiver in a comment. Raises ``Doubt`` with the form where it cannot be read."""
    lead = _LEAD.match(piece.text)
    start = lead.end() if lead else 0
    m = _WAIVER.match(piece.text, len(piece.text) - len(piece.text[start:].lstrip()))
    if m is None:
        raise Doubt("a waiver is written: " + FORM, span, FORM)
    if not m["reason"].strip():
        raise Doubt("a waiver gives its reason in quotes", span)
    return Waiver(
        parse_value(piece.part(*m.span("printed"))),
        parse_value(piece.part(*m.span("computed"))),
        m["reason"].strip(),
        m["by"].strip(),
        _day(m["until"], span),
        span,
        re.sub(r"\s+", " ", m.group()).removesuffix("-->").strip(),
    )


def _day(text: str | None, span: Span) -> date | None:
    if text is None:
        return None
    try:
        return date.fromisoformat(text)
    except ValueError:
        raise Doubt(f"{text} is no day; write it as 2027-03-01", span) from None
