"""Slips with the unit of an angle: degrees taken for radians or the reverse."""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterator
from dataclasses import replace
from decimal import Decimal

from calccheck.arithmetic import Doubt
from calccheck.formula import Binary, Call, Group, Node, Number
from calccheck.judge import quantities
from calccheck.judge.members import Names
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.redo import NOWHERE, Variant, put
from calccheck.judge.slips.rewriting import Rewriting, in_formulas
from calccheck.model import Circuit

_DEGREE = math.pi / 180
_EITHER = ((1 / _DEGREE, "degrees taken for radians"), (_DEGREE, "radians taken for degrees"))


def degrees_radians(case: Case) -> Iterator[Guess]:
    """An angle printed, put into a function or given to a source in the other unit."""
    for f in case.figures:
        if f.angle:
            for factor, what in _EITHER:
                yield Guess(f"{what} in the angle", f.whole(f.right * factor))
    yield from _projected(case)
    if case.circuit is not None and case.alternating:
        for v in case.redo.variants(_otherwise_turned, case.circuit):
            yield Guess(v.what, circuit=v.circuit)
    yield from in_formulas(case, _in_functions)


def _projected(case: Case) -> Iterator[Guess]:
    """|S|·cos φ, |S|·sin φ and the parts of a phasor with the angle in the other unit."""
    key = case.key
    part = {"P": "re", "Q": "im"}.get(key.letter, case.which) if key is not None else ""
    if key is None or part not in ("re", "im") or len(case.frequencies) != 1 or not case.frequencies[0]:
        return
    try:
        whole = replace(key, letter="S") if key.letter in ("P", "Q") else key
        value = complex(quantities.amount(whole, case.ledger, NOWHERE).value)
    except Doubt:
        return
    function = math.cos if part == "re" else math.sin
    for factor, what in _EITHER:
        yield Guess(
            f"{what} in the {function.__name__} of the angle", abs(value) * function(cmath.phase(value) * factor)
        )


def _otherwise_turned(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    for e in circuit.elements:
        if e.phasor is not None and e.phasor.imag:
            for factor, what in _EITHER:
                angle = cmath.phase(e.phasor) * factor
                turned = replace(e, phasor=cmath.rect(abs(e.phasor), angle), stated=None)
                yield Variant(f"{what} in the angle of {e.name}", put(circuit, [turned]))


def _in_functions(node: Node, names: Names) -> Iterator[Rewriting]:
    if not isinstance(node, Call):
        return
    for factor, what in _EITHER:
        by = Number(Decimal(factor), node.span)
        told = f"{what} in {node.function}()"
        if node.function in ("sin", "cos", "tan"):
            argument = Binary("×", Group(node.arguments[0], node.span), by, node.span)
            yield replace(node, arguments=(argument,)), told, told
        elif node.function in ("asin", "acos", "atan"):
            yield Group(Binary("×", node, by, node.span), node.span), told, told
