"""Statements of a circuit block: lines without their comments, and what is said of one that cannot be read."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace

from calccheck.arithmetic import DimensionFault, Doubt
from calccheck.model import Finding
from calccheck.read.names import NODE
from calccheck.read.part_lines import split_line
from calccheck.read.parts import read_part, write_part
from calccheck.read.symbols import declared
from calccheck.read.value_names import Scope, UnknownName
from calccheck.rules import RULES
from calccheck.source import Piece, Span

REFERENCE = re.compile(rf"reference\s+({NODE})")
GROUND = "gnd"
_FIRST_WORD = re.compile(r"(reference|given|case)\b")


@dataclass(frozen=True, slots=True)
class Statement:
    """A line and what of it stands before a comment; ``word`` where it starts with a word of the language."""

    line: Piece
    body: Piece
    word: str


def statements_of(lines: Sequence[Piece]) -> list[Statement]:
    """The lines that hold more than a comment."""
    found = []
    for line in lines:
        body = line.part(0, len(line.text.partition("#")[0])).strip()
        if body.text:
            word = _FIRST_WORD.match(body.text)
            found.append(Statement(line, body, word[1] if word else ""))
    return found


def finding(kind: str, message: str, span: Span, suggestion: str = "") -> Finding:
    """A finding of this stage."""
    return Finding(kind, RULES[kind].severity, message, span, suggestion)


def trouble(fault: Doubt | DimensionFault, line: Piece, body: Piece, scope: Scope | None = None) -> Finding:
    """What is wrong with a line, with the corrected line where a usual slip of the pen explains it."""
    if isinstance(fault, DimensionFault):
        return finding("dimension", fault.reason, fault.span)
    from calccheck.read.mending import mended  # late: its table costs more than reading a whole sheet

    mend = mended(line, lambda text: _reads(text, scope))
    if mend:
        return finding("circuit-line", mend.reason, mend.span, mend.line)
    return finding("circuit-line", fault.reason, within(fault.span, body))


def within(span: Span | None, body: Piece) -> Span:
    """The place of a fault; what is missing behind the end of a statement is shown at its last character."""
    whole = body.span()
    if span is None:
        return whole
    end = min(span.end, whole.end)
    return Span(min(span.start, end - 1), end)


def _reads(line: Piece, scope: Scope | None) -> bool:
    """Whether a corrected line would read."""
    statements = statements_of([line])
    if len(statements) != 1 or statements[0].word:
        return bool(statements) and REFERENCE.fullmatch(statements[0].body.text) is not None
    try:
        part = split_line(line, statements[0].body)
        scope = scope or Scope({}, {name for name, _ in part.nodes}, GROUND, {})
        written = write_part(part, scope)
        own = declared([written]) if written is not None else {}
        read_part(part, written, replace(scope, symbols={**own, **scope.symbols}))
    except UnknownName:
        return True
    except (Doubt, DimensionFault):
        return False
    return True
