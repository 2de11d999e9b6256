"""Reports as JSON for other programs: the form described in docs/report-json.md, whose version is ``FORM``."""

from __future__ import annotations

import json
import math
from collections.abc import Sequence
from hashlib import sha256
from typing import Any

from calccheck.arithmetic import Amount, DimensionFault, Doubt, Real, Value, evaluate, real
from calccheck.formula import Range, Reference
from calccheck.model import CircuitFigures, Finding, Judged, RatingHeld, Report, Step
from calccheck.source import Sheet, Span
from calccheck.units import Dimension, unit_of

FORM = 1
SURROGATES = {code: f"\\u{code:04x}" for code in range(0xD800, 0xE000)}  # odd bytes of a file name
Record = dict[str, Any]


def to_json(reports: Sequence[Report], program: str) -> str:
    """The JSON text, ``program`` being the program's version. Files that are no calc sheets are counted and not listed."""
    sheets = [r for r in reports if r.reading.is_calc]
    record = {
        "report": FORM,
        "program": program,
        "summary": summary(sheets, len(reports) - len(sheets)),
        "sheets": [_sheet(r) for r in sheets],
    }
    return json.dumps(record, ensure_ascii=False, indent=2, allow_nan=False).translate(SURROGATES) + "\n"


def digest(text: str) -> str:
    """The SHA-256 of a sheet's text in UTF-8, as the report writes it."""
    return "sha256:" + sha256(text.encode("utf-8", "surrogatepass")).hexdigest()


def summary(sheets: Sequence[Report], others: int) -> Record:
    """How many calc sheets and claims there are, claims by verdict, cautions, and ``others`` that are no calc sheets."""
    counts: Record = {"sheets": len(sheets), "claims": sum(len(r.claims) for r in sheets)}
    for verdict in ("agrees", "rounded", "differs", "unchecked", "accepted", "given"):
        counts[verdict] = sum(j.verdict == verdict for r in sheets for j in r.claims)
    beside = sum(len(j.cautions) for r in sheets for j in r.claims)
    counts["cautions"] = beside + sum(f.severity == "caution" for r in sheets for f in r.findings)
    counts["not_sheets"] = others
    return counts


def _sheet(report: Report) -> Record:
    sheet = report.reading.sheet
    findings = [_finding(f, sheet) for f in report.findings]
    findings += [_said_beside(j, c, sheet) for j in report.claims for c in j.cautions]
    return {
        "path": sheet.name,
        "digest": digest(sheet.text),
        "verdict": report.verdict,
        "circuits": [_circuit(c) for c in report.figures],
        "claims": [_claim(j, sheet) for j in report.claims],
        "findings": sorted(findings, key=lambda f: (f["line"], f["column"])),
        "ratings": [_rating(h, sheet) for h in report.ratings],
    }


def _rating(held: RatingHeld, sheet: Sheet) -> Record:
    line, column = sheet.line_column(held.rating.span.start)
    return {
        "line": line,
        "column": column,
        "part": held.part,
        "circuit": held.circuit,
        "case": held.case,
        "limit": _amount(held.limit),
        "worst": _amount(held.worst),
        "share": _number(held.share, 4),
        "where": held.where,
        "proved": held.proved,
    }


def _circuit(figures: CircuitFigures) -> Record:
    return {
        "name": figures.name,
        "line": figures.line,
        "nodes": figures.nodes,
        "elements": figures.elements,
        "route_gap": _number(figures.route_gap, 2),
        "kcl_residual": _number(figures.kcl_residual, 2),
        "power_balance": _number(figures.power_balance, 2),
    }


def _claim(judged: Judged, sheet: Sheet) -> Record:
    return {
        **_place(judged.claim.span, sheet),
        "text": judged.claim.text,
        "quantity": judged.quantity,
        "basis": judged.basis,
        "verdict": judged.verdict,
        "claimed": _claimed(judged),
        "computed": _computed(judged),
        "deviation": _number(judged.deviation, 4),
        "message": judged.message,
        "steps": [_step(s) for s in judged.steps],
        "slips": [{"slip": s.key, "text": s.text} for s in judged.slips],
    }


def _place(span: Span, sheet: Sheet) -> Record:
    line, column = sheet.line_column(span.start)
    end_line, end_column = sheet.line_column(span.end)
    return {"line": line, "column": column, "end_line": end_line, "end_column": end_column}


def _step(step: Step) -> Record:
    return {"text": step.text, "verdict": step.verdict, "value": _amount(step.amount)}


def _finding(finding: Finding, sheet: Sheet) -> Record:
    line, column = sheet.line_column(finding.span.start)
    message = f"{finding.message}; write {finding.suggestion}" if finding.suggestion else finding.message
    return {"line": line, "column": column, "kind": finding.kind, "severity": finding.severity, "message": message}


def _said_beside(judged: Judged, caution: str, sheet: Sheet) -> Record:
    line, column = sheet.line_column(judged.claim.span.start)
    return {"line": line, "column": column, "kind": "claim", "severity": "caution", "message": caution}


# --- values ---------------------------------------------------------------------------------------------------------


def _claimed(judged: Judged) -> Record | None:
    """The printed value or range; of a claim that prints none but bounds, the bound, ``None`` on its open side."""
    span = next((m.node for m in judged.claim.members if isinstance(m.node, Range)), None)
    if span is not None and judged.low is not None:
        return _printed_range(span, judged.low.dimension)
    limit = judged.low or judged.high
    if judged.claimed is not None or limit is None:
        return _amount(judged.claimed)
    return _ends(judged)


def _computed(judged: Judged) -> Record | None:
    """The recomputed value; of a claim of two values both."""
    ranged = any(isinstance(m.node, Range) for m in judged.claim.members)
    return _ends(judged) if ranged and judged.low is not None else _amount(judged.computed)


def _ends(judged: Judged) -> Record | None:
    limit = judged.low or judged.high
    ends = {"low": judged.low, "high": judged.high}
    found = {k: None if a is None else _value(a.value) for k, a in ends.items()}
    return None if limit is None else _record(found, limit.dimension)


def _printed_range(node: Range, dimension: Dimension) -> Record | None:
    """The ends of a printed range, where they are plain values."""
    try:
        low, high = (evaluate(n, _no_names) for n in (node.low, node.high))
        first, last = float(real(low.value)), float(real(high.value))
    except (Doubt, DimensionFault):
        return None
    if node.centred:
        half = last if high.dimension == low.dimension else last * abs(first)  # a percentage
        first, last = first - half, first + half
    return _record({"low": _number(first), "high": _number(last)}, dimension)


def _no_names(ref: Reference) -> Amount:
    raise Doubt(f"{ref.word} is no printed value", ref.span)


def _amount(amount: Amount | None) -> Record | None:
    return None if amount is None else _record(_value(amount.value), amount.dimension)


def _record(value: object, dimension: Dimension) -> Record:
    return {"value": value, "unit": unit_of(dimension)}


def _value(value: Value) -> object:
    if isinstance(value, complex):
        return {"re": _number(value.real), "im": _number(value.imag)}
    return _number(value)


def _number(value: Real | None, figures: int = 12) -> float | None:
    """A finite number of so many figures, which any machine prints alike; nothing in place of one that is not finite."""
    if value is None:
        return None
    try:
        rounded = float(f"{float(value):.{figures}g}")
    except OverflowError:
        return None
    return rounded + 0.0 if math.isfinite(rounded) else None  # + 0.0 turns −0.0 into 0.0
