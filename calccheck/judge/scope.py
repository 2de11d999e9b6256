"""What the sheet has established so far, and what a name in a claim means there."""

from __future__ import annotations

import math
import re
from bisect import insort
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from fractions import Fraction
from typing import TYPE_CHECKING, Literal, Protocol

from calccheck.arithmetic import Amount, Doubt, Real, evaluate, size
from calccheck.component_code import component_code
from calccheck.formula import NO_QUALIFIERS, Change, ChangeKind, Node, Reference
from calccheck.judge.phasors import PrintedPhasor, Sized
from calccheck.judge.rounding import Printed
from calccheck.model import Basis, Circuit, Element, Settings, Solution, State, Tolerance, Verdict
from calccheck.units import Dimension

if TYPE_CHECKING:  # loaded late: few sheets state tolerances
    from calccheck.toleranced import Tolerancing

QUANTITY_LETTERS = {"V", "I", "P", "R", "Z", "Isc", "S", "Q"}
_TWO_NODES = {"R", "Z", "Isc"}


@dataclass(frozen=True, slots=True)
class Defined:
    """A name of the sheet: the exact value for formulas, the printed one, and where it comes from.

    ``spread``: how far the exact value may be off because it was worked from rounded numbers (SI, either way). ``node``: the
    formula that defines it, ``nearest`` the circuit above it. ``tolerance``: of an assumption.
    """

    name: str
    exact: Amount
    printed: Printed | PrintedPhasor | None
    basis: Basis
    given: bool
    offset: int
    spread: Real = 0
    node: Node | None = None
    nearest: int = -1
    tolerance: Tolerance | None = None


@dataclass(frozen=True, slots=True)
class Key:
    """What a quantity is, apart from how it is written: the same key, the same value.

    ``frequency``: as told by ``at 50 Hz``, in hertz; ``None`` where the sources that act decide.
    """

    circuit: int
    letter: str
    subscripts: tuple[str, ...]
    due_to: frozenset[str] = frozenset()
    changes: tuple[tuple[str, ChangeKind, Amount | None], ...] = ()
    frequency: Fraction | None = None

    def __hash__(self) -> int:
        """Without changes and frequency, whose rationals cost more to hash than a key to look up."""
        return hash((self.circuit, self.letter, self.subscripts, self.due_to))


@dataclass(frozen=True, slots=True)
class Result:
    """A value printed earlier in the sheet, with the truth it was held against."""

    printed: Printed
    truth: Amount
    verdict: Verdict
    offset: int
    key: Key | None

    @property
    def stands(self) -> bool:
        """Whether it may be carried on."""
        return self.verdict in ("agrees", "rounded", "accepted")


class Solve(Protocol):
    """Solves a circuit at a frequency in hertz (0: DC). Raises ``Doubt`` where it cannot be solved."""

    def __call__(self, circuit: Circuit, frequency: Fraction = Fraction(0)) -> Solution:
        """The solution."""


@dataclass(slots=True)
class Ledger:
    """The sheet's circuits, and what its claims have established up to the present one.

    ``amounts``, ``variants``, ``states``, ``around`` and ``prepared`` keep what was worked out once: quantities by key, changed
    circuits by their changes, states by the sources that act, all values of a circuit, circuits to read from. ``exact``: the values of parts and givens by dimension
    and magnitude; ``standing`` and ``failing``: of those results that may be carried on and of those that may not, the last by
    dimension and magnitude; ``of_quantity``: the former by their quantity and value, the last at the end; ``truths``: their
    exact magnitudes, rising. ``fails`` says why a circuit's parts cannot be in
    the states that the sheet assumes, or nothing. ``tolerances`` works formulas over them. ``assumptions``: of the whole sheet,
    for the values of parts that are worked from them.
    """

    circuits: tuple[Circuit, ...]
    solve: Solve
    settings: Settings
    names: dict[str, Defined] = field(default_factory=dict)
    exact: set[tuple[Dimension, float]] = field(default_factory=set)
    standing: dict[tuple[Dimension, float], Result] = field(default_factory=dict)
    failing: dict[tuple[Dimension, float], Result] = field(default_factory=dict)
    of_quantity: dict[Key, dict[Real, Result]] = field(default_factory=dict)
    truths: dict[Dimension, list[float]] = field(default_factory=dict)
    symbols: Mapping[str, Amount] = field(default_factory=dict)
    amounts: dict[Key, Amount] = field(default_factory=dict)
    variants: dict[object, Circuit] = field(default_factory=dict)
    states: dict[object, State] = field(default_factory=dict)
    around: dict[Key, list[Sized]] = field(default_factory=dict)
    fails: Callable[[Circuit], str] = lambda _: ""
    tolerances: Callable[[], Tolerancing] | None = None
    assumptions: Mapping[str, Defined] = field(default_factory=dict)
    prepared: dict[object, Circuit] = field(default_factory=dict)

    def __post_init__(self) -> None:
        """The values of the parts are known from the beginning."""
        self.exact |= {magnitude(e.stated) for c in self.circuits for e in c.elements if e.stated is not None}


def magnitude(a: Amount) -> tuple[Dimension, float]:
    """Dimension and magnitude, by which printed values are found again: the same digits give the same float."""
    return a.dimension, abs(a.value if isinstance(a.value, complex) else float(a.value))


def given(name: str, ledger: Ledger) -> Defined | None:
    """An assumption of the sheet, above or below."""
    d = ledger.names.get(name)
    return d if d is not None and d.given else ledger.assumptions.get(name)


def define(d: Defined, ledger: Ledger) -> None:
    """A name entered."""
    ledger.names[d.name] = d
    if d.given:
        ledger.exact.add(magnitude(d.exact))


def enter(result: Result, ledger: Ledger) -> None:
    """A printed value entered, for what stands further down."""
    where = ledger.standing if result.stands else ledger.failing
    where[magnitude(result.printed.amount)] = result
    if result.stands:
        insort(ledger.truths.setdefault(result.truth.dimension, []), float(size(result.truth.value)))
    if result.stands and result.key is not None:
        same, value = ledger.of_quantity.setdefault(result.key, {}), result.printed.value
        before = same.pop(value, None)
        same[value] = before if before is not None and before.printed.unit <= result.printed.unit else result


Sort = Literal["quantity", "part", "name", "constant", "bracket"]


@dataclass(frozen=True, slots=True)
class Meaning:
    """What a reference is: a quantity of a circuit, a part's own value, a name of the sheet, a constant, or a bracket.

    ``basis``: of a bracket behind a prefix, what it rests on.
    """

    sort: Sort
    key: Key | None = None
    element: Element | None = None
    defined: Defined | None = None
    constant: Amount | None = None
    basis: Basis = ""


_CONSTANTS = {"j": Amount(1j), "π": Amount(Fraction(math.pi)), "e": Amount(Fraction(math.e))}


def circuit_index(ref: Reference, nearest: int, ledger: Ledger) -> int:
    """The circuit that a reference belongs to. Raises ``Doubt`` where that is open."""
    if ref.qualifiers.circuit:
        called = [k for k, c in enumerate(ledger.circuits) if c.name == ref.qualifiers.circuit]
        if len(called) > 1:
            raise Doubt(f"several circuits are called {ref.qualifiers.circuit}", ref.span)
        if called:
            return called[0]
        known = ", ".join(c.name for c in ledger.circuits if c.name) or "none is named"
        raise Doubt(f"there is no circuit {ref.qualifiers.circuit}; named circuits: {known}", ref.span)
    if len(ledger.circuits) == 1:
        return 0
    if not ledger.circuits:
        return -1
    if nearest < 0 and any(_has(c, k, ref, ledger) for k, c in enumerate(ledger.circuits)):
        raise Doubt("several circuits stand below and none above: say which by of NAME", ref.span)
    return nearest


def _has(circuit: Circuit, index: int, ref: Reference, ledger: Ledger) -> bool:
    """Whether a name is a part or a quantity of a circuit."""
    return circuit.element(ref.word) is not None or quantity_key(ref, index, circuit, ledger) is not None


def meaning(ref: Reference, nearest: int, ledger: Ledger) -> Meaning | None:
    """What a reference means, or ``None`` for a name that nothing has."""
    found = _as_spelt(ref, nearest, ledger)
    if not ref.maths or not ref.subscripts:
        return found
    joined = replace(
        ref, word=ref.letter + "".join(ref.subscripts), letter="", subscripts=(), braced=False, maths=False
    )
    part = _as_spelt(joined, nearest, ledger) if not ref.qualifiers.due_to and not ref.qualifiers.changes else None
    if found is not None and part is not None:
        raise Doubt(
            f"{ref.text} may be {joined.word} or a quantity: write \\mathrm{{{joined.word}}} or put it in code",
            ref.span,
        )
    return found if part is None else part


def _as_spelt(ref: Reference, nearest: int, ledger: Ledger) -> Meaning | None:
    if ref.word in ledger.names and not ref.braced:
        return Meaning("name", defined=ledger.names[ref.word])
    if ref.word in ledger.symbols:
        return Meaning("constant", constant=ledger.symbols[ref.word])
    if ref.word in _CONSTANTS:
        return Meaning("constant", constant=_CONSTANTS[ref.word])
    index = circuit_index(ref, nearest, ledger)
    if index < 0:
        return None
    circuit = ledger.circuits[index]
    key = quantity_key(ref, index, circuit, ledger)
    if key is not None:
        return Meaning("quantity", key=key)
    element = circuit.element(ref.word)
    if element is not None:
        return Meaning("part", element=element, key=Key(index, "", (ref.word,)))
    return None


def is_taken(word: str, nearest: int, ledger: Ledger) -> bool:
    """Whether a plain word is a name where it stands: of the sheet, a constant, or a part."""
    if word in ledger.names or word in ledger.symbols or word in _CONSTANTS:
        return True
    near = ledger.circuits if nearest < 0 or len(ledger.circuits) == 1 else (ledger.circuits[nearest],)
    return any(c.element(word) is not None for c in near)


def quantity_key(ref: Reference, index: int, circuit: Circuit, ledger: Ledger) -> Key | None:
    """The quantity that a reference names in this circuit, or ``None`` where it names none."""
    if ref.letter not in QUANTITY_LETTERS:
        return None
    nodes = circuit.nodes()
    subs = tuple(_in_maths(s, circuit) for s in ref.subscripts) if ref.maths else ref.subscripts
    if ref.letter in _TWO_NODES:
        fits = len(subs) == 2 and all(s in nodes for s in subs)
    elif len(subs) == 2:
        fits = (ref.letter == "V" and all(s in nodes for s in subs)) or (
            ref.letter == "I" and circuit.element(subs[0]) is not None
        )
    else:
        known = circuit.element(subs[0]) is not None or (ref.letter == "V" and subs[0] in nodes)
        fits = len(subs) == 1 and known
    if not fits:
        return None
    q = ref.qualifiers
    if q == NO_QUALIFIERS:
        return Key(index, ref.letter, subs)
    due_to = frozenset(_in_maths(s, circuit) for s in q.due_to) if ref.maths else frozenset(q.due_to)
    told = [*_case(ref, circuit), *q.changes] if q.case else q.changes
    changes = tuple(
        (_in_maths(c.part, circuit) if ref.maths else c.part, c.what, _replacement(c, ledger, circuit)) for c in told
    )
    return Key(index, ref.letter, subs, due_to, changes, q.frequency)


def _case(ref: Reference, circuit: Circuit) -> tuple[Change, ...]:
    """The changes of the case that a quantity is in."""
    for case in circuit.cases:
        if case.name == ref.qualifiers.case:
            return case.changes
    known = ", ".join(c.name for c in circuit.cases) or "none"
    raise Doubt(f"there is no case {ref.qualifiers.case}; cases of this circuit: {known}", ref.span)


def case_changes(name: str, circuit: Circuit, ledger: Ledger) -> tuple[tuple[str, ChangeKind, Amount | None], ...]:
    """The changes of a named case, as keys hold them."""
    case = next(c for c in circuit.cases if c.name == name)
    return tuple((c.part, c.what, _replacement(c, ledger, circuit)) for c in case.changes)


def _in_maths(name: str, circuit: Circuit) -> str:
    """A part's name in maths: ``R_1`` is the part R1 where nothing is called R_1."""
    plain = re.sub(r"[_{}]", "", name)
    return plain if circuit.element(name) is None and circuit.element(plain) is not None else name


def _replacement(change: Change, ledger: Ledger, circuit: Circuit) -> Amount | None:
    """The amount behind ``as``: a value, a value code, a part or a name."""
    if change.value is None:
        return None

    def lookup(ref: Reference) -> Amount:
        if ref.word in ledger.names:
            return ledger.names[ref.word].exact
        if ref.word in ledger.symbols:
            return ledger.symbols[ref.word]
        element = circuit.element(ref.word)
        if element is not None and element.stated is not None:
            return element.stated
        coded = component_code(ref.word)
        if coded is not None:
            return Amount(*coded)
        raise Doubt(f"{ref.word} is no value: write it with its unit", ref.span)

    return evaluate(change.value, lookup)
