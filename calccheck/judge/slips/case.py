"""A wrong value as the hypotheses see it, and what a hypothesis is."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Amount, Doubt, Real, Value
from calccheck.formula import Reference, references
from calccheck.judge.members import Names, Worked
from calccheck.judge.miss import Miss
from calccheck.judge.rounding import Printed, equal, fit
from calccheck.judge.scope import Key, Ledger, Meaning
from calccheck.judge.slips.redo import Redo
from calccheck.model import Circuit, State, Verdict
from calccheck.printing import shown
from calccheck.units import Dimension


@dataclass(frozen=True, slots=True)
class Guess:
    """A slip tried, in words, and one of three ways to the value that it gives.

    ``value``: the value itself, SI, in ``dimension`` (the truth's where none is given). ``circuit``: the circuit with the slip
    in it, in which the whole truth is worked again; ``foreign``: it is another circuit, whose parts may stand elsewhere.
    ``terms``: states, or circuits still to be solved, with the weights with which they add up to the state that the one
    quantity is read from. ``certain``: the working itself shows the slip, whatever the number. ``tried``: how many values were
    tried to find this one.
    """

    what: str
    value: Value | None = None
    dimension: Dimension | None = None
    circuit: Circuit | None = None
    foreign: bool = False
    terms: tuple[tuple[int, State | Circuit], ...] = ()
    certain: bool = False
    tried: int = 1


@dataclass(frozen=True, slots=True)
class Case:
    """A wrong value.

    ``printed``: the first printed value that differs, or ``None`` where a formula or a substitution does and no value.
    ``value``: what is to be explained, SI: the printed value, or what the wrong formula comes to; ``None`` for neither.
    ``meanings``: of all names in ``held``, the member that gives the truth, and in the definitions that it rests on.
    ``index``: the circuit that the truth rests on, −1 for none, several, or one of alternating current.
    """

    miss: Miss
    redo: Redo
    printed: Printed | None
    value: Real | None
    meanings: Mapping[Reference, Meaning]
    index: int

    @property
    def truth(self) -> Real:
        """What the claim comes to, SI."""
        value = self.miss.truth.value
        assert not isinstance(value, complex)
        return value

    @property
    def held(self) -> Worked:
        """The member that gives the truth."""
        return self.miss.held

    @property
    def names(self) -> Names:
        """The meanings of names in this claim."""
        return self.miss.ground.names

    @property
    def ledger(self) -> Ledger:
        """What the sheet has established."""
        return self.miss.ground.ledger

    @property
    def circuit(self) -> Circuit | None:
        """The circuit that the truth rests on."""
        return self.ledger.circuits[self.index] if self.index >= 0 else None

    @property
    def key(self) -> Key | None:
        """The quantity that the truth is, where it is one bare quantity of a circuit."""
        key = self.held.key
        return key if key is not None and key.letter and key.circuit == self.index >= 0 else None

    @property
    def dimension(self) -> Dimension:
        """The dimension of what is to be explained."""
        return self.printed.amount.dimension if self.printed is not None else self.miss.truth.dimension

    def members(self, *verdicts: Verdict) -> list[Worked]:
        """The members judged so."""
        return [w for w, step in self.miss.judged if step.verdict in verdicts]

    def fits(self, value: Real) -> float:
        """How well a value explains the printed one: 1 rounded to it, 0.3 cut off to it, 0 not at all."""
        if self.value is None:
            return 0.0
        if self.printed is None:
            return float(equal(value, self.value))
        if abs(float(self.value) - float(value)) > 1.01 * float(self.printed.unit):
            return 0.0  # the quick answer for nearly all
        return {"exact place": 1.0, "cut off": 0.3}.get(fit(self.printed, value, Fraction(0)), 0.0)

    def say(self, value: Value, dimension: Dimension | None = None) -> str:
        """A value in words, in the unit and to the figures of the printed one."""
        amount = Amount(value, self.dimension if dimension is None else dimension)
        if self.printed is None:
            return shown(amount)
        return shown(amount, self.printed.written_in, max(4, self.printed.figures))


def case_of(miss: Miss, redo: Redo) -> Case | None:
    """The case of a chain with a member that differs; ``None`` where its values are complex."""
    wrong = [w for w, step in miss.judged if step.verdict == "differs" and w.amount is not None]
    if not wrong or isinstance(miss.truth.value, complex):
        return None
    first = wrong[0]
    printed = next((w.printed for w in wrong if isinstance(w.printed, Printed)), None)
    value: Value | None = printed.value if printed is not None else None
    if first.sort == "formula" and first.amount is not None and first.amount.dimension == miss.truth.dimension:
        printed, value = None, first.amount.value  # exact: it says more than the value printed behind it
    if isinstance(value, complex):
        return None
    meanings = _meanings(miss)
    return Case(miss, redo, printed, value, meanings, _index(meanings, miss))


def _index(meanings: Mapping[Reference, Meaning], miss: Miss) -> int:
    """The one circuit of these names, where it is of direct current; else −1."""
    found = {m.key.circuit for m in meanings.values() if m.key is not None and m.key.circuit >= 0}
    if len(found) != 1:
        return -1
    index = found.pop()
    circuit = miss.ground.ledger.circuits[index]
    return -1 if any(e.phasor is not None or e.frequency is not None for e in circuit.elements) else index


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
