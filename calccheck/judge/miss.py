"""What is known of a claim that differs when its working has been judged: the ground for naming the slip."""

from __future__ import annotations

from dataclasses import dataclass

from calccheck.arithmetic import Amount
from calccheck.judge.ground import Ground
from calccheck.judge.members import Worked
from calccheck.model import Step


@dataclass(frozen=True, slots=True)
class Miss:
    """A chain in which a member differs.

    ``truth``, ``held``: what the first such member was held against, and the member that gives it. ``judged``: the other
    members with their judgements, in reading order.
    """

    ground: Ground
    truth: Amount
    held: Worked
    judged: tuple[tuple[Worked, Step], ...]
