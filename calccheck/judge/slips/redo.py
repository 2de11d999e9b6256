"""Circuits with slips in them: each made, prepared and solved once in a sheet, those of one claim in one batch."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction

from calccheck.arithmetic import Doubt, Value
from calccheck.judge.changes import zeroed
from calccheck.judge.quantities import linear, with_changes
from calccheck.judge.scope import Key
from calccheck.model import Circuit, Element, Solution, State
from calccheck.source import Span

NOWHERE = Span(0, 0)
SolveBatch = Callable[[Sequence[Circuit], Fraction], Sequence[State | None]]
Needed = tuple[Circuit, Fraction]  # a circuit to solve, and the frequency at which


@dataclass(frozen=True, slots=True)
class Earlier:
    """The circuits of an earlier version of the sheet. ``label``: what the version is called, such as a commit and its day."""

    label: str
    circuits: tuple[Circuit, ...]


@dataclass(frozen=True, slots=True)
class Variant:
    """A circuit with a slip in it, and the slip in words."""

    what: str
    circuit: Circuit


Make = Callable[[Circuit, frozenset[str]], Iterator[Variant]]


class Redo:
    """What hypotheses are worked with in one sheet.

    Circuits are told apart by identity, since comparing them costs more than solving them: each variant is made once, by
    ``variants`` or ``prepared``, and kept.
    """

    __slots__ = ("_kept", "_parts", "_prepared", "_solve_batch", "_solve_one", "_states", "_variants", "earlier")

    def __init__(
        self,
        solve_one: Callable[[Circuit, Fraction], Solution],
        solve_batch: SolveBatch,
        earlier: Callable[[], Sequence[Earlier]],
    ) -> None:
        self._solve_one, self._solve_batch, self.earlier = solve_one, solve_batch, earlier
        self._kept: list[Circuit] = []  # so that no identity is used twice
        self._variants: dict[tuple[object, ...], tuple[Variant, ...]] = {}
        self._prepared: dict[tuple[object, ...], Circuit] = {}
        self._states: dict[tuple[int, Fraction], State | None] = {}
        self._parts: dict[tuple[int, Fraction], Mapping[str, State]] = {}

    def variants(self, make: Make, circuit: Circuit, keep: frozenset[str] = frozenset()) -> tuple[Variant, ...]:
        """The variants of a circuit that ``make`` yields, made once; the parts of ``keep`` stay as they are."""
        known = (make, id(circuit), keep)
        if known not in self._variants:
            self._kept.append(circuit)
            self._variants[known] = tuple(make(circuit, keep))
        return self._variants[known]

    def prepared(self, circuit: Circuit, key: Key, frequency: Fraction) -> Circuit:
        """A circuit or a variant of it as a quantity's qualifiers and kind ask for it to be solved. Raises ``Doubt``."""
        special = (key.letter, key.subscripts, frequency) if key.letter in ("R", "Z", "Isc") else ()
        known = (id(circuit), key.changes, key.due_to, special)
        if known not in self._prepared:
            self._kept.append(circuit)
            made = with_changes(circuit, key, NOWHERE)
            if special:
                made = linear(key, made, NOWHERE, frequency).circuit
            self._prepared[known] = zeroed(made, key.due_to) if key.due_to else made
        return self._prepared[known]

    def solve(self, needed: Iterable[Needed]) -> None:
        """Solves what is not solved yet, in one batch for each frequency."""
        new = {(id(c), f): c for c, f in needed if (id(c), f) not in self._states}
        self._kept += new.values()
        for frequency in {f for _, f in new}:
            some = {known: c for known, c in new.items() if known[1] == frequency}
            self._states |= zip(some, self._solve_batch(list(some.values()), frequency), strict=True)

    def work(self, needed: Iterable[Needed]) -> float:
        """What solving them would take: the cubes of their numbers of equations, fourfold for complex ones, solved ones free."""
        new = {(id(c), f): c for c, f in needed if (id(c), f) not in self._states}
        return float(sum((4 if f else 1) * (2 * len(c.elements)) ** 3 for (_, f), c in new.items()))

    def state(self, circuit: Circuit, frequency: Fraction) -> State:
        """The state of a circuit that ``solve`` has met. Raises ``Doubt`` where it has none."""
        state = self._states.get((id(circuit), frequency))
        if state is None:
            raise Doubt("the circuit with this slip in it has no solution")
        return state

    def parts(self, circuit: Circuit, frequency: Fraction) -> Mapping[str, State]:
        """The states due to each source of a frequency alone, in floating point. Raises ``Doubt``."""
        known = (id(circuit), frequency)
        if known not in self._parts:
            self._kept.append(circuit)
            parts = self._solve_one(circuit, frequency).parts
            self._parts[known] = {name: _floats(s) for name, s in parts.items()}
        return self._parts[known]


def put(circuit: Circuit, changed: Sequence[Element]) -> Circuit:
    """The circuit with parts of the same names in the place of its own."""
    new = {e.name: e for e in changed}
    return replace(circuit, elements=tuple(new.get(e.name, e) for e in circuit.elements))


def _floats(state: State) -> State:
    potentials = {name: _float(x) for name, x in state.potentials.items()}
    return State(potentials, {name: _float(x) for name, x in state.currents.items()})


def _float(x: Value) -> Value:
    return float(x) if isinstance(x, Fraction) else x
