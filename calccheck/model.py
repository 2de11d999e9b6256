"""The nouns that the stages hand on: circuits, claims, solutions, verdicts, findings, reports. Frozen records, no rules."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date
from fractions import Fraction
from typing import Literal, get_args

from calccheck.arithmetic import Amount
from calccheck.circuits import (
    UNSTATED,
    Case,
    Circuit,
    Control,
    Device,
    Element,
    Kind,
    Rating,
    Solution,
    State,
    Tolerance,
)
from calccheck.document import Block
from calccheck.formula import Node
from calccheck.rules import Finding
from calccheck.source import Sheet, Span
from calccheck.units import UNITS

__all__ = [
    "ROLES",
    "UNSTATED",
    "Basis",
    "Case",
    "Circuit",
    "CircuitFigures",
    "Claim",
    "Control",
    "Device",
    "Element",
    "Finding",
    "Judged",
    "Kind",
    "Member",
    "Place",
    "Problem",
    "Rating",
    "RatingHeld",
    "Reading",
    "Relation",
    "Report",
    "Role",
    "Sensitivity",
    "Settings",
    "Signature",
    "Slip",
    "Solution",
    "State",
    "Step",
    "Tolerance",
    "Verdict",
    "Waiver",
    "WorkedQuantity",
]

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
class Sensitivity:
    """How a value moves a quantity. ``by_percent``: when it rises by 1 %, to first order; ``low``, ``high``: at its ends, alone."""

    name: str
    by_percent: Amount
    low: Amount
    high: Amount


@dataclass(frozen=True, slots=True)
class Judged:
    """A claim with its verdict.

    ``quantity``: the first member as written. ``claimed``: the printed value in SI, ``claimed_unit`` the unit it was printed
    in. ``computed``: the truth in SI. ``low``, ``high``: of a bound or range. ``deviation``: relative to the truth.
    ``message``: one sentence. ``cautions``: said beside a verdict that stands. ``parts``: of a voltage or current that several
    independent sources bring about, what each brings, by its name in the order of the block; their sum is the truth.
    ``moves``: of one that is claimed over its tolerances, what moves it, largest first.
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
    moves: tuple[Sensitivity, ...] = ()


# --- findings and reports -------------------------------------------------------------------------------------------


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
