"""The nouns that the stages hand on: circuits, claims, solutions, verdicts, findings, reports. Frozen records, no rules."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date
from fractions import Fraction
from functools import cached_property
from typing import Literal, get_args

from calccheck.arithmetic import Amount, Value
from calccheck.document import Block
from calccheck.formula import Change, Node
from calccheck.rules import Severity
from calccheck.source import Sheet, Span
from calccheck.units import UNITS, Dimension

# --- circuits -------------------------------------------------------------------------------------------------------

Kind = Literal[
    "resistor", "voltage source", "current source", "controlled voltage source", "controlled current source",
    "short", "open", "capacitor", "inductor", "impedance", "op-amp", "transformer", "transistor", "diode",
]  # fmt: skip


UNSTATED = Fraction(-1)


@dataclass(frozen=True, slots=True)
class Control:
    """What steers a controlled source: the voltage from node ``plus`` to node ``minus``, or the current of ``part``."""

    plus: str = ""
    minus: str = ""
    part: str = ""


@dataclass(frozen=True, slots=True)
class Tolerance:
    """``±5 %`` (relative fractions), ``±0.1 V`` (absolute, SI), ``+10/−5 %``, ``±50 ppm/K`` (relative, per kelvin)."""

    plus: Fraction
    minus: Fraction
    relative: bool
    per_kelvin: bool
    text: str
    span: Span


@dataclass(frozen=True, slots=True)
class Rating:
    """``max 0.25 W``: the most that a part stands, in SI."""

    value: Fraction
    dimension: Dimension
    text: str
    span: Span


@dataclass(frozen=True, slots=True)
class Device:
    """What the model of a part that is more than a resistance needs, in SI; of each kind only what belongs to it.

    Transistor: ``polarity``, ``state`` active or saturated, ``beta``, ``v_be``, and ``v_ce`` of a saturated one. The drops are
    positive for npn and pnp alike; a pnp's run from emitter to base and from emitter to collector. Diode: ``state`` conducting
    or blocking, and ``drop`` from ``plus``, the anode. Transformer: ``ratio`` of the first pair's turns to the second's.
    Op-amp: the least and most that its output reaches against the reference, ``None`` where not stated. ``tolerances``: by the
    word that they stand behind: ``beta``, ``V_BE``, ``V_CE``, ``drop``.
    """

    state: Literal["", "active", "saturated", "conducting", "blocking"] = ""
    polarity: Literal["", "npn", "pnp"] = ""
    beta: Fraction | None = None
    v_be: Fraction | None = None
    v_ce: Fraction | None = None
    drop: Fraction | None = None
    ratio: Fraction | None = None
    swing_low: Fraction | None = None
    swing_high: Fraction | None = None
    tolerances: tuple[tuple[str, Tolerance], ...] = ()


@dataclass(frozen=True, slots=True)
class Element:
    """A part between two nodes. Current counts from ``plus`` through the part to ``minus`` (IEC 60375).

    ``value``: ohms of a resistor (whether written as a resistance or a conductance), volts or amperes of a source, the gain
    of a controlled source in SI, farads, henries; ``None`` for short, open, parts with a ``device``, ``phasor`` or ``formula``.
    ``stated``: the value as written, with the dimension it was written in, for claims that restate it.
    ``terminals``: of a part with more than two, word and node: base, collector, emitter; plus, minus, out; first+, first-,
    second+, second-. ``phasor``: of an AC source in volts or amperes, of an impedance in ohms, a complex gain; ``value`` is then
    ``None``. ``frequency``: of an AC source in hertz, ``UNSTATED`` where the sheet needs and names none, ``None`` for DC.
    ``formula``: of a value with free symbols, the only names in it; with an amount for each it comes to what ``stated`` would
    be, or, of a controlled source, to its volts or amperes by 1 V or 1 A of what steers it. ``worked``: of a value worked from
    assumptions, the formula with their names in it, which comes to the same. ``drift``: a second tolerance, where one of the
    two is by the kelvin.
    """

    name: str
    kind: Kind
    plus: str
    minus: str
    span: Span
    value: Fraction | None = None
    stated: Amount | None = None
    written: str = ""
    control: Control | None = None
    tolerance: Tolerance | None = None
    ratings: tuple[Rating, ...] = ()
    terminals: tuple[tuple[str, str], ...] = ()
    phasor: complex | None = None
    formula: Node | None = None
    frequency: Fraction | None = None
    device: Device | None = None
    worked: Node | None = None
    drift: Tolerance | None = None

    @property
    def is_source(self) -> bool:
        """Whether it is an independent source, a hand model's drop among them."""
        if self.kind == "diode":
            return self.device is None or self.device.state != "blocking"
        return self.kind in ("voltage source", "current source", "transistor")


@dataclass(frozen=True, slots=True)
class Case:
    """``case hot: Rt = 3.3 kΩ; Q1 beta 80``: a circuit's named case. The changes' values name nothing but free symbols."""

    name: str
    changes: tuple[Change, ...]
    span: Span


@dataclass(frozen=True)
class Circuit:
    """One circuit block as read.

    ``problems``: findings that make every claim on this circuit unchecked (a line that does not parse, say). ``span``: the
    fence's content. ``symbols``: the free symbols of its values with their dimensions, in the order of the block.
    """

    name: str
    elements: tuple[Element, ...]
    reference: str
    span: Span
    problems: tuple[Finding, ...] = ()
    symbols: tuple[tuple[str, Dimension], ...] = ()
    cases: tuple[Case, ...] = ()

    def __hash__(self) -> int:
        """The hash of the fields, worked out once: a circuit is looked up hundreds of times in one sheet."""
        return self._hash

    @cached_property
    def _hash(self) -> int:
        return hash((self.name, self.elements, self.reference, self.span, self.problems))

    @cached_property
    def _by_name(self) -> dict[str, Element]:
        return {e.name: e for e in reversed(self.elements)}

    def element(self, name: str) -> Element | None:
        """The part of that name."""
        return self._by_name.get(name)

    def nodes(self) -> tuple[str, ...]:
        """All nodes, in the order in which the block names them, the reference wherever it stands."""
        return self._nodes

    @cached_property
    def _nodes(self) -> tuple[str, ...]:
        names: dict[str, None] = {}
        for e in self.elements:
            for node in (e.plus, e.minus, *(n for _, n in e.terminals)):
                if node:
                    names.setdefault(node)
        return tuple(names)

    def sources(self) -> tuple[Element, ...]:
        """The independent sources of every frequency, parts with a drop of their hand model among them."""
        return self._sources

    @cached_property
    def _sources(self) -> tuple[Element, ...]:
        return tuple(e for e in self.elements if e.is_source)

    @cached_property
    def frequencies(self) -> tuple[Fraction, ...]:
        """The frequencies of the independent sources, 0 for DC, rising; DC alone where there is no source."""
        return tuple(sorted({s.frequency or Fraction(0) for s in self._sources})) or (Fraction(0),)


@dataclass(frozen=True, slots=True)
class State:
    """Potentials by node (reference 0) in volts and currents by part in amperes, from ``plus`` to ``minus``; complex at AC.

    Of a part with named terminals a current for each, under ``Q1,collector``: the current into that terminal.
    """

    potentials: Mapping[str, Value]
    currents: Mapping[str, Value]


@dataclass(frozen=True, slots=True)
class Solution:
    """A circuit solved twice, at one frequency.

    ``nodal``: the whole circuit in floating point. ``parts``: each independent source of that frequency alone, by name;
    rationals where ``exact``. ``gap``: largest difference of the two routes relative to the circuit's scale; ``residual``:
    largest sum of currents at a node relative to the largest current; ``balance``: sum of all powers relative to the largest.
    ``frequency``: in hertz, ``None`` for DC.
    """

    nodal: State
    parts: Mapping[str, State]
    exact: bool
    gap: float
    residual: float
    balance: float
    volts: float
    amperes: float
    watts: float
    frequency: Fraction | None = None


# --- claims ---------------------------------------------------------------------------------------------------------

Relation = Literal["", "=", "≈", "<", "≤", ">", "≥"]
Place = Literal["code", "working", "table", "math", "prose", "circuit"]
Verdict = Literal["agrees", "rounded", "differs", "unchecked", "accepted", "given"]
Basis = Literal["circuit", "working", ""]


@dataclass(frozen=True, slots=True)
class Member:
    """One member of a chain and the relation before it (none before the first)."""

    relation: Relation
    node: Node
    text: str
    span: Span


@dataclass(frozen=True, slots=True)
class Waiver:
    """``accept 2.71 A for 2.66 A "reason" by QD until 2027-03-01``: the claim's printed value and the computed one."""

    printed: Node
    computed: Node
    reason: str
    by: str
    until: date | None
    span: Span
    text: str


@dataclass(frozen=True, slots=True)
class Problem:
    """Why something could not be read: the reason, its place, and the corrected text where one can be offered."""

    reason: str
    span: Span
    suggestion: str = ""


@dataclass(frozen=True, slots=True)
class Claim:
    """Something that the sheet states, as read.

    ``members``: empty when ``problem`` says why it could not be read. ``circuit``: index of the nearest circuit above, −1
    above the first. ``given``: an assumption; ``from_sheet`` names its source. ``limit_only``: a column of limits, which
    prints no value.
    """

    text: str
    span: Span
    place: Place
    circuit: int
    members: tuple[Member, ...] = ()
    given: bool = False
    tolerance: Tolerance | None = None
    from_sheet: str = ""
    waiver: Waiver | None = None
    problem: Problem | None = None


@dataclass(frozen=True, slots=True)
class Step:
    """The judgement of one ``=`` (or bound) of a chain. ``amount``: what that member comes to."""

    text: str
    span: Span
    relation: Relation
    verdict: Verdict
    amount: Amount | None = None
    message: str = ""


@dataclass(frozen=True, slots=True)
class Slip:
    """A mistake that would give the printed number: its key in the table of slips and one sentence."""

    key: str
    text: str


@dataclass(frozen=True, slots=True)
class Judged:
    """A claim with its verdict.

    ``quantity``: the first member as written. ``claimed``: the printed value in SI, ``claimed_unit`` the unit it was printed
    in. ``computed``: the truth in SI. ``low``, ``high``: of a bound or range. ``deviation``: relative to the truth.
    ``message``: one sentence. ``cautions``: said beside a verdict that stands. ``parts``: of a voltage or current that several
    independent sources bring about, what each brings, by its name in the order of the block; their sum is the truth.
    """

    claim: Claim
    verdict: Verdict
    basis: Basis = ""
    quantity: str = ""
    claimed: Amount | None = None
    claimed_unit: str = ""
    computed: Amount | None = None
    low: Amount | None = None
    high: Amount | None = None
    deviation: float | None = None
    message: str = ""
    steps: tuple[Step, ...] = ()
    cautions: tuple[str, ...] = ()
    slips: tuple[Slip, ...] = ()
    parts: tuple[tuple[str, Amount], ...] = ()


# --- findings and reports -------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Finding:
    """Something to be said about the sheet that is not the verdict of a claim. ``kind``: a key of ``rules.RULES``."""

    kind: str
    severity: Severity
    message: str
    span: Span
    suggestion: str = ""


@dataclass(frozen=True, slots=True)
class CircuitFigures:
    """How well the two routes agree on a circuit; ``None`` where it could not be solved."""

    name: str
    line: int
    nodes: int
    elements: int
    route_gap: float | None
    kcl_residual: float | None
    power_balance: float | None


@dataclass(frozen=True, slots=True)
class Settings:
    """The sheet's and repository's settings, section 7 of the language.

    ``phasors``: ``rms`` or ``peak``; ``derate``: fraction of every rating; ``preferred``: an IEC 60063 series or nothing;
    ``frequency``: of unmarked AC parts, as written. ``temperature``: lowest and highest in °C, for tolerances by the kelvin.
    ``spread``: of random values within tolerances; ``samples`` of them are drawn from ``seed``.
    """

    carry: Fraction = Fraction(5, 1000)
    approx: Fraction = Fraction(5, 100)
    phasors: str = "rms"
    derate: Fraction = Fraction(1)
    preferred: str = ""
    frequency: str = ""
    on: date | None = None
    temperature: tuple[Fraction, Fraction] | None = None
    spread: Literal["uniform", "normal"] = "uniform"
    samples: int = 100_000
    seed: int = 1

    @property
    def hertz(self) -> Fraction:
        """The frequency of unmarked AC parts in hertz, 0 where none is given."""
        number, _, unit = self.frequency.partition(" ")
        try:
            return Fraction(number) * UNITS[unit].factor
        except (ValueError, KeyError):
            return Fraction(0)


Role = Literal["originator", "checker", "approver"]
ROLES: tuple[Role, ...] = get_args(Role)


@dataclass(frozen=True, slots=True)
class Signature:
    """A signature under a sheet, as it stands in the front matter.

    ``form``: version of the canonical form that was digested; ``digest``: of the whole, SHA-256 in hexadecimal; ``parts``:
    the beginning of the digest of each part by its name (``signatures.PARTS``).
    """

    role: Role
    name: str
    on: date
    form: int
    digest: str
    parts: Mapping[str, str]
    span: Span


@dataclass(frozen=True, slots=True)
class Reading:
    """A sheet as read: what the first stage hands on.

    ``title``: front matter fields as text, in the order written, without settings and signatures.
    """

    sheet: Sheet
    page: tuple[Block, ...]
    is_calc: bool
    title: Mapping[str, str]
    settings: Settings
    circuits: tuple[Circuit, ...]
    claims: tuple[Claim, ...]
    findings: tuple[Finding, ...]
    not_read: int = 0
    signatures: tuple[Signature, ...] = ()


@dataclass(frozen=True, slots=True)
class Sensitivity:
    """How a value moves a quantity. ``by_percent``: when it rises by 1 %, to first order; ``low``, ``high``: at its ends, alone."""

    name: str
    by_percent: Amount
    low: Amount
    high: Amount


@dataclass(frozen=True, slots=True)
class WorkedQuantity:
    """One quantity worked out both ways, in SI.

    ``rows``: each source alone with the quantity's value; ``total``: their sum; ``nodal``: the value of the whole by nodal
    analysis, ``None`` where only some of the sources act; ``gap``: of the two routes, relative to the circuit's scale.
    ``sensitivities``: of a phasor's magnitude, the value that moves it most first.
    """

    quantity: str
    rows: tuple[tuple[str, Amount], ...]
    total: Amount
    nodal: Amount | None
    gap: float
    sensitivities: tuple[Sensitivity, ...] = ()


@dataclass(frozen=True, slots=True)
class RatingHeld:
    """A part held against one of its ratings, at the worst within tolerances.

    ``limit``: the derated rating; ``share``: of it that the worst takes; ``where``: the values that make it the worst;
    ``proved``: whether none is worse, or only none was found. ``case``: the named case, empty for the circuit as drawn.
    """

    part: str
    circuit: str
    case: str
    rating: Rating
    limit: Amount
    worst: Amount
    share: float
    where: str
    proved: bool


@dataclass(frozen=True, slots=True)
class Report:
    """Everything the program has to say about one sheet. ``ratings``: every rating, the nearest to its limit first."""

    reading: Reading
    claims: tuple[Judged, ...] = ()
    findings: tuple[Finding, ...] = ()
    figures: tuple[CircuitFigures, ...] = ()
    solutions: tuple[Solution | None, ...] = field(default=(), repr=False)
    ratings: tuple[RatingHeld, ...] = ()

    @property
    def counts(self) -> dict[Verdict, int]:
        """Number of claims by verdict, every verdict named."""
        names: tuple[Verdict, ...] = ("agrees", "rounded", "differs", "unchecked", "accepted", "given")
        return {name: sum(j.verdict == name for j in self.claims) for name in names}

    @property
    def clean(self) -> bool:
        """Whether nothing is to be mended: no claim differs or is unchecked, no finding is an error."""
        return not (
            any(j.verdict in ("differs", "unchecked") for j in self.claims)
            or any(f.severity == "error" for f in self.findings)
        )

    @property
    def verdict(self) -> Verdict:
        """The worst verdict in the sheet."""
        if any(j.verdict == "differs" for j in self.claims):
            return "differs"
        return "agrees" if self.clean else "unchecked"
