"""Reading circuit blocks in tests: real fences from a page, and where each finding stands."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction

from calccheck.arithmetic import Amount
from calccheck.document import Block, blocks
from calccheck.read.circuit_block import CircuitReading, read_circuit
from calccheck.read.markdown import read_page
from calccheck.source import Sheet, Span, whole

Placed = tuple[int, int, str]  # line in the block from 1, column from 1, the text that the span covers


def reading(
    lines: str, givens: Mapping[str, Amount] | None = None, info: str = "circuit", hertz: Fraction = Fraction(0)
) -> tuple[Sheet, CircuitReading]:
    """The block that a fence of these lines holds; its first line is line 2 of the sheet."""
    sheet = Sheet("sheet.md", f"```{info}\n{lines}\n```\n")
    fence = next(b for b in blocks(read_page(sheet.text)) if b.kind == "fence")
    return sheet, read_circuit(fence, givens or {}, sheet, hertz)


def made_reading(text: str) -> tuple[Sheet, CircuitReading]:
    """The same of any text at all, without a page around it."""
    sheet = Sheet("sheet.md", text)
    lines, offset = [], 0
    for line in text.split("\n"):
        lines.append(whole(line, offset))
        offset += len(line) + 1
    fence = Block("fence", Span(0, len(text)), lines=tuple(lines), info="circuit")
    return sheet, read_circuit(fence, {}, sheet)


def placed(sheet: Sheet, span: Span) -> Placed:
    """Where a span stands in the block."""
    line, column = sheet.line_column(span.start)
    return line - 1, column, sheet.text[span.start : span.end]


def kinds(result: CircuitReading) -> list[str]:
    """The kinds of all findings."""
    return [f.kind for f in result.findings]
