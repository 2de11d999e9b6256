"""What the members of one segment of a chain are held against, and what was said on the way."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import takewhile

from calccheck.arithmetic import (
    Amount,
)
from calccheck.formula import OVER_TOLERANCES, Number, Reference
from calccheck.judge import quantities
from calccheck.judge.members import Names, Worked
from calccheck.judge.phasors import Sized
from calccheck.judge.scope import Ledger
from calccheck.judge.trace import Meanings, Traced, sizes, trace
from calccheck.model import Basis, Finding, Step, Verdict


@dataclass(slots=True)
class Ground:
    """What the members of one segment are held against, and what was said on the way.

    ``source``: the member that gives the truth; behind ``≈ formula`` the ``truth`` is that formula, ``held`` its member.
    ``carried``: value of the last substitution that reaches the truth.
    """

    truth: Amount
    basis: Basis
    source: Worked
    members: Sequence[Worked]
    names: Names
    ledger: Ledger
    carried: Amount | None = None
    held: Worked | None = None
    cautions: list[str] = field(default_factory=list)
    findings: list[Finding] = field(default_factory=list)

    @property
    def outwards(self) -> int:
        """The sign of what lies beyond an extreme: 1 above a largest value, −1 below a least one, 0 for any other truth."""
        node = self.source.node
        return {"max": 1, "min": -1}.get(node.prefix, 0) if isinstance(node, Reference) else 0

    def trace_truth(self) -> None:
        """A truth worked from printed numbers alone: say which of them stand for nothing."""
        if self.source.sort == "substitution":
            self.say_untraced(self.traced(self.source))

    def traced(self, w: Worked) -> list[Traced]:
        """What the printed numbers of a member stand for."""
        return trace(w.nodes, self.meanings(w), self.ledger)

    def meanings(self, w: Worked) -> Meanings:
        """What a number of this member may stand for."""
        before = [*takewhile(lambda m: m is not w, self.members)]
        fixed = [m.numbers for m in before if m is self.source or m.sort == "formula"]
        constants = [n.amount for found in fixed for n in found]
        pieces = [s for m in before for s in sizes(m.pieces)]
        repeated = [n.amount for m in before for n in m.numbers]
        changed = [v for _, _, v in self.source.key.changes if v is not None] if self.source.key else []
        return Meanings([*constants, *changed, *self._ends()], pieces, self.circuit_values(), repeated)

    def _ends(self) -> list[Amount]:
        """The ends of what varies, where the truth is one over tolerances."""
        node = self.source.node
        if not isinstance(node, Reference) or node.prefix not in OVER_TOLERANCES:
            return []
        from calccheck.judge.spreads import ends  # late: few sheets state tolerances

        return ends(self.ledger)

    def circuit_values(self) -> list[Sized]:
        """Voltages, currents and powers of the truth's circuit under its own qualifiers, printed or not."""
        key = self.source.key
        if key is None or key.circuit < 0 or key.letter not in ("V", "I", "P"):
            return []
        return quantities.values_around(key, self.ledger, self.source.member.span)

    def say_untraced(self, traced: Sequence[Traced]) -> None:
        """The caution about numbers that stand for nothing."""
        lost = [t.number for t in traced if not t.found]
        if lost:
            which = " and ".join(dict.fromkeys(_shown(n) for n in lost))
            verb = "stands" if len({_shown(n) for n in lost}) == 1 else "stand"
            self.cautions.append(
                f"untraced: {which} {verb} for no part, given, earlier value or piece of the formula; taken as printed"
            )


def _shown(n: Number) -> str:
    return f"{n.digits} {n.unit.text}".strip()


def decided(w: Worked, verdict: Verdict, message: str = "") -> Step:
    """The step that a member is, with its verdict."""
    return Step(w.member.text, w.member.span, w.relation, verdict, w.amount, message)


def subject(ground: Ground) -> str:
    """What the chain is about, as the sheet writes it."""
    return ground.source.member.text
