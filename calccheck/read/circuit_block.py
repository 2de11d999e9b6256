"""A circuit block, line by line: parts, the reference node, givens, cases; every line that cannot be read is told."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction

from calccheck.arithmetic import Amount, DimensionFault, Doubt
from calccheck.document import Block
from calccheck.formula import references
from calccheck.model import Case, Circuit, Element, Finding
from calccheck.read.frequencies import with_frequencies
from calccheck.read.names import WORD, Named, check_names, nearest, plain_name
from calccheck.read.part_lines import PartLine, split_line
from calccheck.read.parts import read_part, write_part
from calccheck.read.statements import GROUND, REFERENCE, Statement, finding, statements_of, trouble, within
from calccheck.read.symbols import Written, declared
from calccheck.read.value_names import Scope, UnknownName
from calccheck.source import Piece, Sheet, Span

_LIKE_GROUND = re.compile(r"0|com|common|earth|[ad]?gnd|ground|vss|0v", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class CircuitReading:
    """What a circuit block holds.

    ``findings``: all of them by place, the errors standing in ``circuit.problems`` too. ``givens``: its ``given …`` statements,
    which are claims.
    """

    circuit: Circuit
    findings: tuple[Finding, ...]
    givens: tuple[Piece, ...]


def given_lines(fence: Block) -> tuple[Piece, ...]:
    """The ``given …`` statements of a circuit block; they are worked out before the values that use them."""
    return tuple(s.body for s in statements_of(fence.lines) if s.word == "given")


def read_circuit(
    fence: Block, givens: Mapping[str, Amount], sheet: Sheet, hertz: Fraction = Fraction(0)
) -> CircuitReading:
    """A ``circuit`` fence of ``sheet`` as a circuit.

    ``givens``: what the names in values stand for. ``hertz``: the sheet's frequency for phasors without one, 0 for none.
    """
    statements = statements_of(fence.lines)
    found: list[Finding] = []
    parts = _split(statements, found)
    complete = not found  # else an unknown name may stand on a line that could not be read, which is told already
    reference = _reference(statements, parts, fence, found, complete)
    scope = Scope({p.name: p for p in reversed(parts)}, {name for p in parts for name, _ in p.nodes}, reference, givens)
    drafts = _drafts(parts, scope, found, complete)
    scope = replace(scope, symbols=declared(w for _, w in drafts if w is not None))
    elements, faults = with_frequencies(_elements(drafts, scope, found, complete), hertz)
    found += faults
    cases = _cases(statements, elements, scope, found, complete)
    symbols = _symbols(elements, scope)
    found += check_names([Named(p.name, p.name_span, p.line) for p in parts], _first_nodes(parts), symbols, sheet)
    if not any(not s.word for s in statements):
        found.append(finding("circuit-line", "no part stands in this circuit block", _place(fence)))
    name = _name(fence, sheet, found)
    findings = tuple(sorted(found, key=lambda f: (f.span.start, f.span.end, f.kind, f.message)))
    circuit = Circuit(
        name, tuple(elements), reference, _place(fence), tuple(f for f in findings if f.severity == "error"),
        tuple((s.name, scope.symbols[s.name]) for s in symbols), cases,
    )  # fmt: skip
    return CircuitReading(circuit, findings, tuple(s.body for s in statements if s.word == "given"))


def _place(fence: Block) -> Span:
    """The fence's content, or the whole fence where it has none."""
    if not fence.lines:
        return fence.span
    return Span(fence.lines[0].span().start, fence.lines[-1].span().end)


# --- parts ----------------------------------------------------------------------------------------------------------


def _split(statements: Sequence[Statement], found: list[Finding]) -> list[PartLine]:
    parts = []
    for s in statements:
        if s.word:
            continue
        try:
            parts.append(split_line(s.line, s.body))
        except (Doubt, DimensionFault) as fault:
            found.append(trouble(fault, s.line, s.body))
    return parts


def _drafts(
    parts: Sequence[PartLine], scope: Scope, found: list[Finding], complete: bool
) -> list[tuple[PartLine, Written | None]]:
    """The parts whose values parse, each with its value."""
    drafts = []
    for part in parts:
        try:
            drafts.append((part, write_part(part, scope)))
        except (Doubt, DimensionFault) as fault:
            _tell(fault, part, scope, found, complete)
    return drafts


def _elements(
    drafts: Sequence[tuple[PartLine, Written | None]], scope: Scope, found: list[Finding], complete: bool
) -> list[Element]:
    elements = []
    for part, written in drafts:
        try:
            element, remarks = read_part(part, written, scope)
        except (Doubt, DimensionFault) as fault:
            _tell(fault, part, scope, found, complete)
        else:
            elements.append(element)
            found += remarks
    return elements


def _tell(fault: Doubt | DimensionFault, part: PartLine, scope: Scope, found: list[Finding], complete: bool) -> None:
    if not isinstance(fault, UnknownName):
        found.append(trouble(fault, part.line, part.body, scope))
    elif complete:
        found.append(finding("circuit-line", fault.reason, fault.span or part.body.span()))


def _symbols(elements: Sequence[Element], scope: Scope) -> list[Named]:
    """The free symbols in the values of parts, each at its first place, in the order of the block."""
    first: dict[str, Named] = {}
    for e in elements:
        for r in references(e.formula) if e.formula is not None else ():
            first.setdefault(r.word, Named(r.word, r.span))
    return list(first.values())


def _first_nodes(parts: Sequence[PartLine]) -> list[Named]:
    first: dict[str, Named] = {}
    for part in parts:
        for name, span in part.nodes:
            first.setdefault(name, Named(name, span))
    return list(first.values())


# --- the other statements -------------------------------------------------------------------------------------------


def _reference(
    statements: Sequence[Statement], parts: Sequence[PartLine], fence: Block, found: list[Finding], complete: bool
) -> str:
    """The reference node, empty where none is to be had."""
    nodes = Counter(name for p in parts for name, _ in p.nodes)
    stated = [s for s in statements if s.word == "reference"]
    for s in stated[1:]:
        found.append(finding("circuit-line", "a circuit has one reference; this is the second", s.body.span()))
    if stated:
        return _stated_reference(stated[0], nodes, found, complete)
    if GROUND in nodes or not parts:
        return GROUND
    usual = [n for n in nodes if _LIKE_GROUND.fullmatch(n)] or [n for n, _ in nodes.most_common(1)]
    message = "no reference node: write reference NODE, or call a node gnd"
    place = fence.lines[0] if fence.lines else None
    found.append(finding("circuit-line", message, place.span() if place else fence.span, f"reference {usual[0]}"))
    return ""


def _stated_reference(s: Statement, nodes: Counter[str], found: list[Finding], complete: bool) -> str:
    m = REFERENCE.fullmatch(s.body.text)
    if m is None:
        found.append(trouble(Doubt(f"expected reference NODE, found {s.body.text}"), s.line, s.body))
        return ""
    name = plain_name(m[1])
    if name not in nodes and complete:
        near = nearest(name, nodes)
        lead = len(s.line.text) - len(s.line.text.lstrip())
        mend = s.line.text[: lead + m.start(1)] + near + s.line.text[lead + m.end(1) :] if near else ""
        message = f"the reference {name} is no node of this circuit" + (f"; is {near} meant?" if near else "")
        found.append(finding("circuit-line", message, s.body.span(*m.span(1)), mend))
    return name


def _cases(
    statements: Sequence[Statement], elements: Sequence[Element], scope: Scope, found: list[Finding], complete: bool
) -> tuple[Case, ...]:
    if not any(s.word == "case" for s in statements):
        return ()
    from calccheck.read.cases import read_case  # late: few circuits have cases

    cases: dict[str, Case] = {}
    named = {e.name: e for e in reversed(elements)}
    for s in statements:
        if s.word != "case":
            continue
        try:
            case = read_case(s.body, named, scope, complete)
        except DimensionFault as fault:
            found.append(finding("dimension", fault.reason, fault.span))
        except Doubt as fault:
            found.append(finding("circuit-line", str(fault), within(fault.span, s.body)))
        else:
            if case.name in cases:
                found.append(finding("circuit-name", f"two cases are called {case.name}", case.span))
            cases.setdefault(case.name, case)
    return tuple(cases.values())


def _name(fence: Block, sheet: Sheet, found: list[Finding]) -> str:
    """The circuit's name: the second word of the fence's info string."""
    name = [*fence.info.split(), "", ""][1]
    if name and not re.fullmatch(WORD, name):
        start = max(sheet.text.find(name, fence.span.start, fence.span.end), fence.span.start)
        message = f"{name} is no name; a circuit's name is a letter, then letters, digits and _"
        found.append(finding("circuit-name", message, Span(start, start + len(name))))
    return name
