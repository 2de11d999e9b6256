"""What makes the equations of a network singular whose structure is sound: gains, negative resistances, resonance, missing feedback.

The branches that can do so are moved a little in value, one by one: where that alone cures the equations, its value is at fault.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction

from calccheck.arithmetic import size
from calccheck.model import Finding
from calccheck.solve.branches import Branch, Network
from calccheck.solve.elimination import Singular
from calccheck.solve.part_faults import fault, hertz
from calccheck.solve.structure import cut_sets, listed, loops, named, shown
from calccheck.solve.superposition import EXACT_NODES, check_rank, responses
from calccheck.units import NONE, OHM

_STEERED = ("controlled voltage", "controlled current", "nullor")
_STILL = 1e-9  # volts at an amplifier's inputs for a volt at an output, below which there is no feedback


def suspects(network: Network) -> tuple[Branch, ...]:
    """The branches without which a network of sound structure always has a single solution."""
    return tuple(b for b in network.branches if b.role in _STEERED or _is_reactive(b) or _is_negative(b))


def _is_reactive(b: Branch) -> bool:
    return b.role == "impedance" and isinstance(b.value, complex)


def _is_negative(b: Branch) -> bool:
    return b.role == "impedance" and not isinstance(b.value, complex) and b.value < 0


def is_singular(network: Network) -> bool:
    """By rank, in exact arithmetic at DC up to ``EXACT_NODES`` nodes; by the condition of the equations at DC beyond."""
    if not network.frequency and len(network.nodes) > EXACT_NODES:
        from calccheck.solve.nodal import SINGULAR, condition  # late: numpy

        return not condition(network) < SINGULAR
    try:
        check_rank(network)
    except Singular:
        return True
    return False


def singular_faults(network: Network) -> tuple[Finding, ...]:
    """Why a network of sound structure has no single solution all the same.

    When other values would not help either, an amplifier lacks feedback, or controlled sources stand in a loop or a cut set.
    """
    parts = suspects(network)
    other = _nudged(network, [b for b in network.branches if b.value])
    if is_singular(other):
        found = _feedback_faults(other) or loops(network, ("link", "voltage", "controlled voltage"))
        found += cut_sets(network, ("current", "controlled current"))
        return tuple(found) or (_whole_fault(network, parts),)
    alone = [b for b in parts if not is_singular(_nudged(network, [b]))]
    reactive = [b for b in alone if _is_reactive(b)]
    found = [_resonance_fault(reactive, network)] if reactive else []
    found += [_gain_fault(b, network) for b in alone if not _is_reactive(b)]
    return tuple(found) or (_whole_fault(network, parts),)


def _nudged(network: Network, branches: Sequence[Branch]) -> Network:
    """The network with those values moved a little, by factors that no one would choose for a gain."""
    moved = {b.name: _moved(b, k) for k, b in enumerate(branches)}
    return replace(network, branches=tuple(moved.get(b.name, b) for b in network.branches))


def _moved(b: Branch, k: int) -> Branch:
    factor = Fraction(7919 + 12 * k, 7907)
    return replace(b, value=(b.value or Fraction(1)) * factor)


def _feedback_faults(network: Network) -> list[Finding]:
    """The amplifiers whose output something else holds, whose input voltage no output moves, or whose output moves none."""
    amplifiers = [b for b in network.branches if b.role == "nullor"]
    if not amplifiers:
        return []
    if found := loops(network, ("link", "voltage", "nullor")):
        return found
    try:
        moves = [[size(x) > _STILL for x in row] for row in responses(network, amplifiers)]
    except Singular:
        return []
    deaf = [b for k, b in enumerate(amplifiers) if not any(moves[k])]
    deaf = deaf or [b for k, b in enumerate(amplifiers) if not any(row[k] for row in moves)]
    return [
        fault(
            f"{b.part.name} has no feedback: its output does not act on the voltage between its inputs plus and minus, so that "
            "an ideal op-amp there has no single output. Connect its output back to its minus input.",
            b.part.span,
        )
        for b in deaf
    ]


def _resonance_fault(branches: Sequence[Branch], network: Network) -> Finding:
    names = listed(b.part.name for b in branches)
    return fault(
        f"At {hertz(network.frequency)} the reactances of {names} cancel (resonance without loss), so that the circuit has no "
        "single solution. Put in the resistance of a coil or a source, or check values and frequency.",
        branches[0].part.span,
    )


def _gain_fault(b: Branch, network: Network) -> Finding:
    if b.role == "impedance":
        what, check = f"The resistance {b.part.name} of {shown(b.value, OHM)}", "its value and sign"
    elif b.part.kind.startswith("controlled"):
        what = f"The controlled source {b.part.name} with its gain of {shown(b.value, NONE)}"
        check = "gain, sign and control"
    else:
        what, check = named(b, network), "its values and terminals"
    return fault(
        f"{what} cancels what the other parts do, so that the circuit has no single solution. Check {check}.",
        b.part.span,
    )


def _whole_fault(network: Network, branches: Sequence[Branch]) -> Finding:
    names = listed(dict.fromkeys(b.part.name for b in branches)) if branches else "its parts"
    span = branches[0].part.span if branches else network.circuit.span
    return fault(f"With {names} the circuit has no single solution. Check what controls them, gains and signs.", span)
