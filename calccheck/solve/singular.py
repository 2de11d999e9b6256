"""What makes the equations of a circuit singular whose structure is sound: controlled sources, negative resistances."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction

from calccheck.model import Circuit, Element, Finding
from calccheck.solve.at_dc import fault, value
from calccheck.solve.elimination import Singular
from calccheck.solve.structure import cut_sets, listed, loops, shown
from calccheck.solve.superposition import EXACT_NODES, check_rank
from calccheck.units import NONE, OHM


def suspects(circuit: Circuit) -> tuple[Element, ...]:
    """The parts without which a circuit of sound structure always has a single solution."""
    return tuple(
        e
        for e in circuit.elements
        if e.kind.startswith("controlled") or (e.kind == "resistor" and e.value is not None and e.value < 0)
    )


def is_singular(circuit: Circuit) -> bool:
    """By rank in exact arithmetic up to ``EXACT_NODES`` nodes, by the condition of the equations beyond."""
    if len(circuit.nodes()) > EXACT_NODES:
        from calccheck.solve.nodal import SINGULAR, condition  # late: numpy

        return not condition(circuit) < SINGULAR
    try:
        check_rank(circuit)
    except Singular:
        return True
    return False


def singular_faults(circuit: Circuit) -> tuple[Finding, ...]:
    """Why a circuit of sound structure has no single solution all the same.

    When other gains would not help either, the controlled sources stand in a loop or a cut set; else the gain is at fault.
    """
    parts = suspects(circuit)
    if is_singular(_nudged(circuit, parts)):
        found = loops(circuit, ("link", "voltage", "controlled voltage"))
        found += cut_sets(circuit, ("current", "controlled current"))
        return tuple(found) or (_whole_fault(circuit, parts),)
    alone = [e for e in parts if not is_singular(_nudged(circuit, [e]))]
    return tuple(_gain_fault(e) for e in alone) or (_whole_fault(circuit, parts),)


def _nudged(circuit: Circuit, parts: Sequence[Element]) -> Circuit:
    """The circuit with the values of those parts moved a little, by factors that no one would choose for a gain."""
    moved = {e.name: replace(e, value=(value(e) or 1) * Fraction(7919 + 12 * k, 7907)) for k, e in enumerate(parts)}
    return replace(circuit, elements=tuple(moved.get(e.name, e) for e in circuit.elements))


def _gain_fault(e: Element) -> Finding:
    if e.kind == "resistor":
        what, check = f"The resistance {e.name} of {shown(value(e), OHM)}", "its value and sign"
    else:
        what, check = (
            f"The controlled source {e.name} with its gain of {shown(value(e), NONE)}",
            "gain, sign and control",
        )
    return fault(
        f"{what} cancels what the other parts do, so that the circuit has no single solution. Check {check}.", e.span
    )


def _whole_fault(circuit: Circuit, parts: Sequence[Element]) -> Finding:
    names = listed(e.name for e in parts) if parts else "its parts"
    span = parts[0].span if parts else circuit.span
    return fault(f"With {names} the circuit has no single solution. Check what controls them, gains and signs.", span)
