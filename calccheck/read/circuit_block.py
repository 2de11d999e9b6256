"""A circuit block, line by line: parts, the reference node, givens, cases; every line that cannot be read is told."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from calccheck.arithmetic import Amount, DimensionFault, Doubt
from calccheck.document import Block
from calccheck.model import Circuit, Element, Finding
from calccheck.read.cases import Case, read_case
from calccheck.read.names import NODE, WORD, Named, check_names, nearest, plain_name
from calccheck.read.part_lines import PartLine, split_line
from calccheck.read.parts import read_part
from calccheck.read.value_names import Scope, UnknownName
from calccheck.rules import RULES
from calccheck.source import Piece, Sheet, Span

_FIRST_WORD = re.compile(r"(reference|given|case)\b")
_REFERENCE = re.compile(rf"reference\s+({NODE})")
_GROUND = "gnd"
_LIKE_GROUND = re.compile(r"0|com|common|earth|[ad]?gnd|ground|vss|0v", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class CircuitReading:
    """What a circuit block holds.

    ``findings``: all of them by place, the errors standing in ``circuit.problems`` too. ``givens``: its ``given …`` statements,
    which are claims; ``cases``: its named cases.
    """

    circuit: Circuit
    findings: tuple[Finding, ...]
    givens: tuple[Piece, ...]
    cases: tuple[Case, ...]


@dataclass(frozen=True, slots=True)
class _Statement:
    """A line and what of it stands before a comment; ``word`` where it starts with a word of the language."""

    line: Piece
    body: Piece
    word: str


def given_lines(fence: Block) -> tuple[Piece, ...]:
    """The ``given …`` statements of a circuit block; they are worked out before the values that use them."""
    return tuple(s.body for s in _statements(fence.lines) if s.word == "given")


def read_circuit(fence: Block, givens: Mapping[str, Amount], sheet: Sheet) -> CircuitReading:
    """A ``circuit`` fence of ``sheet`` as a circuit. ``givens``: what the names in values stand for."""
    statements = _statements(fence.lines)
    found: list[Finding] = []
    parts = _split(statements, found)
    complete = not found  # else an unknown name may stand on a line that could not be read, which is told already
    reference = _reference(statements, parts, fence, found, complete)
    scope = Scope({p.name: p.ends for p in parts}, {name for p in parts for name, _ in p.nodes}, reference, givens)
    elements = _elements(parts, scope, sheet, found, complete)
    cases = _cases(statements, scope, found, complete)
    found += check_names([Named(p.name, p.name_span, p.line) for p in parts], _first_nodes(parts), sheet)
    if not any(not s.word for s in statements):
        found.append(_finding("circuit-line", "no part stands in this circuit block", _place(fence)))
    name = _name(fence, sheet, found)
    findings = tuple(sorted(found, key=lambda f: (f.span.start, f.span.end, f.kind, f.message)))
    problems = tuple(f for f in findings if f.severity == "error")
    circuit = Circuit(name, tuple(elements), reference, _place(fence), problems)
    return CircuitReading(circuit, findings, tuple(s.body for s in statements if s.word == "given"), cases)


def _statements(lines: Sequence[Piece]) -> list[_Statement]:
    found = []
    for line in lines:
        body = line.part(0, len(line.text.partition("#")[0])).strip()
        if body.text:
            word = _FIRST_WORD.match(body.text)
            found.append(_Statement(line, body, word[1] if word else ""))
    return found


def _place(fence: Block) -> Span:
    """The fence's content, or the whole fence where it has none."""
    if not fence.lines:
        return fence.span
    return Span(fence.lines[0].span().start, fence.lines[-1].span().end)


def _finding(kind: str, message: str, span: Span, suggestion: str = "") -> Finding:
    return Finding(kind, RULES[kind].severity, message, span, suggestion)


# --- parts ----------------------------------------------------------------------------------------------------------


def _split(statements: Sequence[_Statement], found: list[Finding]) -> list[PartLine]:
    parts = []
    for s in statements:
        if s.word:
            continue
        try:
            parts.append(split_line(s.line, s.body))
        except (Doubt, DimensionFault) as fault:
            found.append(_trouble(fault, s.line, s.body))
    return parts


def _elements(
    parts: Sequence[PartLine], scope: Scope, sheet: Sheet, found: list[Finding], complete: bool
) -> list[Element]:
    elements = []
    for part in parts:
        try:
            element, remarks = read_part(part, scope, sheet)
        except UnknownName as fault:
            if complete:
                found.append(_finding("circuit-line", fault.reason, fault.span or part.body.span()))
        except (Doubt, DimensionFault) as fault:
            found.append(_trouble(fault, part.line, part.body, scope))
        else:
            elements.append(element)
            found += remarks
    return elements


def _first_nodes(parts: Sequence[PartLine]) -> list[Named]:
    first: dict[str, Named] = {}
    for part in parts:
        for name, span in part.nodes:
            first.setdefault(name, Named(name, span))
    return list(first.values())


def _trouble(fault: Doubt | DimensionFault, line: Piece, body: Piece, scope: Scope | None = None) -> Finding:
    """What is wrong with a line, with the corrected line where a usual slip of the pen explains it."""
    if isinstance(fault, DimensionFault):
        return _finding("dimension", fault.reason, fault.span)
    from calccheck.read.mending import mended  # late: its table costs more than reading a whole sheet

    mend = mended(line, lambda text: _reads(text, scope))
    if mend:
        return _finding("circuit-line", mend.reason, mend.span, mend.line)
    return _finding("circuit-line", fault.reason, _within(fault.span, body))


def _within(span: Span | None, body: Piece) -> Span:
    """The place of a fault; what is missing behind the end of a statement is shown at its last character."""
    whole = body.span()
    if span is None:
        return whole
    end = min(span.end, whole.end)
    return Span(min(span.start, end - 1), end)


def _reads(line: Piece, scope: Scope | None) -> bool:
    """Whether a corrected line would read."""
    statements = _statements([line])
    if len(statements) != 1 or statements[0].word:
        return bool(statements) and _REFERENCE.fullmatch(statements[0].body.text) is not None
    try:
        part = split_line(line, statements[0].body)
        read_part(part, scope or Scope({}, {name for name, _ in part.nodes}, _GROUND, {}), Sheet("", line.text))
    except UnknownName:
        return True
    except (Doubt, DimensionFault):
        return False
    return True


# --- the other statements -------------------------------------------------------------------------------------------


def _reference(
    statements: Sequence[_Statement], parts: Sequence[PartLine], fence: Block, found: list[Finding], complete: bool
) -> str:
    """The reference node, empty where none is to be had."""
    nodes = Counter(name for p in parts for name, _ in p.nodes)
    stated = [s for s in statements if s.word == "reference"]
    for s in stated[1:]:
        found.append(_finding("circuit-line", "a circuit has one reference; this is the second", s.body.span()))
    if stated:
        return _stated_reference(stated[0], nodes, found, complete)
    if _GROUND in nodes or not parts:
        return _GROUND
    usual = [n for n in nodes if _LIKE_GROUND.fullmatch(n)] or [n for n, _ in nodes.most_common(1)]
    message = "no reference node: write reference NODE, or call a node gnd"
    place = fence.lines[0] if fence.lines else None
    found.append(_finding("circuit-line", message, place.span() if place else fence.span, f"reference {usual[0]}"))
    return ""


def _stated_reference(s: _Statement, nodes: Counter[str], found: list[Finding], complete: bool) -> str:
    m = _REFERENCE.fullmatch(s.body.text)
    if m is None:
        found.append(_trouble(Doubt(f"expected reference NODE, found {s.body.text}"), s.line, s.body))
        return ""
    name = plain_name(m[1])
    if name not in nodes and complete:
        near = nearest(name, nodes)
        lead = len(s.line.text) - len(s.line.text.lstrip())
        mend = s.line.text[: lead + m.start(1)] + near + s.line.text[lead + m.end(1) :] if near else ""
        message = f"the reference {name} is no node of this circuit" + (f"; is {near} meant?" if near else "")
        found.append(_finding("circuit-line", message, s.body.span(*m.span(1)), mend))
    return name


def _cases(statements: Sequence[_Statement], scope: Scope, found: list[Finding], complete: bool) -> tuple[Case, ...]:
    cases: dict[str, Case] = {}
    for s in statements:
        if s.word != "case":
            continue
        try:
            case = read_case(s.body, scope.parts, complete)
        except (Doubt, DimensionFault) as fault:
            found.append(_finding("circuit-line", str(fault), _within(fault.span, s.body)))
            continue
        if case.name in cases:
            found.append(_finding("circuit-name", f"two cases are called {case.name}", case.span))
        cases.setdefault(case.name, case)
    return tuple(cases.values())


def _name(fence: Block, sheet: Sheet, found: list[Finding]) -> str:
    """The circuit's name: the second word of the fence's info string."""
    name = [*fence.info.split(), "", ""][1]
    if name and not re.fullmatch(WORD, name):
        start = max(sheet.text.find(name, fence.span.start, fence.span.end), fence.span.start)
        message = f"{name} is no name; a circuit's name is a letter, then letters, digits and _"
        found.append(_finding("circuit-name", message, Span(start, start + len(name))))
    return name
