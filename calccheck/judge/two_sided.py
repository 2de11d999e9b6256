"""Claims of two values: ``worst V_out = 3.21 V … 3.45 V``, ``worst V_out = 3.33 V ± 0.12 V``, ``rss V_out = 3.33 V ± 0.07 V``.

Each end, or the middle and the deviation, is held against its own truth as any printed value is. The middle is the nominal
value, and the deviation then the larger of the two; or it is halfway between the extremes, and the deviation half of what lies
between them.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from calccheck.arithmetic import Amount, Doubt, evaluate, real, size
from calccheck.formula import Range, Reference
from calccheck.judge import spreads
from calccheck.judge.ground import Ground
from calccheck.judge.members import Names, Worked, work
from calccheck.judge.miss import Miss
from calccheck.judge.steps import judge_member
from calccheck.model import Finding, Member, Step, Verdict
from calccheck.units import NONE

_SIDES = {
    ("min", False): "the lower end", ("max", False): "the upper end", ("", True): "the middle", ("max", True): "the deviation",
}  # fmt: skip
_ORDER: tuple[Verdict, ...] = ("agrees", "rounded", "unchecked", "differs")


@dataclass(frozen=True, slots=True)
class TwoSided:
    """The truth of such a claim: nominal value, the ends, and how they were found in words."""

    nominal: Amount
    low: Amount
    high: Amount
    told: str


@dataclass(frozen=True, slots=True)
class Sided:
    """One printed range held against the truth: its step, and what was said and found on the way."""

    step: Step
    cautions: tuple[str, ...]
    findings: tuple[Finding, ...]
    miss: Miss | None


def truth_of(ref: Reference, names: Names) -> TwoSided:
    """The nominal value and the ends of what stands behind ``worst`` or ``rss``. Raises ``Doubt``."""
    node = spreads.inner(ref)
    nominal = evaluate(node, names.amount)
    real(nominal.value, ref.span)
    if ref.prefix == "rss":
        deviation, told = spreads.root_sum_square(node, names.spreading)
        ends = [replace(nominal, value=float(real(nominal.value)) + x) for x in (-deviation, deviation)]
        return TwoSided(nominal, ends[0], ends[1], told)
    low, high = (spreads.extreme(node, nominal, largest, names.spreading) for largest in (False, True))
    return TwoSided(nominal, low.amount, high.amount, f"{low.told}; {high.told}")


def judge_range(member: Member, ref: Reference, source: Worked, truth: TwoSided, names: Names) -> Sided:
    """A printed range, by the reading that suits it best. Raises ``Doubt`` for a member that is none."""
    node = member.node
    if not isinstance(node, Range):
        hint = f"write LOW … HIGH or MIDDLE ± DEVIATION behind {ref.prefix}"
        raise Doubt(f"{ref.text} has two values, {member.text} is one; {hint}", member.span)
    if not node.centred:
        return _judged(member, ((truth.low, "min"), (truth.high, "max")), source, names)
    nominal, low, high = (real(a.value) for a in (truth.nominal, truth.low, truth.high))
    larger = replace(truth.nominal, value=max(high - nominal, nominal - low))
    found = _judged(member, ((truth.nominal, ""), (larger, "max")), source, names)
    if found.step.verdict == "agrees" or ref.prefix == "rss":
        return found
    middle, half = (replace(truth.nominal, value=x) for x in ((high + low) / 2, (high - low) / 2))
    halfway = _judged(member, ((middle, ""), (half, "max")), source, names)
    return min((found, halfway), key=lambda s: _ORDER.index(s.step.verdict))


def _judged(member: Member, sides: Sequence[tuple[Amount, str]], source: Worked, names: Names) -> Sided:
    assert isinstance(member.node, Range)
    grounds: list[Ground] = []
    steps: list[Step] = []
    for (truth, kind), node in zip(sides, (member.node.low, member.node.high), strict=True):
        one = work(Member(member.relation, node, _text(member, node), member.span), names)
        if one.amount is not None and one.amount.dimension == NONE != truth.dimension and grounds:
            truth = Amount(size(truth.value) / size(sides[0][0].value) if sides[0][0].value else 0)  # a percentage
        about = f"{_SIDES[kind, member.node.centred]} of {source.member.text}"
        behind = replace(source, member=replace(source.member, text=about), node=_prefixed(source, kind), amount=truth)
        ground = Ground(truth, source.basis or "working", behind, (behind, one), names, names.ledger)
        grounds.append(ground)
        steps.append(judge_member(one, member.relation or "=", ground))
    worst = max(range(2), key=lambda k: _ORDER.index(steps[k].verdict))
    told = dict.fromkeys(s.message for s in steps if s.message and s.verdict == steps[worst].verdict)
    step = Step(member.text, member.span, member.relation, steps[worst].verdict, None, "; ".join(told))
    miss = None
    if step.verdict == "differs":
        ground = grounds[worst]
        miss = Miss(ground, ground.truth, ground.source, ((ground.members[1], steps[worst]),))
    cautions = tuple(c for g in grounds for c in g.cautions)
    return Sided(step, cautions, tuple(f for g in grounds for f in g.findings), miss)


def _text(member: Member, node: object) -> str:
    """One value of a range as written."""
    span = getattr(node, "span", member.span)
    start = span.start - member.span.start
    text = member.text[max(0, start) : start + span.end - span.start]
    return text if start >= 0 and any(c.isdigit() for c in text) else member.text


def _prefixed(source: Worked, kind: str) -> Reference:
    assert isinstance(source.node, Reference)
    return replace(source.node, prefix="max" if kind == "max" else "min" if kind == "min" else "")
