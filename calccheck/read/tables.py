"""Tables of quantities: one edge holds quantities in code, the other qualifiers; each cell that reads as a value is a claim."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import cast

from calccheck.arithmetic import Doubt
from calccheck.document import Block, Inline
from calccheck.formula import (
    NO_QUALIFIERS,
    Binary,
    Call,
    Group,
    Node,
    Number,
    Prefix,
    Qualifiers,
    Range,
    Reference,
    Unary,
    references,
)
from calccheck.model import Claim, Member, Problem, Relation
from calccheck.read.expression import parse, parse_qualifiers, parse_value
from calccheck.read.words import QUALIFIER_WORDS
from calccheck.source import NOWHERE, Piece, joined
from calccheck.units import UNITS

_UNIT_TAIL = re.compile(r"\s*(?:\(([^()\s]+)\)|\[([^\[\]\s]+)\]|/\s*(\S+))\s*$")
_SHAPE = re.compile(r"(?:Isc|[VIPRZ])_(?:\{[^{}]*\}|\w+)")
_READS_AS_VALUE = re.compile(r"(?:[=≈<≤>≥~±]\s*)?[-−+]?\s?\.?\d[\d.,\s]*(?:[eE][-+]?\d+)?\s?([^\W\d]\w*|Ω|%|°C?)")
_RELATION = re.compile(r"(~=|<=|>=|[=≈<≤>≥])\s*")
_SIGN: dict[str, Relation] = {"~=": "≈", "<=": "≤", ">=": "≥"}
_NUMBER = re.compile(r"[-−+]?\s?\.?\d[\d.,\s]*(?:[eE][-+]?\d+)?")
_NOTHING = {"", "-", "–", "—", "−"}
_PLAIN_HEADERS = {"", "total", "value", "nominal", "calculated"}
HEADERS = "a qualifier (due to …, without …, with …), total, value, nominal, calculated, min, max, limit, unit"


@dataclass(frozen=True, slots=True)
class Edge:
    """What a header says of its column (or a first cell of its row)."""

    role: str  # "claim", "limit", "unit", "prose" or "doubt"
    qualifiers: Qualifiers = NO_QUALIFIERS
    prefix: Prefix = ""
    unit: str = ""
    text: str = ""
    reason: str = ""


@dataclass(frozen=True, slots=True)
class Subject:
    """The quantity of a row or column: its node, or why it cannot be read."""

    node: Node | None
    text: str
    unit: str = ""
    reason: str = ""
    suggestion: str = ""


_UNNAMED = Subject(None, "", reason="no quantity in code names this value: its row or column has none at its edge")


def table_claims(table: Block, circuit: int) -> dict[int, Claim]:
    """The claims of a table's cells, by the offset at which the cell begins; none where no edge holds quantities."""
    head, body = table.children[0], table.children[1:]
    spare = max((len(r.children) for r in body), default=0) - len(head.children)  # cells beyond the last header
    sides = {r.span.start: _subject(r.children[0]) for r in body if r.children}
    if any(sides.values()):
        edges = [*(_edge(c) for c in head.children), *[Edge("prose", text="(none)")] * spare]
        return _grid(body, circuit, lambda row, _: sides[row.span.start], lambda _, k: edges[k], edges)
    tops = [None, *(_subject(c) for c in head.children[1:]), *[None] * spare]
    if any(tops):
        return _grid(body, circuit, lambda _, k: tops[k], lambda row, _: _edge(row.children[0]), [])
    return {}


def _grid(
    body: tuple[Block, ...],
    circuit: int,
    subject_of: Callable[[Block, int], Subject | None],
    edge_of: Callable[[Block, int], Edge],
    edges: list[Edge],
) -> dict[int, Claim]:
    claims: dict[int, Claim] = {}
    units = [k for k, e in enumerate(edges) if e.role == "unit"]
    for row in body:
        row_unit = next((plain(row.children[k]).text for k in units if k < len(row.children)), "")
        for k, cell in enumerate(row.children[1:], 1):
            subject = subject_of(row, k) or _UNNAMED
            edge = edge_of(row, k)
            unit = edge.unit or subject.unit or row_unit
            claim = _claim(cell, subject, edge, unit, circuit)
            if claim is not None:
                claims[cell.span.start] = claim
    return claims


def _claim(cell: Block, subject: Subject, edge: Edge, unit: str, circuit: int) -> Claim | None:
    """The claim of one cell, or nothing where it claims nothing."""
    piece = plain(cell)
    own = _RELATION.match(piece.text)
    if piece.text in _NOTHING or edge.role == "unit" or _is_claim(cell):
        return None
    value_like = _READS_AS_VALUE.match(piece.text)
    if edge.role == "prose" or subject is _UNNAMED:
        bare_number = edge.unit and _NUMBER.fullmatch(piece.text)
        if not bare_number and (not value_like or value_like[1] not in UNITS):
            return None
        header = f"the header {edge.text!r} says nothing of this value; a header is {HEADERS}"
        reason = header if edge.role == "prose" else _UNNAMED.reason
        return Claim(piece.text, cell.span, "table", circuit, problem=Problem(reason, cell.span))
    relation: Relation = "≤" if edge.role == "limit" else "="
    if own:
        relation = _SIGN.get(own[1]) or cast(Relation, own[1])
        piece = piece.part(own.end(), len(piece.text))
    shown = f"{piece.text} {unit}" if unit and not re.search(r"[^\W\d]|[%°]", piece.text) else piece.text
    about = f"({subject.text})" if edge.prefix and isinstance(subject.node, Binary) else subject.text
    text = " ".join(f"{edge.prefix} {about} {edge.text} {relation} {shown}".split())
    if subject.node is None or edge.role == "doubt":
        problem = Problem(subject.reason or edge.reason, cell.span, subject.suggestion)
        return Claim(text, cell.span, "table", circuit, problem=problem)
    label = text.partition(f" {relation} ")[0]
    try:
        first = _prefixed(_qualified(subject.node, edge), edge, label)
        value = _with_unit(parse_value(piece), unit)
    except Doubt as d:
        problem = Problem(d.reason, d.span or cell.span, d.suggestion)
        return Claim(text, cell.span, "table", circuit, problem=problem)
    members = (Member("", first, label, cell.span), Member(relation, value, shown, cell.span))
    return Claim(text, cell.span, "table", circuit, members)


def _is_claim(cell: Block) -> bool:
    """Whether a cell holds a claim of its own in code: that is read as inline code is."""
    return any(i.kind == "code" and i.text is not None and _RELATION.search(i.text.text) for i in _runs(cell.inlines))


def _with_unit(node: Node, text: str) -> Node:
    """The value in the unit of its column or row where it has none of its own."""
    if not text:
        return node
    unit = parse(Piece("1 " + text, [NOWHERE] * (len(text) + 3)))
    if not isinstance(unit, Number) or not unit.unit.text:
        raise Doubt(f"the header's unit {text} is not known")
    match node:
        case Number() if not node.unit.text:
            return replace(node, unit=unit.unit, unit_words=unit.unit_words)
        case Unary():
            return replace(node, operand=_with_unit(node.operand, text))
        case Range():
            return replace(node, low=_with_unit(node.low, text), high=_with_unit(node.high, text))
    return node


def _prefixed(node: Node, edge: Edge, text: str) -> Node:
    """The quantity, or the whole formula in a bracket, behind the prefix that its row or column gives it."""
    if not edge.prefix:
        return node
    if isinstance(node, Reference) and not node.prefix:
        return replace(node, prefix=edge.prefix, text=f"{edge.prefix} {node.text}")
    return Reference(text, node.span, prefix=edge.prefix, text=text, bracket=(("", node),))


def _qualified(node: Node, edge: Edge) -> Node:
    """The quantity with the other edge's qualifiers on every reference in it."""
    match node:
        case Reference():
            return _reference(node, edge)
        case Unary():
            return replace(node, operand=_qualified(node.operand, edge))
        case Group():
            return replace(node, inner=_qualified(node.inner, edge))
        case Binary():
            return replace(node, left=_qualified(node.left, edge), right=_qualified(node.right, edge))
        case Call():
            return replace(node, arguments=tuple(_qualified(a, edge) for a in node.arguments))
    return node


def _reference(node: Reference, edge: Edge) -> Reference:
    mine, more = node.qualifiers, edge.qualifiers
    if more == NO_QUALIFIERS:
        return node
    both = [mine.due_to and more.due_to, mine.case and more.case, mine.circuit and more.circuit]
    if any(both) or (mine.frequency is not None and more.frequency is not None):
        raise Doubt("both edges of the table give the same qualifier", node.span)
    merged = Qualifiers(
        mine.due_to or more.due_to,
        (*mine.changes, *more.changes),
        mine.case or more.case,
        more.frequency if mine.frequency is None else mine.frequency,
        mine.circuit or more.circuit,
    )
    return replace(node, qualifiers=merged, text=f"{node.text} {edge.text}".strip())


def plain(cell: Block) -> Piece:
    """A cell's words without code ticks, emphasis, HTML and footnote marks."""
    return joined([i.text for i in _runs(cell.inlines) if i.text is not None], "").strip()


def _runs(found: tuple[Inline, ...]) -> list[Inline]:
    runs: list[Inline] = []
    for i in found:
        if i.kind in ("text", "code"):
            runs.append(i)
        runs += _runs(i.children)
    return runs


def _subject(cell: Block) -> Subject | None:
    """The quantity that an edge cell holds in code, with the unit written behind it; ``None`` where it holds none."""
    codes = [i.text for i in _runs(cell.inlines) if i.kind == "code" and i.text is not None]
    whole = plain(cell)
    if not codes:
        reason = "the quantity stands outside of code: put it in code"
        shaped = _SHAPE.fullmatch(whole.text)
        return Subject(None, whole.text, reason=reason, suggestion=f"`{whole.text}`") if shaped else None
    if (whole.text.split() or [""])[0] in QUALIFIER_WORDS:
        return None
    try:
        node = parse(codes[0])
    except Doubt as d:
        if _RELATION.search(codes[0].text) or not _SHAPE.match(codes[0].text):
            return None
        return Subject(None, whole.text, reason=d.reason, suggestion=d.suggestion)
    if not references(node):
        return None
    rest = whole.text.replace(codes[0].text, "", 1).strip()
    if len(codes) > 1 or any(word in QUALIFIER_WORDS for word in rest.split()):
        reason = "the quantity and its qualifiers stand apart: put them in one piece of code"
        return Subject(None, whole.text, reason=reason, suggestion=f"`{whole.text}`")
    tail = _UNIT_TAIL.search(rest)
    unit = next((g for g in tail.groups() if g), "") if tail else ""
    return Subject(node, codes[0].text, unit if unit in UNITS or _compound(unit) else "")


def _edge(cell: Block) -> Edge:
    """What a header, or the first cell of a row, says."""
    piece = plain(cell)
    tail = _UNIT_TAIL.search(piece.text)
    unit = next((g for g in tail.groups() if g), "") if tail else ""
    if tail is not None and unit not in UNITS and not _compound(unit):
        tail, unit = None, ""
    body = piece.part(0, tail.start()).strip() if tail else piece
    word = body.text.lower()
    if word in _PLAIN_HEADERS:
        return Edge("claim", unit=unit)
    if word in ("min", "max"):
        return Edge("claim", prefix=cast(Prefix, word), unit=unit)
    if word in ("limit", "unit"):
        return Edge(word, unit=unit, text=word if word == "unit" else "")
    if body.text.split()[0] in QUALIFIER_WORDS:
        try:
            return Edge("claim", parse_qualifiers(body), unit=unit, text=body.text)
        except Doubt as d:
            return Edge("doubt", text=body.text, reason=f"the header cannot be read: {d.reason}")
    return Edge("prose", unit=unit, text=piece.text)


def _compound(text: str) -> bool:
    """Whether a header's tail reads as a unit of several words."""
    try:
        node = parse(Piece("1 " + text, [NOWHERE] * (len(text) + 3)))
    except Doubt:
        return False
    return isinstance(node, Number) and bool(node.unit.text)
