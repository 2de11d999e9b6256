"""An expression of a claim closed: every name in it a varied value, a reading of a circuit, or a constant."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from decimal import Decimal
from fractions import Fraction

from calccheck.arithmetic import Amount, Doubt, evaluate
from calccheck.formula import OVER_TOLERANCES, Binary, Call, Group, Node, Number, Range, Reference, Unary
from calccheck.judge import hints, quantities
from calccheck.judge.changes import zeroed
from calccheck.judge.powers import share
from calccheck.judge.scope import Key, Ledger, meaning
from calccheck.judge.varied import Values
from calccheck.model import Circuit, Element
from calccheck.source import Span
from calccheck.toleranced import Formula, Reading
from calccheck.units import AMPERE, SIEMENS, VOLT, WATT, Dimension

_PARTS = {"mag": "abs", "re": "re", "im": "im", "arg": "arg"}
Exact = Callable[[Reference, int], Amount]  # a name's amount, with the nearest circuit above it


@dataclass(slots=True)
class Closing:
    """The closing of one formula. ``exact``: the amount of a name that is itself over tolerances. ``wholes``: circuits read."""

    ledger: Ledger
    exact: Exact
    values: Values
    readings: dict[str, Reading] = field(default_factory=dict)
    wholes: dict[int, tuple[Circuit, int]] = field(default_factory=dict)

    def formula(self, node: Node) -> Formula:
        """A closed expression with all that it rests on."""
        return Formula(node, tuple(self.values.varied.values()), self.readings, self.values.constants)

    def closed(self, node: Node, nearest: int) -> Node:
        """The expression with its names put in; ``nearest``: the circuit above it. Raises ``Doubt``."""
        match node:
            case Reference():
                return self._name(node, nearest)
            case Unary():
                return replace(node, operand=self.closed(node.operand, nearest))
            case Group():
                return replace(node, inner=self.closed(node.inner, nearest))
            case Binary(operator="∠"):
                raise Doubt("an angle in a formula is not worked over tolerances", node.span)
            case Binary():
                return replace(node, left=self.closed(node.left, nearest), right=self.closed(node.right, nearest))
            case Call(function="dB"):
                return self._decibels(node, nearest)
            case Call():
                return replace(node, arguments=tuple(self.closed(a, nearest) for a in node.arguments))
            case Range():
                raise Doubt("a range has no one value", node.span)
        return node

    def _name(self, ref: Reference, nearest: int) -> Node:
        if ref.prefix in OVER_TOLERANCES:
            return self.values.constant(self.exact(ref, nearest).value, ref.span)
        m = meaning(ref, nearest, self.ledger)
        if m is None:
            sentence, hint = hints.unknown(ref, nearest, self.ledger)
            raise Doubt(sentence, ref.span, hint)
        if m.sort == "quantity" and m.key is not None:
            return self._quantity(ref, m.key)
        if m.defined is not None:
            d = m.defined
            if d.given or d.node is None:
                return self.values.given(d, ref.span)
            return Group(self.closed(d.node, d.nearest), ref.span)
        if m.element is not None and m.key is not None:
            return self._own(ref, m.element, m.key.circuit, nearest)
        return self.values.constant(self.exact(ref, nearest).value, ref.span)

    def _own(self, ref: Reference, e: Element, circuit: int, nearest: int) -> Node:
        amount = self.exact(ref, nearest)
        if e.stated is None or amount.value != e.stated.value:  # changed by a case, which leaves no tolerance
            return self.values.constant(amount.value, ref.span)
        return self.values.own(e, circuit, ref.span)

    def _decibels(self, node: Call, nearest: int) -> Node:
        """``dB`` of a ratio of voltages or currents as 20 log₁₀ of its size, of powers 10 log₁₀."""
        ratio = node.arguments[0]
        while isinstance(ratio, Group) and not ratio.unit.text:
            ratio = ratio.inner
        if isinstance(ratio, Call) and ratio.function == "abs":
            ratio = ratio.arguments[0]
        if not isinstance(ratio, Binary) or ratio.operator != "÷":
            raise Doubt("dB takes a ratio of two voltages, currents or powers", node.span)
        over = self._dimension(ratio.left, nearest)
        factor = {VOLT: 20, AMPERE: 20, WATT: 10}.get(over)
        if factor is None:
            raise Doubt("dB takes a ratio of two voltages, currents or powers", node.span)
        size = Call("abs", (self.closed(ratio, nearest),), node.span)
        return Binary(
            "×", self.values.constant(Fraction(factor), node.span), Call("log10", (size,), node.span), node.span
        )

    def _dimension(self, node: Node, nearest: int) -> Dimension:
        return evaluate(node, lambda ref: self.exact(ref, nearest)).dimension

    # --- quantities -------------------------------------------------------------------------------------------------

    def _quantity(self, ref: Reference, key: Key) -> Node:
        if ref.prefix == "rms":
            return self._rms(key, ref.span)
        if key.letter in ("P", "S", "Q"):
            node = self.power(key, ref.span)
        else:
            circuit = quantities.circuit_of(key, self.ledger, ref.span)
            node = self.reading(key, quantities.frequency_of(key, circuit, self.ledger, ref.span), ref.span)
        return Call(_PARTS[ref.prefix], (node,), ref.span) if ref.prefix in _PARTS else node

    def reading(self, key: Key, frequency: Fraction, span: Span) -> Node:
        """A name for a voltage, current or resistance, the circuit having been solved at its nominal values."""
        name = f"{key.letter} {len(self.readings)}"
        circuit = quantities.circuit_of(key, self.ledger, span)
        quantity = quantities.linear(key, circuit, span, frequency)
        special = (key.letter, key.subscripts, frequency) if quantity.circuit is not circuit else ()
        known = (key.circuit, key.changes, key.due_to, special)
        if known not in self.ledger.prepared:
            made = zeroed(quantity.circuit, key.due_to) if key.due_to else quantity.circuit
            self.ledger.prepared[known] = made
        prepared = self.ledger.prepared[known]
        quantities.solved(prepared, self.ledger, span, frequency)
        if not key.due_to and not special:
            self.wholes[id(prepared)] = prepared, key.circuit
        self.readings[name] = Reading(prepared, frequency, quantity.read, self.values.effects(prepared, key.circuit))
        return Reference(name, span)

    def _rms(self, key: Key, span: Span) -> Node:
        circuit = quantities.circuit_of(key, self.ledger, span)
        terms = []
        for f in quantities.acting(key, circuit, span):
            size = Call("abs", (self.reading(key, f, span),), span)
            terms.append(self._shared(Binary("^", size, _count(2, span), span), f, span))
        return Call("sqrt", (_added(terms, span),), span)

    def power(self, key: Key, span: Span) -> Node:
        """A power as a formula of voltages and currents; of a resistor by its own resistance and current."""
        circuit = quantities.circuit_of(key, self.ledger, span)
        found = quantities.acting(key, circuit, span)
        part = circuit.element(key.subscripts[0])
        if len(key.subscripts) != 1 or part is None or (key.letter != "P" and len(found) > 1):
            quantities.amount(key, self.ledger, span)  # says what is wrong
            raise Doubt("a power is a part's", span)
        currents = {f: self.reading(replace(key, letter="I"), f, span) for f in found}
        if key.letter == "P" and found == (Fraction(0),):
            return self._direct_power(part, currents[found[0]], key, span)
        terms = []
        for f, current in currents.items():
            voltage = self.reading(replace(key, letter="V"), f, span)
            product = Binary("×", voltage, Call("conj", (current,), span), span)
            terms.append(self._shared(product, f, span))
        if key.letter == "S":
            return _added(terms, span)
        return Call("im" if key.letter == "Q" else "re", (_added(terms, span),), span)

    def _direct_power(self, part: Element, current: Node, key: Key, span: Span) -> Node:
        if part.kind == "resistor" and part.value is not None:
            own = self.values.own(part, key.circuit, span)
            if part.stated is not None and part.stated.dimension == SIEMENS:
                own = Binary("÷", _count(1, span), own, span)
            return Call("power", (own, current), span)
        if part.kind == "voltage source" and (not key.due_to or part.name in key.due_to):
            return Binary("×", self.values.own(part, key.circuit, span), current, span)
        if part.kind == "current source" and (not key.due_to or part.name in key.due_to):
            voltage = self.reading(replace(key, letter="V"), Fraction(0), span)
            return Binary("×", voltage, self.values.own(part, key.circuit, span), span)
        return Binary("×", self.reading(replace(key, letter="V"), Fraction(0), span), current, span)

    def _shared(self, node: Node, frequency: Fraction, span: Span) -> Node:
        """A square or a product of phasors as its mean."""
        mean = share(frequency, self.ledger.settings)
        return node if mean == 1 else Binary("×", self.values.constant(mean, span), node, span)


def _count(n: int, span: Span) -> Number:
    return Number(Decimal(n), span)


def _added(terms: list[Node], span: Span) -> Node:
    total = terms[0]
    for term in terms[1:]:
        total = Binary("+", total, term, span)
    return total
