"""A wrong value as the hypotheses see it, and what a hypothesis is."""

from __future__ import annotations

import cmath
import math
from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Amount, Value, size
from calccheck.formula import Prefix, Reference
from calccheck.judge import say
from calccheck.judge.members import Names, Worked
from calccheck.judge.miss import Miss
from calccheck.judge.rounding import equal
from calccheck.judge.scope import Key, Ledger, Meaning
from calccheck.judge.slips.figures import Figure
from calccheck.judge.slips.redo import Redo
from calccheck.model import Circuit, State, Verdict
from calccheck.printing import shown
from calccheck.units import Dimension, Unit

Terms = tuple[tuple[float, State | Circuit, Fraction], ...]


@dataclass(frozen=True, slots=True)
class Guess:
    """A slip tried, in words, and one of three ways to the value that it gives.

    ``value``: the value itself, SI, in ``dimension`` (the truth's where none is given). ``circuit``: the circuit with the slip
    in it, in which the whole truth is worked again; ``foreign``: it is another circuit, whose parts may stand elsewhere.
    ``terms``: states, or circuits still to be solved, each with its frequency and with the weight with which it adds to the
    state that the one quantity is read from. ``sized``: only the magnitude of the value is meant, its angle is the truth's.
    ``certain``: the working itself shows the slip, whatever the number. ``tried``: how many values were tried to find this one.
    """

    what: str
    value: Value | None = None
    dimension: Dimension | None = None
    circuit: Circuit | None = None
    foreign: bool = False
    terms: Terms = ()
    sized: bool = False
    certain: bool = False
    tried: int = 1


@dataclass(frozen=True, slots=True)
class Case:
    """A wrong value.

    ``figures``: of the first printed value that differs, none where a formula or a substitution does and no value.
    ``value``: what is to be explained, SI: the printed value, or what the wrong formula comes to; ``None`` for neither.
    ``truth``: what the claim comes to, SI, in decibels where it is printed so; ``ten_log``: 10 or 20 there, the factor of the
    logarithm. ``meanings``: of all names in ``held``, the member that gives the truth, and in the definitions that it rests on.
    ``index``: the circuit that the truth rests on, −1 for none or several. ``key``: the quantity that the truth is, or whose
    ``which`` it is, where it is one bare quantity of that circuit; ``frequencies``: those at which it is worked.
    """

    miss: Miss
    redo: Redo
    figures: tuple[Figure, ...]
    written_in: Unit
    value: Value | None
    truth: Value
    ten_log: int
    meanings: Mapping[Reference, Meaning]
    index: int
    key: Key | None
    which: Prefix
    frequencies: tuple[Fraction, ...]

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
    def dimension(self) -> Dimension:
        """The dimension of what is to be explained."""
        return self.figures[0].printed.amount.dimension if self.figures else self.miss.truth.dimension

    @property
    def level(self) -> bool:
        """Whether the truth is a number of decibels."""
        return bool(self.ten_log) or self.miss.truth.level

    @property
    def alternating(self) -> bool:
        """Whether the truth rests on a circuit, or the sheet on any, in which a source has a frequency."""
        circuits = [self.circuit] if self.circuit is not None else self.ledger.circuits
        return any(f != 0 for c in circuits for f in c.frequencies)

    def members(self, *verdicts: Verdict) -> list[Worked]:
        """The members judged so."""
        return [w for w, step in self.miss.judged if step.verdict in verdicts]

    def fits(self, value: Value) -> float:
        """How well a value explains the printed one: 1 rounded to it, 0.3 cut off to it, 0 not at all."""
        if self.value is None:
            return 0.0
        if not self.figures:
            return float(equal(value, self.value))
        return min(f.fits(value) for f in self.figures)

    def cell(self, value: Value) -> tuple[int, ...]:
        """What a value would be printed as: equal for values that look alike."""
        if not self.figures:
            grain = 1e-9 * (float(size(self.truth)) or 1.0)
            return round(value.real / grain), round(value.imag / grain) if isinstance(value, complex) else 0
        shown = [(f.of(value), float(f.printed.unit)) for f in self.figures]
        return tuple(round(x / unit) if abs(x) < 1e300 * unit else 0 for x, unit in shown)

    @property
    def wrong(self) -> list[Figure]:
        """The printed figures that are wrong; all where none is by itself."""
        return [f for f in self.figures if not f.fits(self.truth)] or list(self.figures)

    @property
    def chance(self) -> float:
        """How likely a wrong number without a slip is to be this one: one of all that lie as near the truth, or within 20 %."""
        if not self.figures or self.value is None:
            return 0.0
        return math.prod(float(f.printed.unit) / (2 * f.near) for f in self.wrong if f.near)

    def log(self, value: Value) -> Value:
        """A ratio in decibels where the claim prints it so; any other value as it is."""
        return self.ten_log * math.log10(size(value)) if self.ten_log else value

    def sized(self, value: Value) -> Value:
        """A magnitude with the angle of the truth."""
        return cmath.rect(float(size(value)), cmath.phase(complex(self.truth))) if len(self.figures) == 2 else value

    def say(self, value: Value, dimension: Dimension | None = None) -> str:
        """A value in words, in the unit, to the figures and in the form of the printed one."""
        amount = Amount(value, self.dimension if dimension is None else dimension, level=self.level)
        if not self.figures:
            return shown(amount)
        figures = max(4, *(f.printed.figures for f in self.figures))
        if len(self.figures) == 2 and self.figures[0].which == "re":
            return say.rectangular(amount, self.written_in, figures)
        return shown(amount, self.written_in, figures)
