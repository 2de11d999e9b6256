"""Slips with the hand models: a drop left out, an op-amp stage of the one kind taken for the other."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from decimal import Decimal
from fractions import Fraction
from typing import Any

from calccheck.formula import Binary, Group, Node, Number, Unary
from calccheck.judge.members import Names
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.parts import PASSIVE
from calccheck.judge.slips.redo import Variant, put
from calccheck.judge.slips.rewriting import Rewriting, dimension_of, in_formulas
from calccheck.model import Circuit, Device, Element
from calccheck.units import NONE

# --- drops ----------------------------------------------------------------------------------------------------------

_DROPS = {"drop": "the drop of {}", "v_be": "V_BE of {}", "v_ce": "V_CE of {}"}


def drop_forgotten(case: Case) -> Iterator[Guess]:
    """The drop of a diode or of a transistor left out, or those of all."""
    if case.circuit is not None:
        for v in case.redo.variants(_without_drops, case.circuit):
            yield Guess(v.what, circuit=v.circuit)


def _without_drops(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    found = [(e, name) for e in circuit.elements if e.device is not None for name in _drops(e.device)]
    for e, name in found:
        yield Variant(f"{_DROPS[name].format(e.name)} left out", put(circuit, [_without(e, name)]))
    if len(found) > 1:
        every = [_without(e, *_drops(e.device)) for e in circuit.elements if e.device is not None]
        yield Variant("all drops left out", put(circuit, every))


def _drops(d: Device) -> list[str]:
    return [name for name in _DROPS if getattr(d, name)]


def _without(e: Element, *names: str) -> Element:
    assert e.device is not None
    none: dict[str, Any] = dict.fromkeys(names, Fraction(0))
    return replace(e, device=replace(e.device, **none))


# --- stages ---------------------------------------------------------------------------------------------------------


def stage_kind(case: Case) -> Iterator[Guess]:
    """An inverting stage taken for a non-inverting one or the reverse: −R2/R1 for 1 + R2/R1."""
    if not any(e.kind == "op-amp" for c in case.ledger.circuits for e in c.elements):
        return
    if case.circuit is not None:
        for v in case.redo.variants(_other_stages, case.circuit):
            yield Guess(v.what, circuit=v.circuit)
    yield from in_formulas(case, _other_gain)


def _other_stages(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    """The far end of the part at the inverting input exchanged with the other input, or with what hangs at that alone."""
    for amp in circuit.elements:
        if amp.kind != "op-amp":
            continue
        at = dict(amp.terminals)
        for e in circuit.elements:
            far = e.minus if e.plus == at["minus"] else e.plus if e.minus == at["minus"] else ""
            if e.kind not in PASSIVE or not far or far in (at["out"], at["minus"]):
                continue
            for input_node in (at["plus"], *_behind(circuit, amp, at["plus"])):
                if input_node != far:
                    yield Variant(_told(amp, circuit, far), _exchanged(circuit, amp, e, far, input_node))


def _behind(circuit: Circuit, amp: Element, node: str) -> list[str]:
    """The node behind the one part that an input hangs at: nothing flows in it."""
    if node == circuit.reference:
        return []
    meeting = [e for e in circuit.elements if e is not amp and node in (e.plus, e.minus, *(n for _, n in e.terminals))]
    if len(meeting) != 1 or meeting[0].kind not in PASSIVE:
        return []
    return [meeting[0].minus if meeting[0].plus == node else meeting[0].plus]


def _told(amp: Element, circuit: Circuit, far: str) -> str:
    if far == circuit.reference:
        return f"the non-inverting stage {amp.name} taken for an inverting one"
    return f"the inverting stage {amp.name} taken for a non-inverting one"


def _exchanged(circuit: Circuit, amp: Element, e: Element, far: str, input_node: str) -> Circuit:
    terminals = tuple((word, far if word == "plus" else node) for word, node in amp.terminals)
    moved = replace(e, minus=input_node) if e.minus == far else replace(e, plus=input_node)
    return put(circuit, [replace(amp, terminals=terminals), moved])


def _other_gain(node: Node, names: Names) -> Iterator[Rewriting]:
    """``1 + R2/R1`` made −R2/R1 and the reverse."""
    told = "a non-inverting stage taken for an inverting one", "an inverting stage taken for a non-inverting one"
    if isinstance(node, Binary) and node.operator == "+" and isinstance(node.left, Number) and node.left.digits == 1:
        yield Group(Unary("-", Group(node.right, node.span), node.span), node.span), *told
    ratio = node.operand if isinstance(node, Unary) and node.sign == "-" else None
    if isinstance(node, Binary) and node.operator == "÷" and isinstance(node.left, Unary) and node.left.sign == "-":
        ratio = replace(node, left=node.left.operand)
    if ratio is not None and dimension_of(ratio, names) == NONE:
        one = Number(Decimal(1), node.span)
        yield Group(Binary("+", one, Group(ratio, node.span), node.span), node.span), told[1], told[0]
