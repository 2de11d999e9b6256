"""Bounds: the exact quantity against the exact limit, with the margin between them."""

from __future__ import annotations

from dataclasses import replace

from calccheck.arithmetic import Amount, Doubt, Real, Value, real, size
from calccheck.formula import Binary
from calccheck.judge import say
from calccheck.judge.members import Names, Worked
from calccheck.judge.rounding import SLACK
from calccheck.model import Relation, Step
from calccheck.printing import shown
from calccheck.units import PLAIN

BOUNDS: dict[Relation, Relation] = {"<": ">", "≤": "≥", ">": "<", "≥": "≤"}


def judge_bound(
    left: Amount, right: Amount, first: Worked, subject: Worked, limit_right: bool, both: bool, allowance: Real = 0
) -> Step:
    """One bound at nominal values. ``first``: the member behind the relation. ``subject``: the member before it.

    ``limit_right``: whether the limit stands on the right. A limit above zero says nothing of a quantity below zero, unless
    ``both`` sides are bounded, as in ``−0.3 V ≤ V_in ≤ 5.3 V``. ``allowance``: how far a value at random may be off.
    """
    relation = first.relation
    member = first.member
    text = f"{relation} {member.text}"
    if left.dimension != right.dimension:
        return Step(text, member.span, relation, "differs", right, say.unlike(left, right))
    q, limit, seen = (left, right, relation) if limit_right else (right, left, BOUNDS[relation])
    label = subject.member.text if limit_right else member.text
    if isinstance(q.value, complex) or isinstance(limit.value, complex):
        return Step(text, member.span, relation, "unchecked", limit, f"a phasor is bounded by its magnitude: |{label}|")
    if not both and seen in ("<", "≤") and limit.value > 0 > q.value:
        return Step(text, member.span, relation, "unchecked", limit, say.says_nothing(label, q, "below"))
    if not both and seen in (">", "≥") and limit.value < 0 < q.value:
        return Step(text, member.span, relation, "unchecked", limit, say.says_nothing(label, q, "above"))
    slack = SLACK * size(limit.value) + allowance
    room = limit.value - q.value if seen in ("<", "≤") else q.value - limit.value
    holds = room > (0 if not allowance else -slack) if seen in ("<", ">") else room >= -slack
    printed = first.printed if limit_right else subject.printed
    unit = printed.written_in if printed is not None and printed.written_in.text == "%" else PLAIN
    told = say.margin(label, q, limit, room, holds, unit)
    if holds and room < 0:
        told = f"{label} is {shown(q, unit)}, which may as well be {shown(limit, unit)}: they differ by less than the allowance"
    return Step(text, member.span, relation, "agrees" if holds else "differs", limit, told)


def at_worst(step: Step, left: Worked, right: Worked, limit_right: bool, names: Names) -> Step:
    """A bound that holds at nominal values, at the worst within tolerances: with the margin there and what makes it the worst.

    ``left``, ``right``: the members that give both sides their values.
    """
    if step.verdict != "agrees" or left.amount is None or right.amount is None:
        return step
    from calccheck.judge.spreads import NothingVaries, at, extreme  # late: many sheets state no bounds

    below = step.relation in ("<", "≤")
    low, high = (left, right) if below else (right, left)
    q, limit = (left, right) if limit_right else (right, left)
    try:
        room = Binary("-", high.node, low.node, step.span)
        nominal = Amount(real(_value(high)) - real(_value(low)), left.amount.dimension)
        found = extreme(room, nominal, False, names.spreading, size(_value(high)))
        worst = at(q.node, found, names.spreading)
    except NothingVaries:
        return step
    except Doubt as d:
        return replace(step, verdict="unchecked", message=f"over the tolerances: {say.reason(d.reason, d.suggestion)}")
    assert q.amount is not None and limit.amount is not None
    left_over = real(found.amount.value)
    slack = SLACK * size(limit.amount.value)
    holds = left_over > 0 if step.relation in ("<", ">") else left_over >= -slack
    told = say.worst_margin(
        q.member.text, q.amount, replace(q.amount, value=worst), limit.amount, left_over, holds, found
    )
    return replace(step, verdict="agrees" if holds else "differs", message=told)


def _value(w: Worked) -> Value:
    return w.amount.value if w.amount is not None else 0.0
