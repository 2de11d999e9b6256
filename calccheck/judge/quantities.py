"""The truth about a quantity of a circuit: by superposition in rationals where that route is exact, else by nodal analysis.

Signs follow IEC 60375, as in ``model.Element``: the voltage of a part counts from its first node to its second, its current
from the first node through the part, its power is what it takes.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from fractions import Fraction

from calccheck.arithmetic import Amount, Doubt, Real, trimmed
from calccheck.formula import Change
from calccheck.judge.changes import LAID_SHORT, changed, with_short, with_test_current
from calccheck.judge.scope import Key, Ledger
from calccheck.model import Circuit, Element, Solution, State
from calccheck.source import Span
from calccheck.units import AMPERE, OHM, VOLT, WATT, Dimension

LARGEST_GAP = 1e-9


@dataclass(frozen=True, slots=True)
class Linear:
    """A quantity that is linear in the sources: the circuit to solve, how to read a state of it, and what comes out."""

    circuit: Circuit
    read: Callable[[State], Real]
    dimension: Dimension


def amount(key: Key, ledger: Ledger, span: Span) -> Amount:
    """The value of a quantity. Raises ``Doubt`` where its circuit cannot be solved or it has no value."""
    if key.letter == "P":
        v, i = (amount(replace(key, letter=x), ledger, span) for x in ("V", "I"))
        return Amount(trimmed(v.value * i.value), WATT)
    quantity = linear(key, circuit_of(key, ledger, span), span)
    return Amount(_summed(quantity, key, ledger, span), quantity.dimension)


def linear(key: Key, circuit: Circuit, span: Span) -> Linear:
    """How a voltage, current, short-circuit current or seen resistance is read from the states of its changed circuit."""
    match key.letter:
        case "V":
            plus, minus = ends(circuit, key, span)
            return Linear(circuit, lambda s: s.potentials[plus] - (s.potentials[minus] if minus else 0), VOLT)
        case "I":
            name = _carrier(circuit, key, span)
            return Linear(circuit, lambda s: s.currents[name], AMPERE)
        case "Isc":
            return Linear(with_short(circuit, *key.subscripts), lambda s: s.currents[LAID_SHORT], AMPERE)
        case "R":
            a, b = key.subscripts
            if key.due_to:
                raise Doubt("a resistance seen between nodes is not due to sources: they are zeroed in it", span)
            return Linear(with_test_current(circuit, a, b), lambda s: s.potentials[a] - s.potentials[b], OHM)
    raise Doubt(f"{key.letter} is a quantity of alternating current, which this version does not read", span)


def circuit_of(key: Key, ledger: Ledger, span: Span) -> Circuit:
    """The circuit that a quantity belongs to, with the changes that its qualifiers make."""
    circuit = ledger.circuits[key.circuit]
    if circuit.problems:
        first = circuit.problems[0]
        raise Doubt(f"its circuit is not solved: {first.message}", span)
    return with_changes(circuit, key, span)


def with_changes(circuit: Circuit, key: Key, span: Span) -> Circuit:
    """A circuit with the changes that a quantity's qualifiers make."""
    for part, what, value in key.changes:
        circuit = changed(circuit, Change(part, what, span), value)
    return circuit


def check_sources(names: Iterable[str], circuit: Circuit, span: Span) -> None:
    """``due to`` names independent sources; anything else is said."""
    sources = [e.name for e in circuit.sources()]
    for name in sorted(names):
        if name in sources:
            continue
        element = circuit.element(name)
        known = ", ".join(sources) or "none"
        if element is None:
            raise Doubt(f"there is no source {name}; independent sources here: {known}", span)
        if element.control is not None:
            raise Doubt(
                f"{name} is a controlled source: it stays alive in every part and has none of its own; "
                f"independent sources here: {known}",
                span,
            )
        raise Doubt(f"{name} is no independent source; those are: {known}", span)


def _summed(q: Linear, key: Key, ledger: Ledger, span: Span) -> Real:
    """The sum over the sources that act, or the nodal value of the whole where no route is exact."""
    check_sources(key.due_to, q.circuit, span)
    solution = solved(q.circuit, ledger, span)
    if not key.due_to and not solution.exact:
        return q.read(solution.nodal)
    acting = [s for name, s in solution.parts.items() if not key.due_to or name in key.due_to]
    return sum((q.read(s) for s in acting), start=Fraction(0))


def solved(circuit: Circuit, ledger: Ledger, span: Span) -> Solution:
    """The circuit's solution. Raises ``Doubt`` where it has none or the two routes do not agree on it."""
    solution = ledger.solve(circuit)
    if not solution.exact and not solution.gap <= LARGEST_GAP:
        raise Doubt(f"the two routes differ by {solution.gap:.1e}: the circuit is too ill-conditioned to decide", span)
    return solution


def ends(circuit: Circuit, key: Key, span: Span) -> tuple[str, str]:
    """The two nodes that a voltage counts between; the second is empty for the reference."""
    nodes = circuit.nodes()
    names = key.subscripts
    element = circuit.element(names[0]) if len(names) == 1 else None
    if element is not None:
        _simple(element, span)
        return element.plus, element.minus
    for name in names:
        if name not in nodes:
            raise Doubt(f"node {name} is gone from the changed circuit", span)
    return names[0], names[1] if len(names) == 2 else ""


def _carrier(circuit: Circuit, key: Key, span: Span) -> str:
    """The name of the part whose current is meant."""
    if len(key.subscripts) > 1:
        raise Doubt("currents into one terminal of a part are not read in this version", span)
    element = circuit.element(key.subscripts[0])
    if element is None:
        raise Doubt(f"{key.subscripts[0]} is taken out: it carries no current", span)
    _simple(element, span)
    return element.name


def _simple(element: Element, span: Span) -> None:
    if element.terminals:
        raise Doubt(f"{element.name} has several terminals: say between which nodes", span)


def scale(key: Key | None, ledger: Ledger, dimension: Dimension) -> Real:
    """The largest voltage, current or power of a quantity's circuit, against which a bare zero is held."""
    if key is None:
        return 0
    try:
        solution = ledger.solve(circuit_of(key, ledger, Span(0, 0)))
    except Doubt:
        return 0
    return {VOLT: solution.volts, AMPERE: solution.amperes, WATT: solution.watts}.get(dimension, 0)
