"""Slips with two resistors: the other one of a divider, series for parallel; in the circuit and in the working's formula."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import replace
from itertools import combinations

from calccheck.arithmetic import DimensionFault, Doubt, Real, evaluate, size
from calccheck.formula import Binary, Call, Group, Node, Unary
from calccheck.judge.members import Names
from calccheck.judge.quantities import ends
from calccheck.judge.rounding import equal
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.parts import with_ohms
from calccheck.judge.slips.redo import NOWHERE, Variant, put
from calccheck.judge.slips.sources import acting
from calccheck.model import Circuit
from calccheck.units import OHM

Rewriting = tuple[Node, str, str]  # the rewritten expression, the slip that writes it, the slip that it mends
Rule = Callable[[Node, Names], Iterator[Rewriting]]


def series_parallel(case: Case) -> Iterator[Guess]:
    """Two resistors in series taken for parallel, or the reverse."""
    key, circuit = case.key, case.circuit
    if key is not None and circuit is not None:
        base = case.redo.prepared(circuit, key)
        for v in case.redo.variants(_retaken, base):
            yield Guess(v.what, terms=((1, v.circuit),))
    yield from _in_formulas(case, _retaken_in_formula)


def divider_complement(case: Case) -> Iterator[Guess]:
    """The voltage across the other resistor of a divider, or the current through it: what the claimed one lacks of the total."""
    if case.key is not None and case.key.letter == "V":
        yield from _other_voltage(case)
    if case.key is not None and case.key.letter == "I":
        yield from _other_current(case)
    yield from _in_formulas(case, _other_in_formula)


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
    resistors = [e for e in circuit.elements if e.kind == "resistor" and e.value and e.value > 0]
    for a, b in combinations(resistors, 2):
        if a.value is None or b.value is None:
            continue
        left, right = ({group[e.plus], group[e.minus]} for e in (a, b))
        if left == right and len(left) == 2:
            one = [with_ohms(a, a.value + b.value), replace(b, kind="open", value=None)]
            yield Variant(f"{a.name} and {b.name} taken in series instead of in parallel", put(circuit, one))
        elif any(meeting[g] == 2 and g != group[circuit.reference] for g in left & right):
            one = [with_ohms(a, a.value * b.value / (a.value + b.value)), replace(b, kind="short", value=None)]
            yield Variant(f"{a.name} and {b.name} taken in parallel instead of in series", put(circuit, one))


def _other_voltage(case: Case) -> Iterator[Guess]:
    """Across a resistor that shares a node with the claimed voltage and makes up a known total with it."""
    key, circuit, parts = case.key, case.circuit, acting(case)
    if key is None or circuit is None or not parts:
        return
    base = case.redo.prepared(circuit, key)
    plus, minus = ends(base, key, NOWHERE)
    minus = minus or base.reference
    fixed, joined = _groups(base, ("short", "voltage source")), _groups(base, ("short",))
    meeting = _branches(base, joined)
    total = {n: sum(s.potentials[n] for s in parts.values()) for n in (*base.nodes(), base.reference)}
    for e in base.elements:
        for here, far in ((e.plus, e.minus), (e.minus, e.plus)):
            if e.kind != "resistor" or joined[far] == joined[here] or {joined[far]} <= {joined[plus], joined[minus]}:
                continue
            for end, opposite, sign in ((plus, minus, 1), (minus, plus, -1)):
                whole = fixed[far] == fixed[opposite] or meeting[joined[end]] == 2
                if joined[here] == joined[end] and whole:
                    yield Guess(
                        f"the voltage across {e.name}, the rest of the divider", sign * (total[far] - total[end])
                    )


def _other_current(case: Case) -> Iterator[Guess]:
    """Through a resistor parallel to the claimed one."""
    key, circuit, parts = case.key, case.circuit, acting(case)
    if key is None or circuit is None or not parts:
        return
    base = case.redo.prepared(circuit, key)
    own, joined = base.element(key.subscripts[0]), _groups(base, ("short",))
    for e in base.elements:
        if own is None or e is own or e.kind != "resistor":
            continue
        same = (joined[e.plus], joined[e.minus]) == (joined[own.plus], joined[own.minus])
        if same or (joined[e.minus], joined[e.plus]) == (joined[own.plus], joined[own.minus]):
            current = sum(s.currents[e.name] for s in parts.values())
            yield Guess(f"the current through {e.name}, the other branch of the divider", current if same else -current)


# --- in the working -------------------------------------------------------------------------------------------------


def _in_formulas(case: Case, rule: Rule) -> Iterator[Guess]:
    """What the chain's formulas and substitutions come to with the slip; for a wrong one, whether it is right without it."""
    wrong = case.members("differs")
    for w in (case.held, *(w for w, _ in case.miss.judged)):
        if w.sort not in ("formula", "substitution"):
            continue
        for node, made, mended in _rewritten(w.node, rule, case.names):
            try:
                value = evaluate(node, case.names.amount)
            except (Doubt, DimensionFault):
                continue
            if value.dimension != case.miss.truth.dimension or isinstance(value.value, complex):
                continue
            if w not in wrong:
                yield Guess(f"{made} in the working", value.value)
            elif _right(w.sort, value.value, case):
                yield Guess(f"{mended} in {w.member.text}", certain=True)


def _right(sort: str, value: Real, case: Case) -> bool:
    if sort == "formula":
        return equal(value, case.truth)
    return bool(size(value - case.truth) <= case.ledger.settings.carry * size(case.truth))


def _rewritten(node: Node, rule: Rule, names: Names) -> Iterator[Rewriting]:
    """The expression with the rule applied at one place, for every place."""
    yield from rule(node, names)
    match node:
        case Unary():
            yield from (
                (replace(node, operand=n), made, mended) for n, made, mended in _rewritten(node.operand, rule, names)
            )
        case Group():
            yield from (
                (replace(node, inner=n), made, mended) for n, made, mended in _rewritten(node.inner, rule, names)
            )
        case Binary():
            yield from ((replace(node, left=n), made, mended) for n, made, mended in _rewritten(node.left, rule, names))
            yield from (
                (replace(node, right=n), made, mended) for n, made, mended in _rewritten(node.right, rule, names)
            )
        case Call():
            for k, one in enumerate(node.arguments):
                for n, made, mended in _rewritten(one, rule, names):
                    yield replace(node, arguments=(*node.arguments[:k], n, *node.arguments[k + 1 :])), made, mended


def _retaken_in_formula(node: Node, names: Names) -> Iterator[Rewriting]:
    series, parallel = "a parallel pair taken in series", "a series pair taken in parallel"
    if isinstance(node, Binary) and node.operator == "∥":
        yield Group(replace(node, operator="+"), node.span), series, parallel
    if isinstance(node, Binary) and node.operator == "+" and _is_ohms(node.left, names) and _is_ohms(node.right, names):
        yield Group(replace(node, operator="∥"), node.span), parallel, series


def _is_ohms(node: Node, names: Names) -> bool:
    try:
        return evaluate(node, names.amount).dimension == OHM
    except (Doubt, DimensionFault):
        return False


def _other_in_formula(node: Node, names: Names) -> Iterator[Rewriting]:
    """``a/(a + b)`` made ``b/(a + b)``."""
    if not (isinstance(node, Binary) and node.operator == "÷"):
        return
    below = _open(node.right)
    if not (isinstance(below, Binary) and below.operator == "+"):
        return
    for own, other in ((below.left, below.right), (below.right, below.left)):
        if any(_same(factor, own, names) for factor in _factors(node.left)):
            turned = Binary("÷", Group(other, node.span), Group(own, node.span), node.span)
            told = "the other resistor of the divider taken"
            yield Binary("×", Group(node, node.span), Group(turned, node.span), node.span), told, told


def _factors(node: Node) -> Iterator[Node]:
    if isinstance(node, Binary) and node.operator in ("×", "·"):
        yield from _factors(node.left)
        yield from _factors(node.right)
    else:
        yield node


def _open(node: Node) -> Node:
    while isinstance(node, Group) and not node.unit.text:
        node = node.inner
    return node


def _same(a: Node, b: Node, names: Names) -> bool:
    try:
        left, right = (evaluate(x, names.amount) for x in (a, b))
    except (Doubt, DimensionFault):
        return False
    return left.dimension == right.dimension and equal(left.value, right.value)
