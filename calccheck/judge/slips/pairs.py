"""Slips with two like parts: the other one of a divider, series for parallel; in the circuit and in the working's formula."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import replace
from itertools import combinations

from calccheck.formula import Binary, Group, Node
from calccheck.judge.members import Names
from calccheck.judge.quantities import ends
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.figures import taken
from calccheck.judge.slips.parts import PASSIVE, bare, of_kind, with_value
from calccheck.judge.slips.redo import NOWHERE, Variant, put
from calccheck.judge.slips.rewriting import Rewriting, dimension_of, factors, in_formulas, opened, same
from calccheck.judge.slips.sources import together
from calccheck.model import Circuit, Kind
from calccheck.units import OHM


def series_parallel(case: Case) -> Iterator[Guess]:
    """Two resistors, inductors or capacitors in series taken for parallel, or the reverse."""
    key, circuit = case.key, case.circuit
    if key is not None and circuit is not None:
        base = case.redo.prepared(circuit, key, case.frequencies[0])
        for v in case.redo.variants(_retaken, base):
            yield Guess(v.what, terms=tuple((1, v.circuit, f) for f in case.frequencies))
    yield from in_formulas(case, _retaken_in_formula)


def divider_complement(case: Case) -> Iterator[Guess]:
    """The voltage across the other resistor of a divider, or the current through it: what the claimed one lacks of the total."""
    if case.key is not None and case.key.letter == "V":
        yield from _other_voltage(case)
    if case.key is not None and case.key.letter == "I":
        yield from _other_current(case)
    yield from in_formulas(case, _other_in_formula)


# --- in the circuit -------------------------------------------------------------------------------------------------


def _groups(circuit: Circuit, joining: tuple[str, ...]) -> dict[str, str]:
    """Every node's group: nodes that parts of the ``joining`` kinds tie together are one."""
    group = {node: node for node in (*circuit.nodes(), circuit.reference)}
    for e in circuit.elements:
        if e.kind in joining and group[e.plus] != group[e.minus]:
            old, new = group[e.plus], group[e.minus]
            group = {node: new if g == old else g for node, g in group.items()}
    return group


def _branches(circuit: Circuit, group: dict[str, str]) -> Counter[str]:
    """How many branches meet at each group of nodes."""
    live = [e for e in circuit.elements if e.kind not in ("open", "short")]
    meeting = [{group[n] for n in ([n for _, n in e.terminals] or [e.plus, e.minus])} for e in live]
    return Counter(g for groups in meeting if len(groups) > 1 for g in groups)


def _retaken(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    group = _groups(circuit, ("short",))
    meeting = _branches(circuit, group)
    for a, b in (pair for kind in _ADDING for pair in combinations(of_kind(circuit, kind), 2)):
        if a.value is None or b.value is None or min(a.value, b.value) <= 0:
            continue
        left, right = ({group[e.plus], group[e.minus]} for e in (a, b))
        series, parallel = a.value + b.value, a.value * b.value / (a.value + b.value)
        if a.kind == "capacitor":
            series, parallel = parallel, series
        if left == right and len(left) == 2:
            one = [with_value(a, series), bare(b, "open")]
            yield Variant(f"{a.name} and {b.name} taken in series instead of in parallel", put(circuit, one))
        elif any(meeting[g] == 2 and g != group[circuit.reference] for g in left & right):
            one = [with_value(a, parallel), bare(b, "short")]
            yield Variant(f"{a.name} and {b.name} taken in parallel instead of in series", put(circuit, one))


_ADDING: tuple[Kind, ...] = ("resistor", "inductor", "capacitor")


def _other_voltage(case: Case) -> Iterator[Guess]:
    """Across a part that shares a node with the claimed voltage and makes up a known total with it."""
    key, circuit, state = case.key, case.circuit, together(case)
    if key is None or circuit is None or state is None:
        return
    base = case.redo.prepared(circuit, key, case.frequencies[0])
    plus, minus = ends(base, key, NOWHERE)
    minus = minus or base.reference
    fixed, joined = _groups(base, ("short", "voltage source")), _groups(base, ("short",))
    meeting, at = _branches(base, joined), state.potentials
    for e in base.elements:
        for here, far in ((e.plus, e.minus), (e.minus, e.plus)):
            if e.kind not in PASSIVE or joined[far] == joined[here] or joined[far] in (joined[plus], joined[minus]):
                continue
            for end, opposite, sign in ((plus, minus, 1), (minus, plus, -1)):
                whole = fixed[far] == fixed[opposite] or meeting[joined[end]] == 2
                if joined[here] == joined[end] and whole:
                    what = f"the voltage across {e.name}, the rest of the divider"
                    yield Guess(what, taken(case.which, sign * (at[far] - at[end])))


def _other_current(case: Case) -> Iterator[Guess]:
    """Through a part parallel to the claimed one."""
    key, circuit, state = case.key, case.circuit, together(case)
    if key is None or circuit is None or state is None:
        return
    base = case.redo.prepared(circuit, key, case.frequencies[0])
    own, joined = base.element(key.subscripts[0]), _groups(base, ("short",))
    if own is None or own.terminals:
        return
    for e in base.elements:
        if e is own or e.kind not in PASSIVE:
            continue
        alike = (joined[e.plus], joined[e.minus]) == (joined[own.plus], joined[own.minus])
        if alike or (joined[e.minus], joined[e.plus]) == (joined[own.plus], joined[own.minus]):
            current = state.currents[e.name] * (1 if alike else -1)
            what = f"the current through {e.name}, the other branch of the divider"
            yield Guess(what, taken(case.which, current))


# --- in the working --------------------------------------------------------------------------------------------------


def _retaken_in_formula(node: Node, names: Names) -> Iterator[Rewriting]:
    series, parallel = "a parallel pair taken in series", "a series pair taken in parallel"
    if isinstance(node, Binary) and node.operator == "∥":
        yield Group(replace(node, operator="+"), node.span), series, parallel
    if isinstance(node, Binary) and node.operator == "+" and _ohms(node, names):
        yield Group(replace(node, operator="∥"), node.span), parallel, series


def _ohms(node: Binary, names: Names) -> bool:
    return dimension_of(node.left, names) == OHM == dimension_of(node.right, names)


def _other_in_formula(node: Node, names: Names) -> Iterator[Rewriting]:
    """``a/(a + b)`` made ``b/(a + b)``."""
    if not (isinstance(node, Binary) and node.operator == "÷"):
        return
    below = opened(node.right)
    if not (isinstance(below, Binary) and below.operator == "+"):
        return
    for own, other in ((below.left, below.right), (below.right, below.left)):
        if any(same(factor, own, names) for factor in factors(node.left)):
            turned = Binary("÷", Group(other, node.span), Group(own, node.span), node.span)
            told = "the other resistor of the divider taken"
            yield Binary("×", Group(node, node.span), Group(turned, node.span), node.span), told, told
