"""From a page to its claims: inline code, working fences, tables, assumptions; what looks like a claim is never passed over."""

from __future__ import annotations

import re
from collections.abc import Collection, Iterator, Sequence
from dataclasses import dataclass, field, replace

from calccheck.arithmetic import DimensionFault, Doubt
from calccheck.document import Block, Inline, blocks, inlines
from calccheck.formula import Node, Number, Unary
from calccheck.model import Claim, Finding, Place, Problem, Waiver
from calccheck.read.attributes import read_tolerance
from calccheck.read.expression import parse_chain
from calccheck.read.prose import prose_claims
from calccheck.read.tables import table_claims
from calccheck.read.waivers import read_waiver, waiver_text
from calccheck.rules import RULES
from calccheck.source import Piece, Span, joined
from calccheck.units import Dimension

RELATION = re.compile(r"[=≈<≤>≥≅≃∼＝]|~=|~\s?[-−+]?[\d.]")
_LEADS = re.compile(r"\s*(?:[=≈<≤>≥]|~=)")
_GIVEN = re.compile(r"\s*given\b\s*")
_FROM = re.compile(r"\s+from\s+(\S+)\s*$")
_MORE = re.compile(r"\s*(?=±|\+\s*[\d.]+\s*/)")


@dataclass(slots=True)
class Found:
    """What the reading of a page gathers."""

    claims: list[Claim] = field(default_factory=list)
    findings: list[Finding] = field(default_factory=list)
    not_read: int = 0


def read_claims(page: tuple[Block, ...], names: Collection[str], given_lines: Sequence[Sequence[Piece]]) -> Found:
    """Every claim of a page, in the page's order.

    ``names``: the names of all parts and nodes, by which claims in plain prose are known. ``given_lines``: of each circuit
    block in turn, its ``given`` statements.
    """
    found = Found()
    circuit = -1
    for block in blocks(page):
        if block.kind == "fence" and _word(block) == "circuit":
            circuit += 1
            found.claims += [assumption(p, "circuit", circuit) for p in given_lines[circuit]]
        elif block.kind == "fence" and _word(block) == "working":
            _working(found, block, circuit)
        elif block.kind in ("fence", "code", "html", "front matter"):
            _unread(found, block)
        elif block.kind == "table":
            _table(found, block, circuit, names)
        elif block.kind == "math":
            found.claims += _maths(joined(block.lines), block.span, circuit)
        elif block.kind in ("paragraph", "heading"):
            _text(found, block, circuit, names)
    return found


def _word(block: Block) -> str:
    return (block.info.split() or [""])[0]


def _unread(found: Found, block: Block) -> None:
    """A fence or HTML block that is not read; a waiver standing in one belongs to the claim before it."""
    if block.kind == "front matter":
        return
    text = joined(block.lines)
    if block.kind == "html" and waiver_text(text.text):
        _attach(found, text, block.span)
    else:
        found.not_read += 1


def statement(piece: Piece, place: Place, circuit: int, span: Span | None = None) -> Claim:
    """One chain or assumption. ``span``: its place where it is more than the piece itself, as code with its ticks."""
    if _GIVEN.match(piece.text):
        given = assumption(piece, place, circuit)
        return replace(given, span=span) if span else given
    piece = piece.strip()
    span = span or piece.span()
    try:
        members = parse_chain(piece)
    except Doubt as d:
        problem = Problem(d.reason, d.span or piece.span(), d.suggestion)
        return Claim(piece.text, span, place, circuit, problem=problem)
    if len(members) < 2:
        reason = "no relation here: a statement is a chain with =; a remark starts with #"
        return Claim(piece.text, span, place, circuit, problem=Problem(reason, piece.span()))
    return Claim(piece.text, span, place, circuit, members)


def assumption(piece: Piece, place: Place, circuit: int) -> Claim:
    """``given Vmax = 15 V ±2 %``, ``given Vbus = 12.52 V from TS-101``."""
    piece = piece.strip()
    claim = Claim(piece.text, piece.span(), place, circuit, given=True)
    lead = _GIVEN.match(piece.text)
    body = piece.part(lead.end() if lead else 0, len(piece.text))
    source = _FROM.search(body.text)
    if source:
        claim = replace(claim, from_sheet=source[1])
        body = body.part(0, source.start())
    more = _MORE.search(body.text)
    behind = body.part(more.end(), len(body.text)) if more else None
    try:
        members = parse_chain((body.part(0, more.start()) if more else body).strip())
        if behind is not None:
            claim = replace(claim, tolerance=read_tolerance(behind, _dimension(members[-1].node)))
    except Doubt as d:
        return replace(claim, problem=Problem(d.reason, d.span or claim.span, d.suggestion))
    except DimensionFault as f:
        return replace(claim, problem=Problem(f.reason, f.span))
    if len(members) < 2 or members[1].relation != "=":
        reason = "an assumption gives a name a value"
        return replace(claim, problem=Problem(reason, claim.span, "given NAME = VALUE UNIT"))
    return replace(claim, members=members)


def _dimension(node: Node) -> Dimension | None:
    """The dimension of a printed value; nothing of anything else."""
    inner = node.operand if isinstance(node, Unary) else node
    return inner.unit.dimension if isinstance(inner, Number) else None


# --- working fences -------------------------------------------------------------------------------------------------


def _working(found: Found, block: Block, circuit: int) -> None:
    if not block.closed:
        found.findings.append(
            _finding("fence", "this working fence is not closed by ```; all below is read as working", block.span)
        )
    for lines, waivers in _statements(block.lines):
        claim = statement(joined(lines), "working", circuit)
        found.claims.append(claim)
        for piece in waivers:
            _attach(found, piece, piece.span())


def _statements(lines: Sequence[Piece]) -> Iterator[tuple[list[Piece], list[Piece]]]:
    """The lines of each statement without their comments, and the waivers in those comments."""
    current: list[Piece] = []
    waivers: list[Piece] = []
    for line in lines:
        code, _, comment = line.text.partition("#")
        body = line.part(0, len(code)).strip()
        if body.text and current and not _LEADS.match(body.text):
            yield current, waivers
            current, waivers = [], []
        if body.text:
            current.append(body)
        if current and waiver_text(comment):
            waivers.append(line.part(len(code) + 1, len(line.text)))
    if current:
        yield current, waivers


# --- text and tables ------------------------------------------------------------------------------------------------


def _text(found: Found, block: Block, circuit: int, names: Collection[str], first: int | None = None) -> None:
    """The claims in one paragraph, heading or cell, with the waivers that stand behind them.

    ``first``: index of the first claim that a waiver here may belong to; the block's own first where not given.
    """
    start = len(found.claims) if first is None else first
    for inline in inlines(block.inlines):
        if inline.text is None:
            continue
        if inline.kind == "code" and RELATION.search(inline.text.text):
            found.claims.append(statement(inline.text, "code", circuit, inline.span))
        elif inline.kind == "math":
            found.claims += _maths(inline.text, inline.span, circuit)
        elif inline.kind == "html":
            _html(found, inline, start)
    found.claims += prose_claims(block, names, circuit)
    if len(found.claims) > start + 1:
        found.claims[start:] = sorted(found.claims[start:], key=lambda c: c.span.start)


def _html(found: Found, inline: Inline, start: int) -> None:
    assert inline.text is not None
    if not waiver_text(inline.text.text):
        found.not_read += 1
    elif len(found.claims) > start:
        _attach(found, inline.text, inline.span)
    else:
        found.findings.append(
            _finding("waiver", "a waiver stands behind the claim that it accepts; none stands here", inline.span)
        )


def _table(found: Found, block: Block, circuit: int, names: Collection[str]) -> None:
    """A table of quantities, and the inline claims in the cells of any table."""
    cell_claims = table_claims(block, circuit)
    for cell in blocks(block.children):
        if cell.kind != "cell":
            continue
        start = len(found.claims)
        claim = cell_claims.get(cell.span.start)
        if claim is not None:
            found.claims.append(claim)
        _text(found, cell, circuit, names, start)


def _maths(text: Piece, span: Span, circuit: int) -> list[Claim]:
    """Dollar maths with a relation: a claim a statement."""
    from calccheck.read.maths import has_relation, rows  # late: many sheets hold no dollar maths

    if not has_relation(text.text):
        return []
    found = rows(text)
    return [_formula(p, p.span() if len(found) > 1 else span, circuit) for p in found if has_relation(p.text)]


def _formula(piece: Piece, span: Span, circuit: int) -> Claim:
    claim = Claim(" ".join(piece.text.split()), span, "math", circuit)
    from calccheck.read.maths import parse_maths

    try:
        return replace(claim, members=parse_maths(piece))
    except Doubt as d:
        return replace(claim, problem=Problem(d.reason, d.span or span, d.suggestion))


# --- waivers --------------------------------------------------------------------------------------------------------


def _attach(found: Found, text: Piece, span: Span) -> None:
    """Give the waiver to the claim just before it."""
    try:
        waiver: Waiver = read_waiver(text, span)
    except Doubt as d:
        found.findings.append(_finding("waiver", d.reason, d.span or span, d.suggestion))
        return
    if not found.claims:
        found.findings.append(
            _finding("waiver", "a waiver stands behind the claim that it accepts; none stands here", span)
        )
        return
    if found.claims[-1].waiver is not None:
        found.findings.append(_finding("waiver", "this claim has a waiver already", span))
        return
    found.claims[-1] = replace(found.claims[-1], waiver=waiver)


def _finding(kind: str, message: str, span: Span, suggestion: str = "") -> Finding:
    return Finding(kind, RULES[kind].severity, message, span, suggestion)
