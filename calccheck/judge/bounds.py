"""Bounds: the exact quantity against the exact limit, with the margin between them."""

from __future__ import annotations

from calccheck.arithmetic import Amount, size
from calccheck.judge import say
from calccheck.judge.members import Worked
from calccheck.judge.rounding import SLACK
from calccheck.model import Relation, Step

BOUNDS: dict[Relation, Relation] = {"<": ">", "≤": "≥", ">": "<", "≥": "≤"}


def judge_bound(left: Amount, right: Amount, first: Worked, subject: Worked, limit_right: bool, both: bool) -> Step:
    """One bound. ``first``: the member behind the relation. ``subject``: the member before it.

    ``limit_right``: whether the limit stands on the right. A limit above zero says nothing of a quantity below zero, unless
    ``both`` sides are bounded, as in ``−0.3 V ≤ V_in ≤ 5.3 V``.
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
    slack = SLACK * size(limit.value)
    room = limit.value - q.value if seen in ("<", "≤") else q.value - limit.value
    holds = room > 0 if seen in ("<", ">") else room >= -slack
    return Step(
        text, member.span, relation, "agrees" if holds else "differs", limit, say.margin(label, q, limit, room, holds)
    )
