"""A claim judged: every ``=`` of its chain by itself against the one truth of the chain, every bound against the exact limit."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from fractions import Fraction
from itertools import pairwise

from calccheck.arithmetic import Amount, DimensionFault, Doubt
from calccheck.formula import OVER_TOLERANCES, Node, Reference
from calccheck.judge import say
from calccheck.judge.bounds import BOUNDS, at_worst, judge_bound
from calccheck.judge.ground import Ground
from calccheck.judge.members import Names, Worked, work, work_all
from calccheck.judge.miss import Miss
from calccheck.judge.new_names import assume, new_name
from calccheck.judge.phasors import PrintedPhasor, is_angle, nearest_turn, parts
from calccheck.judge.rounding import Printed, deviation
from calccheck.judge.scope import Defined, Key, Ledger, Result, define, enter
from calccheck.judge.steps import judge_member
from calccheck.judge.working import by_source, moves_of
from calccheck.model import Basis, Claim, Finding, Judged, Sensitivity, Step, Verdict
from calccheck.rules import RULES

_ORDER: dict[Verdict, int] = {"agrees": 0, "given": 0, "rounded": 1, "accepted": 2, "unchecked": 3, "differs": 4}

_RANK = {"formula": 1, "substitution": 2, "value": 3, "range": 4, "new name": 9}  # what gives a chain its truth


@dataclass(slots=True)
class Work:
    """One claim while it is judged."""

    claim: Claim
    ledger: Ledger
    names: Names
    steps: list[Step] = field(default_factory=list)
    cautions: list[str] = field(default_factory=list)
    findings: list[Finding] = field(default_factory=list)
    miss: Miss | None = None


@dataclass(frozen=True, slots=True)
class Segment:
    """The members between two bounds: one chain of ``=`` with one truth. ``at``: index of the member that is the truth."""

    members: tuple[Worked, ...]
    at: int
    truth: Amount | None

    @property
    def basis(self) -> Basis:
        """What the truth rests on."""
        return self.members[self.at].basis or "working"

    @property
    def only_a_value(self) -> bool:
        """Whether nothing but a printed value stands here, as a limit does."""
        return all(w.sort == "value" for w in self.members)


def judge_claim(claim: Claim, ledger: Ledger) -> tuple[Judged, tuple[Finding, ...], Miss | None]:
    """The verdict on one claim, findings, and the ground for naming a slip where a member differs.

    Names that the claim defines and values that it prints are entered in the ledger.
    """
    if claim.problem is not None:
        return Judged(claim, "unchecked", message=say.reason(claim.problem.reason, claim.problem.suggestion)), (), None
    job = Work(claim, ledger, Names(claim.circuit, ledger))
    try:
        judged = assume(claim, ledger, job.names) if claim.given else _chain(job)
    except Doubt as d:
        judged = Judged(claim, "unchecked", quantity=claim.members[0].text, message=say.reason(d.reason, d.suggestion))
    return judged, tuple(job.findings), job.miss


# --- chains ---------------------------------------------------------------------------------------------------------


def _range_claim(job: Work) -> Judged:
    """A claim about both extremes, or about a middle and a deviation."""
    from calccheck.judge.two_sided import judge_range, truth_of  # late: few sheets claim any

    members = job.claim.members
    first = next(m for m in members if isinstance(m.node, Reference) and m.node.prefix in ("worst", "rss"))
    ref = first.node
    assert isinstance(ref, Reference)
    truth = truth_of(ref, job.names)
    basis = work(first, job.names).basis or "working"
    source = Worked(first, ref, "formula", basis, truth.nominal, nodes=(ref,))
    for m in members:
        if m is first:
            continue
        if (m.relation or members[1].relation) not in ("=", "≈"):
            raise Doubt(f"a bound stands behind {ref.text.removeprefix(ref.prefix).strip()} itself", m.span)
        found = judge_range(m, ref, source, truth, job.names)
        job.steps.append(found.step)
        job.cautions += found.cautions
        job.findings += found.findings
        job.miss = job.miss or found.miss
    worst = max(job.steps, key=lambda s: _ORDER[s.verdict])
    told = "; ".join(t for t in (worst.message, truth.told) if t)
    cautions = tuple(dict.fromkeys(job.cautions))
    return Judged(
        job.claim, worst.verdict, basis, ref.text, computed=truth.nominal, low=truth.low, high=truth.high,
        message=told, steps=tuple(job.steps), cautions=cautions, moves=_moves(ref, job),
    )  # fmt: skip


def _chain(job: Work) -> Judged:
    if any(isinstance(m.node, Reference) and m.node.prefix in ("worst", "rss") for m in job.claim.members):
        return _range_claim(job)
    workings = work_all(job.claim.members, job.names)
    name = new_name(workings, job.claim, job.ledger)
    segments = [_segment(part) for part in _parted(workings)]
    main = next((s for s in segments if s.basis == "circuit" and not s.only_a_value), None) or next(
        (s for s in segments if not s.only_a_value), segments[0]
    )
    key: Key | None = None
    printings: list[tuple[Printed | PrintedPhasor, Step]] = []
    for k, segment in enumerate(segments):
        if segment.truth is None:
            _no_truth(segment, job)
            continue
        segments[k], found = _judge_segment(segment, job)
        if segment is main:
            main = segments[k]
            key, printings = main.members[main.at].key, found
    _bounds(segments, job)
    judged = _summed_up(main, printings, job, workings, _limits(segments, main))
    _enter(judged, main, name, key, printings, job)
    return judged


def _by_source(main: Segment, job: Work) -> tuple[tuple[str, Amount], ...]:
    """What each source brings to the quantity that a claim states whole."""
    w = main.members[main.at]
    whole = isinstance(w.node, Reference) and not w.node.prefix and not job.ledger.symbols
    return by_source(w.key, job.ledger, w.member.span) if whole else ()


def _moves(node: Node, job: Work) -> tuple[Sensitivity, ...]:
    """What moves a voltage, current or resistance that is claimed over its tolerances."""
    if not isinstance(node, Reference) or node.prefix not in OVER_TOLERANCES or node.bracket or job.ledger.symbols:
        return ()
    meant = job.names.meaning(node)
    if meant is None or meant.key is None or meant.key.letter not in ("V", "I", "R", "Isc"):
        return ()
    return moves_of(meant.key, job.ledger, node.span)


def _parted(workings: Sequence[Worked]) -> list[list[Worked]]:
    parts: list[list[Worked]] = [[]]
    for w in workings:
        if w.relation in BOUNDS:
            parts.append([])
        parts[-1].append(w)
    return parts


def _segment(members: Sequence[Worked]) -> Segment:
    """The segment with its truth: the first circuit quantity, else the first formula, else the first working in numbers."""

    def rank(w: Worked) -> int:
        if w.basis == "circuit":
            return 0
        return _RANK.get(w.sort, 5)

    at = min(range(len(members)), key=lambda k: (rank(members[k]), k))
    return Segment(tuple(members), at, members[at].amount)


def _no_truth(segment: Segment, job: Work) -> None:
    """A segment whose truth cannot be worked out: unchecked with the reason, or a fault of dimensions."""
    w = segment.members[segment.at]
    if w.fault is not None:
        _fault(w.fault, w, job)
    elif w.doubt is not None:
        raise w.doubt
    else:
        raise Doubt("nothing here says what the value is to be held against", w.member.span)


def _fault(fault: DimensionFault, w: Worked, job: Work) -> None:
    job.findings.append(Finding("dimension", RULES["dimension"].severity, fault.reason, fault.span))
    job.steps.append(Step(w.member.text, w.member.span, w.relation, "differs", None, fault.reason))


def _judge_segment(segment: Segment, job: Work) -> tuple[Segment, list[tuple[Printed | PrintedPhasor, Step]]]:
    """Every member but the truth held against it; the printed values among them with their steps.

    The segment comes back with the dimension in which numbers without units were read.
    """
    assert segment.truth is not None
    w0 = segment.members[segment.at]
    ground = Ground(segment.truth, segment.basis, w0, segment.members, job.names, job.ledger)
    ground.trace_truth()
    judged: list[tuple[Worked, Step]] = []
    against: tuple[Amount, Worked] | None = None  # what the first member that differs was held against
    for k, w in enumerate(segment.members):
        if k == segment.at or w.sort == "new name":
            continue
        relation = w.relation if k > segment.at else segment.members[k + 1].relation
        if w.fault is not None:
            _fault(w.fault, w, job)
            continue
        judged.append((w, judge_member(w, relation, ground)))
        job.steps.append(judged[-1][1])
        if against is None and judged[-1][1].verdict == "differs":
            against = ground.truth, ground.held or w0
    if against is not None and job.miss is None:
        job.miss = Miss(ground, *against, tuple(judged))
    job.cautions += ground.cautions
    job.findings += ground.findings
    if ground.truth.dimension != segment.truth.dimension:
        segment = replace(segment, truth=replace(segment.truth, dimension=ground.truth.dimension))
    return segment, [(w.printed, step) for w, step in judged if w.printed is not None]


def _bounds(segments: Sequence[Segment], job: Work) -> None:
    for left, right in pairwise(segments):
        first = right.members[0]
        if left.truth is None or right.truth is None or first.relation not in BOUNDS:
            continue
        limit_right = right.only_a_value or (right.basis != "circuit" and not left.only_a_value)
        subject, behind = left.members[left.at], right.members[right.at]
        allowance = job.names.allowance(subject) + job.names.allowance(behind)
        step = judge_bound(left.truth, right.truth, first, subject, limit_right, len(segments) == 3, allowance)
        job.steps.append(at_worst(step, subject, behind, limit_right, job.names))
        if left.truth.dimension != right.truth.dimension:
            _dimension_of_bound(first, job)


def _limits(segments: Sequence[Segment], main: Segment) -> tuple[Amount | None, Amount | None]:
    """The lower and the upper limit that the chain sets for its quantity."""
    low = high = None
    for left, right in pairwise(segments):
        below = right.members[0].relation in ("<", "≤")  # left below right
        if left is main:
            low, high = (low, right.truth) if below else (right.truth, high)
        elif right is main:
            low, high = (left.truth, high) if below else (low, left.truth)
    return low, high


def _dimension_of_bound(first: Worked, job: Work) -> None:
    step = job.steps[-1]
    job.findings.append(Finding("dimension", RULES["dimension"].severity, step.message, first.member.span))


def _summed_up(
    main: Segment,
    printings: list[tuple[Printed | PrintedPhasor, Step]],
    job: Work,
    workings: Sequence[Worked],
    limits: tuple[Amount | None, Amount | None],
) -> Judged:
    """The claim's verdict: that of its worst step; the first step of that kind gives the sentence."""
    steps = sorted(job.steps, key=lambda s: s.span.start) if job.claim.place != "table" else job.steps
    worst: Verdict = max((s.verdict for s in steps), key=lambda v: _ORDER[v], default="unchecked")
    first = next((s for s in steps if s.verdict == worst), None)
    if first is None:
        raise Doubt("nothing follows the quantity that could be checked", job.claim.span)
    shown = next((p for p, s in printings if s.verdict == worst), printings[-1][0] if printings else None)
    truth = main.truth
    comparable = shown is not None and truth is not None and shown.amount.dimension == truth.dimension
    message = first.message or next((s.message for s in steps if s.message), "")
    return Judged(
        claim=job.claim,
        verdict=worst,
        basis=main.basis,
        quantity=workings[0].member.text if workings[0].sort != "value" else main.members[main.at].member.text,
        claimed=shown.amount if shown else None,
        claimed_unit=shown.written_in.text if shown else "",
        computed=truth,
        deviation=_off(shown, truth) if comparable and shown and truth else None,
        low=limits[0],
        high=limits[1],
        message="; ".join(dict.fromkeys(t for t in (message, *(f.told for f in job.names.founds.values())) if t)),
        steps=tuple(steps),
        cautions=tuple(dict.fromkeys(job.cautions)),
        parts=_by_source(main, job),
        moves=_moves(main.members[main.at].node, job),
    )


def _off(shown: Printed | PrintedPhasor, truth: Amount) -> float | None:
    """How far the printed value is off; an angle to the truth as it comes nearest, whole turns apart."""
    if isinstance(shown, Printed) and is_angle(shown) and not isinstance(truth.value, complex):
        return deviation(shown.value, nearest_turn(truth.value, shown.value))
    return deviation(shown.amount.value, truth.value)


def _enter(
    judged: Judged,
    main: Segment,
    name: str | None,
    key: Key | None,
    printings: list[tuple[Printed | PrintedPhasor, Step]],
    job: Work,
) -> None:
    """Put the chain's name and its printed values into the ledger, for what stands further down."""
    if main.truth is None:
        return
    start = job.claim.span.start
    if name is not None:
        shown = printings[-1][0] if printings else None
        spread = Fraction(0)
        node = main.members[main.at].node
        nearest = job.claim.circuit
        define(Defined(name, main.truth, shown, main.basis, False, start, spread, node, nearest), job.ledger)
        key = Key(-1, "name", (name,))
    for p, step in printings:
        if p.amount.dimension == main.truth.dimension:
            for result in _results(p, main.truth, step, start, key):
                enter(result, job.ledger)


def _results(p: Printed | PrintedPhasor, truth: Amount, step: Step, start: int, key: Key | None) -> list[Result]:
    """A printed value as later numbers may repeat it: a phasor by each of its two figures."""
    if isinstance(p, Printed):
        return [Result(p, truth, step.verdict, start, key)]
    magnitude, angle, re, im = parts(replace(truth, value=complex(truth.value)))
    first, second = (magnitude, angle) if p.polar else (re, im)
    return [Result(p.first, first, step.verdict, start, None), Result(p.second, second, step.verdict, start, None)]
