"""The slip of magnitudes added as if all phasors, or all impedances, had the same angle."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import replace
from decimal import Decimal
from fractions import Fraction
from functools import lru_cache

from calccheck.arithmetic import Doubt, size
from calccheck.formula import Binary, Call, Group, Node, Number, Unary
from calccheck.judge import quantities
from calccheck.judge.members import Names
from calccheck.judge.slips.again import Again
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.redo import NOWHERE, Make, Variant, put
from calccheck.judge.slips.rewriting import Rewriting, in_formulas, opened
from calccheck.judge.slips.sources import acting, together
from calccheck.model import Circuit, Element, State

Sums = Iterator[tuple[str, float]]


def magnitudes_added(case: Case) -> Iterator[Guess]:
    """Magnitudes of phasors or impedances added, or taken from each other, without their angles."""
    if case.key is not None and case.alternating and case.which not in ("arg", "re", "im"):
        for what, value in (*_of_parts(case), *_along_paths(case), *_at_nodes(case), *_by_source(case)):
            yield Guess(what, case.sized(value), sized=True)
        if case.circuit is not None and case.key.letter in ("V", "I", "Isc", "Z"):
            yield from _all_resistances(case, case.circuit)
    yield from in_formulas(case, _without_angles)


def _of_parts(case: Case) -> Sums:
    """|Z| as R + X, or side by side as R·X/(R + X); |S| as P + Q."""
    key = case.key
    if key is None or key.letter not in ("Z", "S"):
        return
    try:
        value = complex(quantities.amount(key, case.ledger, NOWHERE).value)
    except Doubt:
        return
    what = "R and X" if key.letter == "Z" else "P and Q"
    yield f"{what} added without their angle", abs(value.real) + abs(value.imag)
    if key.letter == "Z" and value:
        y = 1 / value
        yield "R and X side by side taken without their angle", 1 / (abs(y.real) + abs(y.imag))


def _along_paths(case: Case) -> Sums:
    """A voltage as the sum of the magnitudes along a path of two or three parts, or as the difference of two."""
    key, state = case.key, together(case)
    if key is None or key.letter != "V" or state is None or case.circuit is None:
        return
    base = case.redo.prepared(case.circuit, key, case.frequencies[0])
    plus, minus = quantities.ends(base, key, NOWHERE)
    for path in _paths(base, plus, minus or base.reference):
        a = [_across(e, state) for e in path]
        names = " and ".join(f"|V_{e.name}|" for e in path)
        yield f"{names} added without their angles", sum(a)
        if len(path) == 2:
            yield f"{names} taken from each other without their angles", abs(a[0] - a[1])


def _across(e: Element, state: State) -> float:
    return float(size(state.potentials[e.plus] - state.potentials[e.minus]))


def _paths(circuit: Circuit, start: str, end: str) -> Iterator[tuple[Element, ...]]:
    """The ways of two or three parts from node to node."""
    simple = [e for e in circuit.elements if not e.terminals and e.kind not in ("open", "short") and e.plus != e.minus]

    def onward(node: str, seen: tuple[str, ...], path: tuple[Element, ...]) -> Iterator[tuple[Element, ...]]:
        for e in simple:
            if node not in (e.plus, e.minus) or e in path:
                continue
            far = e.minus if e.plus == node else e.plus
            if far == end and path:
                yield (*path, e)
            elif far != end and far not in seen and len(path) < 2:
                yield from onward(far, (*seen, far), (*path, e))

    yield from onward(start, (start,), ())


def _at_nodes(case: Case) -> Sums:
    """A current as the sum of the magnitudes of the others at one of its nodes, or as the difference of two."""
    key, state = case.key, together(case)
    if key is None or key.letter != "I" or len(key.subscripts) != 1 or state is None or case.circuit is None:
        return
    base = case.redo.prepared(case.circuit, key, case.frequencies[0])
    own = base.element(key.subscripts[0])
    for node in (own.plus, own.minus) if own is not None else ():
        meeting = [e for e in base.elements if node in (e.plus, e.minus, *(n for _, n in e.terminals))]
        others = [e for e in meeting if e is not own and e.kind != "open"]
        if len(others) > 1 and not any(e.terminals for e in others):
            a = [float(size(state.currents[e.name])) for e in others]
            names = " and ".join(f"|I_{e.name}|" for e in others)
            yield f"{names} added without their angles", sum(a)
            if len(a) == 2:
                yield f"{names} taken from each other without their angles", abs(a[0] - a[1])


def _by_source(case: Case) -> Sums:
    """The magnitudes of the parts due to each source added; over several frequencies in place of their squares."""
    parts = acting(case)
    key = case.key
    if len(parts) < 2 or key is None or key.letter not in ("V", "I"):
        return
    again = Again(case)
    shares = [again.value(Guess("", terms=((1, *part),))) for part in parts.values()]
    if None not in shares:
        a = [float(size(x)) for x in shares if x is not None]
        how = "in place of their squares" if case.which == "rms" else "without their angles"
        yield f"the magnitudes of the parts of each source added {how}", sum(a)
        if len(a) == 2:
            yield "the magnitudes of the two parts taken from each other without their angles", abs(a[0] - a[1])


def _all_resistances(case: Case, circuit: Circuit) -> Iterator[Guess]:
    """The circuit with its reactances for resistances, by which |Z| becomes R + X."""
    if len(case.frequencies) == 1 and case.frequencies[0] > 0:
        for v in case.redo.variants(_without_j(case.frequencies[0]), circuit):
            yield Guess(v.what, circuit=v.circuit, sized=True)


@lru_cache(maxsize=16)
def _without_j(frequency: Fraction) -> Make:
    def make(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
        what = "resistances and reactances added without their angles"
        for sign, more in ((1, ""), (-1, ", capacitive ones taken off")):
            plain = [_plain(e, frequency, sign) for e in circuit.elements if e.kind in ("capacitor", "inductor")]
            kinds = {e.kind for e in circuit.elements}
            if plain and (sign == 1 or {"capacitor", "inductor"} <= kinds):
                yield Variant(what + more, put(circuit, plain))

    return make


def _plain(e: Element, frequency: Fraction, sign: int) -> Element:
    """A resistor of a part's reactance."""
    turns = 2 * Fraction(math.pi) * frequency * (e.value or 1)
    return replace(e, kind="resistor", value=sign / turns if e.kind == "capacitor" else turns)


def _without_angles(node: Node, names: Names) -> Iterator[Rewriting]:
    """``√(a² + b²)`` made a + b, and ``|a + b|`` made |a| + |b|; a + b mended to √(a² + b²)."""
    added = "magnitudes added without their angles"
    if isinstance(node, Binary) and node.operator == "+":
        two = Number(Decimal(2), node.span)
        a, b = (Binary("^", Group(x, node.span), two, node.span) for x in (node.left, node.right))
        yield Unary("√", Group(Binary("+", a, b, node.span), node.span), node.span), "", added
    inside = node.operand if isinstance(node, Unary) and node.sign == "√" else None
    if isinstance(node, Call) and node.function in ("sqrt", "abs"):
        inside = node.arguments[0]
    total = opened(inside) if inside is not None else None
    if not (isinstance(total, Binary) and total.operator in ("+", "-")):
        return
    if isinstance(node, Call) and node.function == "abs":
        left, right = (Call("abs", (x,), node.span) for x in (total.left, total.right))
        yield Group(Binary("+", left, right, node.span), node.span), added, added
        return
    bases = [x.left for x in (total.left, total.right) if _squared(x) and isinstance(x, Binary)]
    if len(bases) == 2 and total.operator == "+":
        yield Group(Binary("+", bases[0], bases[1], node.span), node.span), added, added


def _squared(node: Node) -> bool:
    return (
        isinstance(node, Binary) and node.operator == "^" and isinstance(node.right, Number) and node.right.digits == 2
    )
