"""What a formula that fails should have been: the truth in the circuit's own symbols, checked at every point before it is said."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from calccheck.arithmetic import Amount, DimensionFault, Doubt, evaluate
from calccheck.formula import Binary, Node, Reference, references
from calccheck.judge.changes import LAID_SHORT, zeroed
from calccheck.judge.members import Names
from calccheck.judge.miss import Miss
from calccheck.judge.quantities import circuit_of, ends, frequency_of, linear
from calccheck.judge.rounding import equal
from calccheck.judge.scope import Key, Ledger
from calccheck.model import Circuit, Element
from calccheck.sought import Close, ClosedForm, Meaning, Sought
from calccheck.source import Span
from calccheck.units import HERTZ, Dimension

_NOWHERE = Span(0, 0)
_MOST_GIVEN_UP = 5  # closed forms of one sheet that come to nothing before no more are tried


@dataclass(slots=True)
class RightFormulas:
    """The closed forms of one sheet. ``ledgers``: of the same sheet at each point."""

    close: Close
    ledgers: Sequence[Ledger]
    given_up: int = 0

    def said(self, miss: Miss) -> str:
        """What the truth is in the circuit's symbols, where the first member that differs is a formula; else nothing."""
        wrong = next((w for w, step in miss.judged if step.verdict == "differs"), None)
        held = miss.held
        if wrong is None or wrong.printed is not None or held.basis != "circuit" or self.given_up >= _MOST_GIVEN_UP:
            return ""
        try:
            meanings = _meanings(held.node, miss.ground.names)
        except Doubt:
            return ""
        form = self.close(held.node, meanings, _symbols(meanings, wrong.node, miss.ground.names), miss.truth.dimension)
        if form is None or not all(
            _right(form, held.node, miss.ground.names.nearest, ledger) for ledger in self.ledgers
        ):
            self.given_up += 1
            return ""
        omega = f" with ω = 2π × {float(form.frequency):g} Hz" if form.frequency else ""
        return f"{held.member.text} is {form.text}{omega}"


def _meanings(node: Node, names: Names) -> dict[Reference, Meaning]:
    """What each reference is that is no free symbol. Raises ``Doubt`` for one that no closed form can have in it."""
    found: dict[Reference, Meaning] = {}
    waiting = references(node)
    while waiting:
        ref = waiting.pop()
        meaning = names.meaning(ref)
        if meaning is None or ref.prefix:
            raise Doubt("no closed form")
        if meaning.sort == "quantity" and meaning.key is not None:
            found |= _quantity(ref, meaning.key, names.ledger)
        elif meaning.element is not None:
            found[ref] = meaning.element
        elif meaning.defined is not None and meaning.defined.node is not None:
            found[ref] = meaning.defined.node
            waiting += [r for r in references(meaning.defined.node) if r not in found]
        elif ref.word not in names.ledger.symbols:
            raise Doubt("no closed form")
    return found


def _quantity(ref: Reference, key: Key, ledger: Ledger) -> dict[Reference, Meaning]:
    """A quantity as what is sought in its prepared circuit; a power at direct current as the product of two."""
    circuit = circuit_of(key, ledger, ref.span)
    if key.letter == "P" and not any(circuit.frequencies):
        volts, amperes = (Reference(f"{x} of {ref.text}", ref.span) for x in ("V", "I"))
        found: dict[Reference, Meaning] = {ref: Binary("×", volts, amperes, ref.span)}
        for r, letter in ((volts, "V"), (amperes, "I")):
            found[r] = _sought(replace(key, letter=letter), circuit, ledger)
        return found
    return {ref: _sought(key, circuit, ledger)}


def _sought(key: Key, circuit: Circuit, ledger: Ledger) -> Sought:
    frequency = frequency_of(key, circuit, ledger, _NOWHERE)
    prepared = linear(key, circuit, _NOWHERE, frequency).circuit
    if key.due_to:
        prepared = zeroed(prepared, key.due_to)
    match key.letter:
        case "V":
            plus, minus = ends(circuit, key, _NOWHERE)
            return Sought(prepared, frequency, "V", (plus, minus or circuit.reference))
        case "R" | "Z":
            return Sought(prepared, frequency, "V", key.subscripts)
        case "I":
            return Sought(prepared, frequency, "I", (",".join(key.subscripts),))
        case "Isc":
            return Sought(prepared, frequency, "I", (LAID_SHORT,))
    raise Doubt("no closed form")


def _symbols(meanings: Mapping[Reference, Meaning], wrong: Node, names: Names) -> dict[str, Dimension]:
    """The free symbols, and the parts that are called by their names: all where the failing formula does so, else phasors."""
    circuits = {m.circuit for m in meanings.values() if isinstance(m, Sought)}
    found = {name: d for c in circuits for name, d in c.symbols}
    called = any(_is_part(r, names) for r in references(wrong))
    for e in (e for c in circuits for e in c.elements):
        complex_valued = e.phasor is not None and bool(e.phasor.imag)
        if e.formula is None and e.stated is not None and e.name not in found and (called or complex_valued):
            found[e.name] = e.stated.dimension
    return found


def _is_part(ref: Reference, names: Names) -> bool:
    try:
        meaning = names.meaning(ref)
    except Doubt:
        return False
    element: Element | None = meaning.element if meaning is not None else None
    return element is not None and element.formula is None


def _right(form: ClosedForm, truth: Node, nearest: int, ledger: Ledger) -> bool:
    """Whether a closed form comes to the truth at a point, in value and dimension."""
    names = Names(nearest, ledger)
    own = {"j": Amount(1j), "ω": Amount(2 * math.pi * float(form.frequency), HERTZ)} if form.frequency else {}

    def lookup(ref: Reference) -> Amount:
        found = own.get(ref.word) or ledger.symbols.get(ref.word)
        return found if found is not None else names.amount(ref)

    try:
        a, b = evaluate(form.node, lookup), evaluate(truth, names.amount)
    except (Doubt, DimensionFault):
        return False
    return a.dimension == b.dimension and equal(a.value, b.value)
