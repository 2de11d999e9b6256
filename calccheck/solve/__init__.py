"""Solves a circuit by two routes that share no matrix and no arithmetic, and says how well they agree.

Importing this costs next to nothing: numpy is imported with ``nodal``, when the first circuit is solved.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from fractions import Fraction
from typing import TYPE_CHECKING

from calccheck.model import Circuit, Finding, Solution, State
from calccheck.solve.agreement import compared, state, total
from calccheck.solve.branches import DC, network_of
from calccheck.solve.elimination import Singular
from calccheck.solve.part_faults import fault, part_faults
from calccheck.solve.singular import is_singular, singular_faults, suspects
from calccheck.solve.states import state_faults
from calccheck.solve.structure import faults
from calccheck.solve.superposition import is_exact, part_states

if TYPE_CHECKING:
    from calccheck.solve.tolerance import Tolerances

__all__ = ["Unsolvable", "frequencies", "solve", "solve_batch", "state", "state_faults", "tolerances", "total"]


class Unsolvable(Exception):
    """A circuit that has no single solution, or is not solved in this version; ``findings`` say why."""

    def __init__(self, findings: tuple[Finding, ...]) -> None:
        super().__init__("; ".join(f.message for f in findings))
        self.findings = findings


def frequencies(circuit: Circuit) -> tuple[Fraction, ...]:
    """The distinct frequencies of a circuit's independent sources in hertz, rising; 0 for DC."""
    return tuple(sorted({e.frequency or DC for e in circuit.sources()}))


def solve(circuit: Circuit, frequency: Fraction | None = None) -> Solution:
    """The circuit at a frequency in hertz; ``None`` or 0: DC, ``model.UNSTATED``: an AC frequency that nothing depends on.

    Only the sources of that frequency act. Nodal in floating point, and each of those sources alone: exactly up to 25 nodes at
    DC and 12 at AC (there for 2πf and phasors as floating-point numbers), in floating point beyond. Raises ``Unsolvable``
    with every reason found.
    """
    at = frequency or DC
    found = circuit.problems or _empty(circuit) or part_faults(circuit, at)
    if found:
        raise Unsolvable(found)
    network = network_of(circuit, at)
    if found := faults(network):
        raise Unsolvable(found)
    if (at or not is_exact(network)) and suspects(network) and is_singular(network):
        raise Unsolvable(singular_faults(network))
    from calccheck.solve.nodal import nodal_state  # late: numpy

    try:
        solution = compared(network, nodal_state(network), part_states(network))
        if not math.isfinite(solution.volts + solution.amperes):
            raise OverflowError
    except Singular:
        raise Unsolvable(singular_faults(network)) from None
    except OverflowError:
        text = "The values lie so far apart that voltages or currents here fit no number. Check the exponents."
        raise Unsolvable((fault(text, circuit.span),)) from None
    return solution


def _empty(circuit: Circuit) -> tuple[Finding, ...]:
    if circuit.elements:
        return ()
    return (fault("The circuit block has no parts. Write each on a line, as in: R1: 4.7 kΩ, a to b", circuit.span),)


def tolerances() -> Tolerances:
    """What works formulas over tolerances; it keeps what it learns of the circuits of one sheet."""
    from calccheck.solve.tolerance import Tolerances  # late: numpy

    return Tolerances()


def solve_batch(circuits: Sequence[Circuit], frequency: Fraction | None = None) -> list[State | None]:
    """The nodal states of many variants of a circuit at once, all at one frequency, for trying hypotheses.

    ``None`` for a circuit that has problems, or whose equations are singular or too near to it to be trusted. Quickest when
    the variants share their names and most of their ``Element`` objects.
    """
    from calccheck.solve.nodal import batch_states  # late: numpy

    return batch_states(circuits, frequency or DC)
