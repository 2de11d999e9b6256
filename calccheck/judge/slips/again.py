"""The truth of a claim worked again with a slip in it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from math import prod

from calccheck.arithmetic import Amount, DimensionFault, Doubt, Value, evaluate, trimmed
from calccheck.formula import Reference
from calccheck.judge.quantities import linear
from calccheck.judge.scope import Key
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.redo import NOWHERE
from calccheck.model import Circuit, State
from calccheck.units import AMPERE, OHM, VOLT, WATT

Read = Callable[[State], Value]
_DIMENSIONS = {"V": VOLT, "I": AMPERE, "Isc": AMPERE, "P": WATT, "R": OHM, "Z": OHM}


@dataclass(slots=True)
class Again:
    """The guesses about one case, worked. ``readers``: how each quantity is read from a state, a power as two factors."""

    case: Case
    readers: dict[Key, tuple[Read, ...]] = field(default_factory=dict)

    def to_solve(self, guess: Guess) -> list[Circuit]:
        """The circuits whose solutions a guess needs; none where the quantity cannot be in one of them."""
        if guess.circuit is None:
            return [c for _, c in guess.terms if isinstance(c, Circuit)]
        try:
            return [self.case.redo.prepared(guess.circuit, key) for key in self._keys()]
        except Doubt:
            return []

    def value(self, guess: Guess) -> Value | None:
        """The value that a guess gives, once its circuits are solved; ``None`` where it gives none."""
        try:
            if guess.terms:
                return self._summed(guess)
            return guess.value if guess.circuit is None else self._worked(guess, guess.circuit)
        except (Doubt, DimensionFault, KeyError, ZeroDivisionError, OverflowError):
            return None  # the slip makes no sense in this claim: a node is gone, or nothing flows

    def _keys(self) -> set[Key]:
        return {m.key for m in self.case.meanings.values() if m.sort == "quantity" and m.key is not None}

    def _summed(self, guess: Guess) -> Value:
        """One quantity read from a weighted sum of states."""
        key, circuit, redo = self.case.key, self.case.circuit, self.case.redo
        assert key is not None and circuit is not None
        states = [(w, redo.state(s) if isinstance(s, Circuit) else s) for w, s in guess.terms]
        return prod(sum(w * read(s) for w, s in states) for read in self._reads(key, circuit))

    def _worked(self, guess: Guess, circuit: Circuit) -> Value:
        """The whole truth worked with the quantities and parts of another circuit."""
        if self.case.key is not None:
            return self._read(self.case.key, guess, circuit)

        def lookup(ref: Reference) -> Amount:
            meaning = self.case.meanings.get(ref)
            if meaning is None:
                return self.case.names.amount(ref)
            if meaning.sort == "quantity" and meaning.key is not None:
                value = self._read(meaning.key, guess, circuit)
                return Amount(trimmed(value), _DIMENSIONS[meaning.key.letter])
            if meaning.sort == "part":
                element = circuit.element(ref.word)
                if element is None or element.stated is None:
                    raise Doubt("the part is gone")
                return element.stated
            if meaning.defined is not None and meaning.defined.node is not None:
                return evaluate(meaning.defined.node, lookup)
            return self.case.names.amount(ref)

        return evaluate(self.case.held.node, lookup).value

    def _read(self, key: Key, guess: Guess, circuit: Circuit) -> Value:
        state = self.case.redo.state(self.case.redo.prepared(circuit, key))
        at_home = self.case.circuit if not guess.foreign else None
        return prod(read(state) for read in self._reads(key, at_home or circuit, keep=at_home is not None))

    def _reads(self, key: Key, circuit: Circuit, keep: bool = True) -> tuple[Read, ...]:
        """The readings whose product the quantity is; the same for all variants of the claim's own circuit."""
        if keep and key in self.readers:
            return self.readers[key]
        base = self.case.redo.prepared(circuit, key)
        letters = ("V", "I") if key.letter == "P" else (key.letter,)
        reads = tuple(linear(replace(key, letter=x), base, NOWHERE).read for x in letters)
        if keep:
            self.readers[key] = reads
        return reads
