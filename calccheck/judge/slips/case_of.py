"""A chain that differs made a case: what is to be explained, and what quantity of which circuit the truth is."""

from __future__ import annotations

import math
from collections.abc import Mapping
from fractions import Fraction

from calccheck.arithmetic import DimensionFault, Doubt, Value, decibels, evaluate, size
from calccheck.formula import OVER_TOLERANCES, Call, Group, Node, Prefix, Reference, references
from calccheck.judge.members import Names
from calccheck.judge.miss import Miss
from calccheck.judge.quantities import acting, frequency_of
from calccheck.judge.scope import Key, Ledger, Meaning
from calccheck.judge.slips.case import Case
from calccheck.judge.slips.figures import figures_of
from calccheck.judge.slips.redo import NOWHERE, Redo
from calccheck.judge.steps import is_ratio
from calccheck.model import Circuit
from calccheck.units import PLAIN


def case_of(miss: Miss, redo: Redo) -> Case | None:
    """The case of a chain with a member that differs; ``None`` where no printed value or formula of it can be explained."""
    wrong = [w for w, step in miss.judged if step.verdict == "differs" and w.amount is not None]
    if not wrong:
        return None
    first, truth = wrong[0], miss.truth.value
    shown = next((w.printed for w in wrong if w.printed is not None), None)
    value: Value | None = shown.amount.value if shown is not None else None
    if first.sort == "formula" and first.amount is not None and first.amount.dimension == miss.truth.dimension:
        shown, value = None, first.amount.value  # exact: it says more than the value printed behind it
    ten_log = _ten_log(miss) if shown is not None and shown.amount.level and not miss.truth.level else 0
    if ten_log:
        truth = ten_log * math.log10(size(truth))
    figures = figures_of(shown, truth) if shown is not None else ()
    if shown is not None and not figures:
        return None  # a real value printed for a phasor
    node = miss.held.node
    over = (
        isinstance(node, Reference) and node.prefix in OVER_TOLERANCES
    )  # then no slip with the nominal circuit explains it
    meanings = {} if over else _meanings(miss)
    index = _index(meanings)
    key, which = _quantity(node, miss.ground.names, index)
    frequencies = _frequencies(key, which, miss.ground.ledger)
    written_in = shown.written_in if shown is not None else PLAIN
    return Case(
        miss, redo, figures, written_in, value, truth, ten_log, meanings, index, key if frequencies else None, which, frequencies
    )  # fmt: skip


def _ten_log(miss: Miss) -> int:
    """10 or 20, by what the ratio of the chain is one of; 0 where it has no decibels."""
    ground = miss.ground
    node = next((m.node for m in ground.members if is_ratio(m.node)), ground.source.node)
    try:
        level = decibels(node, lambda n: evaluate(n, ground.names.amount))
        return round(float(level.value.real) / math.log10(size(miss.truth.value)))
    except (Doubt, DimensionFault, ArithmeticError, ValueError):
        return 0


def _index(meanings: Mapping[Reference, Meaning]) -> int:
    """The one circuit of these names, else −1."""
    found = {m.key.circuit for m in meanings.values() if m.key is not None and m.key.circuit >= 0}
    return found.pop() if len(found) == 1 else -1


def _quantity(node: Node, names: Names, index: int) -> tuple[Key | None, Prefix]:
    """The one quantity of a circuit that an expression is, or whose magnitude, angle, part or rms value it is."""
    which: Prefix = ""
    while isinstance(node, Group | Call):
        if isinstance(node, Group):
            if node.unit.text:
                return None, ""
            node = node.inner
        elif node.function == "abs" and not which:
            node, which = node.arguments[0], "mag"
        else:
            return None, ""
    if not isinstance(node, Reference) or (which and node.prefix):
        return None, ""
    meaning = names.meaning(node)
    key = meaning.key if meaning is not None and meaning.sort == "quantity" else None
    return (key, which or node.prefix) if key is not None and key.circuit == index >= 0 else (None, "")


def _frequencies(key: Key | None, which: Prefix, ledger: Ledger) -> tuple[Fraction, ...]:
    return frequencies_of(key, which, ledger.circuits[key.circuit], ledger) if key is not None else ()


def frequencies_of(key: Key, which: Prefix, circuit: Circuit, ledger: Ledger) -> tuple[Fraction, ...]:
    """The frequencies at which a quantity is worked in a circuit; none where they cannot be told."""
    try:
        if key.letter in ("P", "S", "Q") or which == "rms":
            return acting(key, circuit, NOWHERE)
        return (frequency_of(key, circuit, ledger, NOWHERE),)
    except Doubt:
        return ()


def _meanings(miss: Miss) -> dict[Reference, Meaning]:
    """What each name in the truth means, names in the definitions of names included."""
    names = miss.ground.names
    found: dict[Reference, Meaning] = {}
    waiting = references(miss.held.node)
    while waiting:
        ref = waiting.pop()
        try:
            meaning = names.meaning(ref)
        except Doubt:
            continue
        if meaning is None or ref in found:
            continue
        found[ref] = meaning
        if meaning.defined is not None and meaning.defined.node is not None and len(names.ledger.circuits) == 1:
            waiting += references(meaning.defined.node)
    return found
