"""The truth about a quantity of a circuit: by superposition in rationals where that route is exact, else by nodal analysis.

Signs follow IEC 60375, as in ``model.Element``: the voltage of a part counts from its first node to its second, its current
from the first node through the part, its power is what it takes.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from fractions import Fraction

from calccheck.arithmetic import Amount, Doubt, Real, Value, plainest
from calccheck.formula import Change
from calccheck.judge import powers
from calccheck.judge.changes import DC, LAID_SHORT, changed, with_short, with_test_current
from calccheck.judge.phasors import Sized, sized
from calccheck.judge.scope import Key, Ledger
from calccheck.model import Circuit, Element, Solution, State
from calccheck.source import Span
from calccheck.units import AMPERE, OHM, VOLT, WATT, Dimension

LARGEST_GAP = 1e-9


@dataclass(frozen=True, slots=True)
class Linear:
    """A quantity that is linear in the sources: the circuit to solve, how to read a state of it, and what comes out."""

    circuit: Circuit
    read: Callable[[State], Value]
    dimension: Dimension


def amount(key: Key, ledger: Ledger, span: Span) -> Amount:
    """The value of a quantity. Raises ``Doubt`` where its circuit cannot be solved or it has no value."""
    found = ledger.amounts.get(key)
    if found is None:
        found = ledger.amounts[key] = _worked_out(key, ledger, span)
    return found


def _worked_out(key: Key, ledger: Ledger, span: Span) -> Amount:
    circuit = circuit_of(key, ledger, span)
    if key.letter in ("P", "S", "Q"):
        return _power(key, circuit, ledger, span)
    frequency = frequency_of(key, circuit, ledger, span)
    quantity = linear(key, circuit, span, frequency)
    value = _summed(quantity, key, frequency, ledger, span)
    several = len(frequencies(circuit)) > 1 and key.letter in ("V", "I", "Isc")
    return Amount(value, quantity.dimension, frequency=frequency if several else None)


def rms(key: Key, ledger: Ledger, span: Span) -> Amount:
    """The rms value over all frequencies that act: the root of the sum of the squares, DC among them."""
    if key.letter not in ("V", "I", "Isc"):
        raise Doubt("rms stands before a voltage or a current", span)
    circuit = circuit_of(key, ledger, span)
    each: dict[Fraction, Value] = {}
    dimension = VOLT
    for f in acting(key, circuit, span):
        quantity = linear(key, circuit, span, f)
        each[f], dimension = _summed(quantity, key, f, ledger, span), quantity.dimension
    return Amount(powers.rms(each, ledger.settings), dimension)


def _power(key: Key, circuit: Circuit, ledger: Ledger, span: Span) -> Amount:
    """Average power P over all frequencies that act; complex power S and reactive power Q at one frequency (IEC 60375)."""
    found = acting(key, circuit, span)
    if key.letter != "P" and len(found) > 1:
        raise Doubt(f"{key.letter} belongs to one frequency: say at which", span)
    if len(key.subscripts) != 1:
        raise Doubt("a power is a part's", span)
    each: dict[Fraction, tuple[Value, Value]] = {}
    for f in found:
        voltage, current = (linear(replace(key, letter=x), circuit, span, f) for x in ("V", "I"))
        v, i = (_summed(q, key, f, ledger, span) for q in (voltage, current))
        each[f] = (v, i)
    return Amount(powers.power(key.letter, each, ledger.settings), WATT)


def frequencies(circuit: Circuit) -> tuple[Fraction, ...]:
    """The frequencies of a circuit's independent sources, 0 for DC, rising; DC alone where there is no source."""
    return circuit.frequencies


def values_around(key: Key, ledger: Ledger, span: Span) -> list[Sized]:
    """Every voltage, current and power of a quantity's circuit under its own qualifiers, worked out once."""
    known = Key(key.circuit, "", (), key.due_to, key.changes, key.frequency)
    if known not in ledger.around:
        try:
            ledger.around[known] = _all_sizes(key, ledger, span)
        except Doubt:
            ledger.around[known] = []
    return ledger.around[known]


def _all_sizes(key: Key, ledger: Ledger, span: Span) -> list[Sized]:
    """In floating point: printed numbers are told apart by far more than its error."""
    circuit = circuit_of(key, ledger, span)
    several = acting(key, circuit, span)
    if len(several) > 1:
        return []
    state = _state(circuit, key, several[0], ledger, span)
    potentials = {n: _floating(v) for n, v in state.potentials.items()}
    found = [s for v in potentials.values() for s in sized(v, VOLT)]
    for e in circuit.elements:
        if e.name not in state.currents or not e.plus:
            continue
        voltage, current = potentials[e.plus] - potentials[e.minus], _floating(state.currents[e.name])
        power = powers.power("S", {several[0]: (voltage, current)}, ledger.settings)
        found += [*sized(voltage, VOLT), *sized(current, AMPERE), *sized(power, WATT)]
    return found


def _floating(value: Value) -> float | complex:
    return value if isinstance(value, complex) else float(value)


def acting(key: Key, circuit: Circuit, span: Span) -> tuple[Fraction, ...]:
    """The frequencies of the sources that act on a quantity: all of them, or as its qualifiers say."""
    check_sources(key.due_to, circuit, span)
    if key.frequency is not None:
        return (key.frequency,)
    if not key.due_to:
        return circuit.frequencies
    return tuple(sorted({s.frequency or DC for s in circuit.sources() if s.name in key.due_to})) or (DC,)


def frequency_of(key: Key, circuit: Circuit, ledger: Ledger, span: Span) -> Fraction:
    """The one frequency of a voltage, current or impedance. Raises ``Doubt`` where several act."""
    if key.letter == "R" and key.frequency is None:
        return Fraction(0)
    if key.letter == "Z":
        return _of_impedance(key, circuit, ledger, span)
    present = frequencies(circuit)
    found = acting(key, circuit, span)
    if len(found) > 1:
        shown = ", ".join("dc" if f == 0 else f"{float(f):g} Hz" for f in found)
        raise Doubt(f"sources of several frequencies act here ({shown}): say at which, or rms", span)
    if key.frequency is not None and key.frequency not in present:
        shown = ", ".join("dc" if f == 0 else f"{float(f):g} Hz" for f in present)
        raise Doubt(f"no source of this circuit has {float(key.frequency):g} Hz; its sources have: {shown}", span)
    return found[0]


def _of_impedance(key: Key, circuit: Circuit, ledger: Ledger, span: Span) -> Fraction:
    """The frequency of an impedance: as said, else the one of the block's sources, taken out or not, else the sheet's."""
    if key.frequency is not None:
        return key.frequency
    alternating = [f for f in frequencies(ledger.circuits[key.circuit]) if f != 0] or [ledger.settings.hertz]
    reactive = any(e.kind in ("capacitor", "inductor") for e in circuit.elements)
    if len(alternating) > 1 or (alternating == [0] and reactive):
        raise Doubt("an impedance belongs to one frequency: say at which, as in at 50 Hz", span)
    return alternating[0]


def linear(key: Key, circuit: Circuit, span: Span, frequency: Fraction = DC) -> Linear:
    """How a voltage, current, short-circuit current, seen resistance or impedance is read from its circuit's states."""
    match key.letter:
        case "V":
            plus, minus = ends(circuit, key, span)
            return Linear(circuit, lambda s: s.potentials[plus] - (s.potentials[minus] if minus else 0), VOLT)
        case "I":
            name = _carrier(circuit, key, span)
            return Linear(circuit, lambda s: s.currents[name], AMPERE)
        case "Isc":
            return Linear(with_short(circuit, *key.subscripts), lambda s: s.currents[LAID_SHORT], AMPERE)
        case "R" | "Z":
            a, b = key.subscripts
            if key.due_to:
                raise Doubt("a resistance seen between nodes is not due to sources: they are zeroed in it", span)
            tested = with_test_current(circuit, a, b, frequency)
            return Linear(tested, lambda s: s.potentials[a] - s.potentials[b], OHM)
    raise Doubt(f"{key.letter} is no quantity of a circuit", span)


def circuit_of(key: Key, ledger: Ledger, span: Span) -> Circuit:
    """The circuit that a quantity belongs to, with the changes that its qualifiers make.

    Raises ``Doubt`` where it is not solved, or where a part cannot be in the state that the sheet assumes.
    """
    circuit = ledger.circuits[key.circuit]
    if circuit.problems:
        first = circuit.problems[0]
        raise Doubt(f"its circuit is not solved: {first.message}", span)
    known = (key.circuit, key.changes)
    if known not in ledger.variants:
        ledger.variants[known] = with_changes(circuit, key, span) if key.changes else circuit
    found = ledger.variants[known]
    reason = ledger.fails(found)
    if reason:
        raise Doubt(f"an assumed state does not hold: {reason}", span)
    return found


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


def _summed(q: Linear, key: Key, frequency: Fraction, ledger: Ledger, span: Span) -> Value:
    """The quantity with the sources that act on it."""
    return plainest(q.read(_state(q.circuit, key, frequency, ledger, span)))


def _state(circuit: Circuit, key: Key, frequency: Fraction, ledger: Ledger, span: Span) -> State:
    """The sum of the states of the sources that act, or the nodal state of the whole where no route is exact."""
    solution = solved(circuit, ledger, span, frequency)
    if not key.due_to and not solution.exact:
        return solution.nodal
    known = (circuit, key.due_to, frequency)
    if known not in ledger.states:
        check_sources(key.due_to, circuit, span)
        parts = [s for name, s in solution.parts.items() if not key.due_to or name in key.due_to]
        ledger.states[known] = _added(parts, solution.nodal)
    return ledger.states[known]


def whole(circuit: Circuit, ledger: Ledger, span: Span, frequency: Fraction = DC) -> State:
    """The state of a circuit with all its sources at work. Raises ``Doubt`` where it has none."""
    solution = solved(circuit, ledger, span, frequency)
    return _added([*solution.parts.values()], solution.nodal) if solution.exact else solution.nodal


def _added(states: list[State], like: State) -> State:
    if len(states) == 1:
        return states[0]
    zero = Fraction(0)
    return State(
        {n: sum((s.potentials[n] for s in states), start=zero) for n in like.potentials},
        {n: sum((s.currents[n] for s in states), start=zero) for n in like.currents},
    )


def solved(circuit: Circuit, ledger: Ledger, span: Span, frequency: Fraction = DC) -> Solution:
    """The circuit's solution. Raises ``Doubt`` where it has none or the two routes do not agree on it."""
    solution = ledger.solve(circuit, frequency)
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
    """The name under which a state holds the current that is meant: a part's, or that into one terminal of a part."""
    element = circuit.element(key.subscripts[0])
    if element is None:
        raise Doubt(f"{key.subscripts[0]} is taken out: it carries no current", span)
    if len(key.subscripts) == 1:
        _simple(element, span)
        return element.name
    where = key.subscripts[1]
    at_node = [word for word, node in element.terminals if node == where]
    by_word = [word for word, _ in element.terminals if word == where]
    if not at_node and not by_word:
        known = ", ".join(f"{word} ({node})" for word, node in element.terminals) or "none by name"
        raise Doubt(f"{element.name} has no terminal {where}; its terminals: {known}", span)
    if len({*at_node, *by_word}) > 1:
        raise Doubt(f"{where} may be more than one terminal of {element.name}: say which by its word", span)
    return f"{element.name},{(at_node or by_word)[0]}"


def _simple(element: Element, span: Span) -> None:
    if element.terminals:
        raise Doubt(f"{element.name} has several terminals: say between which nodes", span)


def scale(key: Key | None, ledger: Ledger, dimension: Dimension) -> Real:
    """The largest voltage, current or power of a quantity's circuit, against which a bare zero is held."""
    if key is None or key.circuit < 0:
        return 0
    try:
        circuit = circuit_of(key, ledger, Span(0, 0))
        found = [ledger.solve(circuit, f) for f in acting(key, circuit, Span(0, 0))]
    except Doubt:
        return 0
    largest = {VOLT: "volts", AMPERE: "amperes", WATT: "watts"}.get(dimension)
    return max((getattr(s, largest) for s in found), default=0) if largest else 0
