"""What makes the equations of a network singular whose structure is sound: gains, negative resistances, resonance, missing feedback.

The branches that can do so are moved a little in value, one by one: where that alone cures the equations, its value is at fault.
At AC, where 2πf is rounded, a network counts as singular when a move of one part in 10¹² changes a voltage or current by more
than one part in a thousand.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction

from calccheck.model import Finding
from calccheck.solve.branches import Branch, Network
from calccheck.solve.elimination import Singular
from calccheck.solve.feedback import feedback_faults
from calccheck.solve.part_faults import fault, hertz
from calccheck.solve.structure import cut_sets, listed, loops, named, shown
from calccheck.solve.superposition import EXACT_NODES, stirred
from calccheck.units import NONE, OHM

_STEERED = ("controlled voltage", "controlled current", "nullor")
_DOUBTFUL = 1e10  # condition at AC from which a closer look is taken; a move of 1e-12 shows from about 1e12
_MOVE = Fraction(1, 10**12)


def suspects(network: Network) -> tuple[Branch, ...]:
    """The branches without which a network of sound structure always has a single solution."""
    found = [b for b in network.branches if b.role in _STEERED or _is_negative(b)]
    reactive = [b for b in network.branches if _is_reactive(b)]
    if found or len({complex(b.value).imag > 0 for b in reactive}) > 1:
        found += reactive
    return tuple(found)


def _is_reactive(b: Branch) -> bool:
    return b.role == "impedance" and isinstance(b.value, complex)


def _is_negative(b: Branch) -> bool:
    return b.role == "impedance" and b.value.real < 0


def is_singular(network: Network) -> bool:
    """At DC by rank, in exact arithmetic up to ``EXACT_NODES`` nodes, by the condition beyond; at AC by what a move does."""
    from calccheck.solve.nodal import SINGULAR, condition  # late: numpy

    if network.frequency:
        return not condition(network) < _DOUBTFUL and _is_touchy(network)
    if len(network.nodes) > EXACT_NODES:
        return not condition(network) < SINGULAR
    try:
        stirred(network)
    except Singular:
        return True
    return False


def _is_touchy(network: Network) -> bool:
    """Whether a move of every value by a few parts in 10¹² moves any unknown by more than a thousandth."""
    try:
        pairs = zip(
            stirred(network), stirred(_nudged(network, [b for b in network.branches if b.value], _MOVE)), strict=True
        )
        return any(abs(complex(a - b)) > 1e-3 * abs(complex(a)) for a, b in pairs)
    except (Singular, OverflowError):
        return True


def singular_faults(network: Network) -> tuple[Finding, ...]:
    """Why a network of sound structure has no single solution all the same.

    When other values would not help either, an amplifier lacks feedback, or controlled sources stand in a loop or a cut set.
    """
    other = _nudged(network, network.branches)
    if is_singular(other):
        plain = replace(network, branches=tuple(b for b in network.branches if b.part.kind != "transformer"))
        found = feedback_faults(other) or loops(plain, ("link", "voltage", "controlled voltage"))
        found += cut_sets(plain, ("current", "controlled current"))
        return tuple(found) or (_whole_fault(network),)
    alone = [b for b in suspects(network) if not is_singular(_nudged(network, [b]))]
    reactive = [b for b in alone if _is_reactive(b)]
    found = [_resonance_fault(reactive, network)] if reactive else []
    at_fault = alone or [b for b in suspects(network) if b.role == "nullor"]
    found += [_gain_fault(b, network) for b in at_fault if not _is_reactive(b)]
    return tuple(found) or (_whole_fault(network),)


def _nudged(network: Network, branches: Sequence[Branch], step: Fraction = Fraction(12, 7907)) -> Network:
    """The network with those values moved a little, each by a factor of its own that no one would choose for a gain."""
    moved = {b.name: replace(b, value=(b.value or Fraction(1)) * (1 + (k + 1) * step)) for k, b in enumerate(branches)}
    return replace(network, branches=tuple(moved.get(b.name, b) for b in network.branches))


def _resonance_fault(branches: Sequence[Branch], network: Network) -> Finding:
    names = listed(b.part.name for b in branches)
    return fault(
        f"At {hertz(network.frequency)} the reactances of {names} cancel (resonance without loss), so that the circuit has no "
        "single solution. Put in the resistance of a coil or a source, or check values and frequency.",
        branches[0].part.span,
    )


def _gain_fault(b: Branch, network: Network) -> Finding:
    if b.role == "nullor":
        what, check = f"The feedback of {b.part.name} to its plus input", "what leads from its output to its two inputs"
    elif b.role == "impedance":
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


def _whole_fault(network: Network) -> Finding:
    """Names the parts that a resistance in their place would free, or else all that may be at fault."""
    stiff = [
        b for b in network.branches if b.role not in ("impedance", "gap") and not is_singular(_softened(network, b))
    ]
    branches = stiff or suspects(network) or network.branches
    names = list(dict.fromkeys(b.part.name for b in branches))
    if len(names) == 1:
        return _gain_fault(branches[0], network)
    text = f"{listed(names)} set the same voltage or current, or cancel each other, so that the circuit has no single solution."
    return fault(f"{text} Check terminals, gains and signs, or take one out.", branches[0].part.span)


def _softened(network: Network, b: Branch) -> Network:
    """The network with a resistance in a branch's place."""
    soft = replace(b, role="impedance", value=Fraction(7919, 7907), control=None)
    return replace(network, branches=tuple(soft if x is b else x for x in network.branches))
