"""The full independent working of one quantity: each source alone, the sum, the nodal value, and the gap between the two."""

from __future__ import annotations

from calccheck.arithmetic import Amount, Doubt, plainest
from calccheck.formula import Node, Reference
from calccheck.judge import hints, quantities
from calccheck.judge.changes import TEST
from calccheck.judge.scope import Key, Ledger, meaning
from calccheck.model import Sensitivity, WorkedQuantity
from calccheck.source import Span
from calccheck.units import Dimension


def work_out(node: Node, span: Span, ledger: Ledger) -> WorkedQuantity:
    """The working of a quantity that is linear in the sources. Raises ``Doubt`` for anything else, with the reason."""
    if not isinstance(node, Reference):
        raise Doubt("one quantity is worked out at a time, such as V_bus or I_RL with RL open", span)
    m = meaning(node, -1, ledger)
    if m is None:
        raise Doubt(hints.unknown(node, -1, ledger)[0], span)
    if m.sort != "quantity" or m.key is None:
        raise Doubt(f"{node.text} is no quantity of a circuit", span)
    if m.key.letter in ("P", "S", "Q"):
        name = m.key.subscripts[0]
        raise Doubt(f"a power is no sum of parts by source; work out V_{name} and I_{name}", span)
    circuit = quantities.circuit_of(m.key, ledger, span)
    frequency = quantities.frequency_of(m.key, circuit, ledger, span)
    q = quantities.linear(m.key, circuit, span, frequency)
    solution = quantities.solved(q.circuit, ledger, span, frequency)
    sources = [s for s in solution.parts if not m.key.due_to or s in m.key.due_to]
    quantities.check_sources(m.key.due_to, q.circuit, span)
    rows = tuple((_label(s), Amount(plainest(q.read(solution.parts[s])), q.dimension)) for s in sources)
    total = quantities.amount(m.key, ledger, span) if solution.exact else _sum(rows, q.dimension)
    whole = q.read(solution.nodal) if len(sources) == len(solution.parts) else None
    nodal = Amount(plainest(whole), q.dimension) if whole is not None else None
    from calccheck.judge.sensitivities import sensitivities  # late, here and below: few sheets state tolerances

    moved_by = sensitivities(m.key, frequency, q.dimension, ledger, span)
    return WorkedQuantity(node.text, rows, total, nodal, solution.gap, moved_by)


def by_source(key: Key | None, ledger: Ledger, span: Span) -> tuple[tuple[str, Amount], ...]:
    """What each independent source brings to a whole voltage or current; nothing where fewer than two bring something about."""
    if key is None or key.letter not in ("V", "I", "Isc") or key.due_to:
        return ()
    try:
        circuit = quantities.circuit_of(key, ledger, span)
        frequency = quantities.frequency_of(key, circuit, ledger, span)
        q = quantities.linear(key, circuit, span, frequency)
        parts = quantities.solved(q.circuit, ledger, span, frequency).parts
    except Doubt:
        return ()
    if len(parts) < 2:
        return ()
    return tuple((name, Amount(plainest(q.read(state)), q.dimension)) for name, state in parts.items())


def _label(source: str) -> str:
    return "1 A driven through the nodes" if source == TEST else source


def _sum(rows: tuple[tuple[str, Amount], ...], dimension: Dimension) -> Amount:
    return Amount(plainest(sum(complex(a.value) for _, a in rows)), dimension)


def moves_of(key: Key, ledger: Ledger, span: Span) -> tuple[Sensitivity, ...]:
    """What moves a voltage, current or resistance, largest over its tolerance first; nothing where that cannot be worked."""
    try:
        circuit = quantities.circuit_of(key, ledger, span)
        frequency = quantities.frequency_of(key, circuit, ledger, span)
        dimension = quantities.linear(key, circuit, span, frequency).dimension
    except Doubt:
        return ()
    from calccheck.judge.sensitivities import sensitivities

    return sensitivities(key, frequency, dimension, ledger, span)
