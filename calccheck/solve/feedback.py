"""Ideal op-amps whose output does not act on their inputs: told apart from other reasons for singular equations."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction

from calccheck.arithmetic import Value, size
from calccheck.model import Control, Finding
from calccheck.solve.branches import Branch, Network, Role
from calccheck.solve.elimination import Singular
from calccheck.solve.part_faults import fault
from calccheck.solve.structure import loops
from calccheck.solve.superposition import part_states

_STILL = 1e-9  # volts at an amplifier's inputs for a volt at an output, below which there is no feedback


def feedback_faults(network: Network) -> list[Finding]:
    """The amplifiers whose output something else holds, whose input voltage no output moves, or whose output moves none."""
    amplifiers = [b for b in network.branches if b.role == "nullor"]
    if not amplifiers:
        return []
    if found := loops(network, ("link", "voltage", "nullor")):
        return found
    try:
        moves = [[size(x) > _STILL for x in row] for row in _responses(network, amplifiers)]
    except Singular:
        return []
    deaf = [b for k, b in enumerate(amplifiers) if not any(moves[k])]
    deaf = deaf or [b for k, b in enumerate(amplifiers) if not any(row[k] for row in moves)]
    gaps = not network.frequency and any(e.kind == "capacitor" for e in network.circuit.elements)
    at_dc = " at DC, where a capacitor is a gap" if gaps else ""
    return [
        fault(
            f"{b.part.name} has no feedback{at_dc}: its output does not act on the voltage between its inputs plus and minus, "
            "so that an ideal op-amp there has no single output. Connect its output back to its minus input.",
            b.part.span,
        )
        for b in deaf
    ]


def _responses(network: Network, amplifiers: Sequence[Branch]) -> list[list[Value]]:
    """How each amplifier's input voltage answers to one volt at each amplifier's output, with no source at work.

    Raises ``Singular`` where the outputs cannot be set like that.
    """
    held = {
        b.name: replace(b, role="voltage", value=Fraction(1), part=replace(b.part, name=b.name)) for b in amplifiers
    }
    zeroed: dict[Role, Role] = {"voltage": "link", "current": "gap"}
    branches = [held.get(b.name) or replace(b, role=zeroed.get(b.role, b.role)) for b in network.branches]
    states = part_states(replace(network, branches=tuple(branches)))
    rows = []
    for b in amplifiers:
        control = b.control or Control()
        by_output = (states[out.name].potentials for out in amplifiers)
        rows.append([volts[control.plus] - volts[control.minus] for volts in by_output])
    return rows
