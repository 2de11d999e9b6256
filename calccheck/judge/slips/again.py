"""The truth of a claim worked again with a slip in it."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field, replace
from fractions import Fraction

from calccheck.arithmetic import Amount, DimensionFault, Doubt, Value, evaluate, trimmed
from calccheck.formula import Prefix, Reference
from calccheck.judge import powers
from calccheck.judge.quantities import linear
from calccheck.judge.scope import Key
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.case_of import frequencies_of
from calccheck.judge.slips.figures import taken
from calccheck.judge.slips.redo import NOWHERE
from calccheck.model import Circuit, State
from calccheck.units import AMPERE, NONE, OHM, VOLT, WATT

Read = Callable[[State], Value]
Weighted = Iterable[tuple[float, State]]
POWERS = ("P", "S", "Q")
_DIMENSIONS = {"V": VOLT, "I": AMPERE, "Isc": AMPERE, "P": WATT, "S": WATT, "Q": WATT, "R": OHM, "Z": OHM}


@dataclass(slots=True)
class Again:
    """The guesses about one case, worked.

    ``readers``: how each quantity is read from a state, a power as two factors; ``at``: the frequencies of each.
    """

    case: Case
    readers: dict[tuple[Key, Fraction], tuple[Read, ...]] = field(default_factory=dict)
    at: dict[tuple[Key, Prefix], tuple[Fraction, ...]] = field(default_factory=dict)

    def to_solve(self, guess: Guess) -> list[tuple[Circuit, Fraction]]:
        """The circuits, with their frequencies, whose solutions a guess needs; none where the quantity cannot be in one."""
        if guess.circuit is None:
            return [(c, f) for _, c, f in guess.terms if isinstance(c, Circuit)]
        redo, circuit = self.case.redo, guess.circuit
        try:
            return [
                (redo.prepared(circuit, key, f), f)
                for key, which in self._quantities()
                for f in self._frequencies(key, which, guess, circuit)
            ]
        except Doubt:
            return []

    def value(self, guess: Guess) -> Value | None:
        """The value that a guess gives, once its circuits are solved; ``None`` where it gives none."""
        if guess.circuit is None and not guess.terms:
            return guess.value
        try:
            found = self._summed(guess) if guess.circuit is None else self._worked(guess, guess.circuit)
            found = self.case.log(trimmed(found))
            return self.case.sized(found) if guess.sized else found
        except (Doubt, DimensionFault, KeyError, ArithmeticError, ValueError):
            return None  # the slip makes no sense in this claim: a node is gone, or nothing flows

    def _quantities(self) -> set[tuple[Key, Prefix]]:
        if self.case.key is not None:
            return {(self.case.key, self.case.which)}
        meanings = self.case.meanings.items()
        return {(m.key, ref.prefix) for ref, m in meanings if m.sort == "quantity" and m.key is not None}

    def _frequencies(self, key: Key, which: Prefix, guess: Guess, circuit: Circuit) -> tuple[Fraction, ...]:
        """Those of the claim's own circuit, whatever the slip did to its sources."""
        home = self.case.circuit
        if guess.foreign or home is None:
            return frequencies_of(key, which, circuit, self.case.ledger)
        if (key, which) not in self.at:
            self.at[key, which] = frequencies_of(key, which, home, self.case.ledger)
        return self.at[key, which]

    def _summed(self, guess: Guess) -> Value:
        """One quantity read from a weighted sum of states."""
        key, circuit, redo = self.case.key, self.case.circuit, self.case.redo
        assert key is not None and circuit is not None
        each: dict[Fraction, list[tuple[float, State]]] = {}
        for w, s, f in guess.terms:
            each.setdefault(f, []).append((w, redo.state(s, f) if isinstance(s, Circuit) else s))
        return self.read(key, self.case.which, circuit, each)

    def _worked(self, guess: Guess, circuit: Circuit) -> Value:
        """The whole truth worked with the quantities and parts of another circuit."""
        if self.case.key is not None:
            return self._quantity(self.case.key, self.case.which, guess, circuit)

        def lookup(ref: Reference) -> Amount:
            meaning = self.case.meanings.get(ref)
            if meaning is None:
                return self.case.names.amount(ref)
            if meaning.sort == "quantity" and meaning.key is not None:
                value = self._quantity(meaning.key, ref.prefix, guess, circuit)
                return Amount(trimmed(value), NONE if ref.prefix == "arg" else _DIMENSIONS[meaning.key.letter])
            if meaning.sort == "part":
                element = circuit.element(ref.word)
                if element is None or element.stated is None:
                    raise Doubt("the part is gone")
                return element.stated
            if meaning.defined is not None and meaning.defined.node is not None:
                return evaluate(meaning.defined.node, lookup)
            return self.case.names.amount(ref)

        return evaluate(self.case.held.node, lookup).value

    def _quantity(self, key: Key, which: Prefix, guess: Guess, circuit: Circuit) -> Value:
        redo, home = self.case.redo, self.case.circuit
        at = self._frequencies(key, which, guess, circuit)
        each = {f: [(1.0, redo.state(redo.prepared(circuit, key, f), f))] for f in at}
        if guess.foreign or home is None:
            return self.read(key, which, circuit, each, keep=False)
        return self.read(key, which, home, each)

    def read(
        self, key: Key, which: Prefix, circuit: Circuit, each: Mapping[Fraction, Weighted], keep: bool = True
    ) -> Value:
        """A quantity, or its magnitude, angle, part or rms value, from the weighted states at each frequency."""
        found: dict[Fraction, tuple[Value, ...]] = {}
        for f, states in each.items():
            reads = self._reads(key, circuit, f, keep)
            found[f] = tuple(
                sum(s if w == 1 else w * s for w, s in ((w, read(s)) for w, s in states)) for read in reads
            )
        settings = self.case.ledger.settings
        if key.letter in POWERS:
            return taken(which, powers.power(key.letter, {f: (x[0], x[1]) for f, x in found.items()}, settings))
        if which == "rms":
            return powers.rms({f: x[0] for f, x in found.items()}, settings)
        (x,) = found.values()
        return taken(which, x[0])

    def _reads(self, key: Key, circuit: Circuit, frequency: Fraction, keep: bool) -> tuple[Read, ...]:
        """The readings that a quantity is made of; the same for all variants of the claim's own circuit."""
        if keep and (key, frequency) in self.readers:
            return self.readers[key, frequency]
        base = self.case.redo.prepared(circuit, key, frequency)
        letters = ("V", "I") if key.letter in POWERS else (key.letter,)
        reads = tuple(linear(replace(key, letter=x), base, NOWHERE, frequency).read for x in letters)
        if keep:
            self.readers[key, frequency] = reads
        return reads
