"""Solves a circuit by two routes that share no matrix and no arithmetic, and says how well they agree.

Importing this costs next to nothing: numpy is imported with ``nodal``, when the first circuit is solved.
"""

from __future__ import annotations

from collections.abc import Sequence

from calccheck.model import Circuit, Finding, Solution, State
from calccheck.solve.agreement import compared, state, total
from calccheck.solve.at_dc import fault
from calccheck.solve.elimination import Singular
from calccheck.solve.singular import is_singular, singular_faults, suspects
from calccheck.solve.structure import faults
from calccheck.solve.superposition import is_exact, part_states

__all__ = ["Unsolvable", "solve", "solve_batch", "state", "total"]


class Unsolvable(Exception):
    """A circuit that has no single solution, or is not solved in this version; ``findings`` say why."""

    def __init__(self, findings: tuple[Finding, ...]) -> None:
        super().__init__("; ".join(f.message for f in findings))
        self.findings = findings


def solve(circuit: Circuit) -> Solution:
    """The circuit at DC: nodal in floating point, and each independent source alone, in rationals up to 25 nodes.

    Raises ``Unsolvable`` with every reason found.
    """
    found = circuit.problems or faults(circuit)
    if found:
        raise Unsolvable(found)
    if not is_exact(circuit) and suspects(circuit) and is_singular(circuit):
        raise Unsolvable(singular_faults(circuit))
    from calccheck.solve.nodal import nodal_state  # late: numpy

    try:
        return compared(circuit, nodal_state(circuit), part_states(circuit), is_exact(circuit))
    except Singular:
        raise Unsolvable(singular_faults(circuit)) from None
    except OverflowError:
        text = "The values lie so far apart that voltages or currents here fit no number. Check the exponents."
        raise Unsolvable((fault(text, circuit.span),)) from None


def solve_batch(circuits: Sequence[Circuit]) -> list[State | None]:
    """The nodal states of many variants of a circuit at once, for trying hypotheses.

    ``None`` for a circuit that has problems, or whose equations are singular or too near to it to be trusted. Quickest when
    the variants share their names and most of their ``Element`` objects.
    """
    from calccheck.solve.nodal import batch_states  # late: numpy

    return batch_states(circuits)
