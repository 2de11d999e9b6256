"""Slips with tolerances: combined in another way than the claim says, or taken of the wrong value."""

from __future__ import annotations

from collections.abc import Iterator

from calccheck.arithmetic import Doubt, Value, evaluate, size
from calccheck.formula import Reference
from calccheck.judge import spreads
from calccheck.judge.rounding import equal
from calccheck.judge.slips.case import Case, Guess
from calccheck.toleranced import Formula, Point


def tolerance_combined(case: Case) -> Iterator[Guess]:
    """Root-sum-square for the extreme or the reverse, all values at the same end, one value alone, all tolerances of the result.

    Each as an end, and as the deviation from the nominal value.
    """
    node = case.held.node
    if not isinstance(node, Reference) or node.prefix not in ("min", "max"):
        return
    names = case.names
    inner = spreads.inner(node)
    try:
        closing = names.spreading.closing()
        formula = closing.formula(closing.closed(inner, names.nearest))
        nominal = evaluate(inner, names.amount).value
        tried = [*_tried(case, formula, nominal)]
        for what, point in _same_ends(formula):
            tried.append((what, spreads.value_at(formula, closing, point, case.ledger, node.span)))
    except Doubt:
        return
    for what, value in tried:
        for printed in (value, size(value - nominal)):
            if not equal(printed, case.truth):
                yield Guess(what, printed)


def _tried(case: Case, formula: Formula, nominal: Value) -> Iterator[tuple[str, Value]]:
    """What wrong ways give, as an end."""
    tolerances = case.names.spreading.tolerances
    slopes = tolerances.slopes(formula)
    halves = {v.key: float(v.high - v.low) / 2 for v in formula.varied}
    effects = [abs(slopes[key] * half) for key, half in halves.items()]
    shares = [halves[v.key] / abs(float(v.nominal)) for v in formula.varied if v.nominal]
    middle = float(nominal.real)
    for sign in (-1, 1):
        yield "the root-sum-square for the extreme", middle + sign * sum(e * e for e in effects) ** 0.5
        yield "all tolerances added up and taken of the result", middle * (1 + sign * sum(shares))
        if shares:
            yield "the largest tolerance taken of the result", middle * (1 + sign * max(shares))
    for largest in (False, True):
        yield "the extreme for the root-sum-square", tolerances.extreme(formula, largest).value
    ends = tolerances.at_ends(formula)
    if len(ends) > 1:
        for v in formula.varied:
            for value in ends[v.key]:
                yield f"{v.label} alone at its end", value


def _same_ends(formula: Formula) -> Iterator[tuple[str, Point]]:
    if len(formula.varied) > 1:
        yield "every value at its high end", {v.key: v.high for v in formula.varied}
        yield "every value at its low end", {v.key: v.low for v in formula.varied}
