"""Sums of parts, and how far the two routes agree: the figures that stand in every report."""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Value, size
from calccheck.model import Circuit, Element, Solution, State
from calccheck.solve.branches import Network
from calccheck.solve.superposition import is_exact

Number = float | complex


def state(solution: Solution, due_to: Iterable[str] | None = None) -> State:
    """The state due to those independent sources alone, by name, or to all for ``None``: the sum of their parts.

    Rationals where the solution is exact. Raises ``KeyError`` for a name that is no independent source of its frequency.
    """
    names = solution.parts if due_to is None else dict.fromkeys(due_to)
    zero = Fraction(0) if solution.exact else 0j if solution.frequency else 0.0
    return _sum(solution.nodal, [solution.parts[name] for name in names], zero)


def total(solution: Solution) -> State:
    """The state with all independent sources of the frequency at work, by superposition."""
    return state(solution)


def compared(network: Network, nodal: State, parts: Mapping[str, State]) -> Solution:
    """The solution of both routes with gap, residual, balance and scales.

    A scale is the largest voltage between two nodes, current, or power of a part, in the circuit or in any part of the
    superposition: where sources cancel, rounding is still of the order of what cancels. At AC powers are complex, and the
    largest voltage is the diagonal of the box round all potentials in the complex plane.
    """
    circuit, exact = network.circuit, is_exact(network)
    whole = _plain(_sum(nodal, parts.values(), Fraction(0) if exact else 0j if network.frequency else 0.0))
    sizes = [_sizes(circuit, s) for s in (whole, *map(_plain, parts.values()))]
    volts, amperes, watts = (max(column) for column in zip(*sizes, strict=True))
    ohms = [float(size(b.value)) for b in network.branches if b.role == "impedance"] or [1.0]
    at_volts, at_amperes = volts or amperes * max(ohms), amperes or volts / min(ohms)
    found = _plain(nodal)
    gaps = (
        _ratio(_distance(whole.potentials, found.potentials), at_volts),
        _ratio(_distance(whole.currents, found.currents), at_amperes),
    )
    return Solution(
        nodal,
        parts,
        exact,
        gap=max(gaps),
        residual=_ratio(_residual(circuit, found), at_amperes),
        balance=_ratio(_largest([sum(_powers(circuit, found))]), watts or at_volts * at_amperes),
        volts=volts,
        amperes=amperes,
        watts=watts,
        frequency=network.frequency or None,
    )


def _sum(like: State, states: Iterable[State], zero: Value) -> State:
    potentials, currents = dict.fromkeys(like.potentials, zero), dict.fromkeys(like.currents, zero)
    for s in states:
        for sums, terms in ((potentials, s.potentials), (currents, s.currents)):
            for name, x in terms.items():
                sums[name] += x
    return State(potentials, currents)


@dataclass(frozen=True, slots=True)
class _Plain:
    """A state in floating point, real or complex, to measure by."""

    potentials: dict[str, Number]
    currents: dict[str, Number]


def _plain(s: State) -> _Plain:
    potentials, currents = (
        {name: x if isinstance(x, complex) else float(x) for name, x in values.items()}
        for values in (s.potentials, s.currents)
    )
    return _Plain(potentials, currents)


def _sizes(circuit: Circuit, s: _Plain) -> tuple[float, float, float]:
    """Largest voltage between two nodes, largest current, largest power of a part."""
    volts = s.potentials.values()
    sides = [(max(x) - min(x)) for x in ([v.real for v in volts], [v.imag for v in volts])]
    return math.hypot(*sides), _largest(s.currents.values()), _largest(_powers(circuit, s))


def inflows(e: Element, reference: str) -> tuple[tuple[str, str, int], ...]:
    """Node, key in ``State.currents`` and sign of every current from a node into the part; an op-amp's comes from the reference."""
    if not e.terminals:
        return (e.plus, e.name, 1), (e.minus, e.name, -1)
    found = tuple((node, f"{e.name},{word}", 1) for word, node in e.terminals)
    return (*found, (reference, f"{e.name},out", -1)) if e.kind == "op-amp" else found


def _powers(circuit: Circuit, s: _Plain) -> list[Number]:
    """The power that each part takes, complex at AC: the sum of V·I* over its ends."""
    return [_power(e, circuit.reference, s) for e in circuit.elements]


def _power(e: Element, reference: str, s: _Plain) -> Number:
    if not e.terminals:
        return (s.potentials[e.plus] - s.potentials[e.minus]) * s.currents[e.name].conjugate()
    return sum(sign * s.potentials[node] * s.currents[key].conjugate() for node, key, sign in inflows(e, reference))


def _residual(circuit: Circuit, s: _Plain) -> float:
    """The largest sum of currents at a node, in amperes."""
    sums: dict[str, Number] = dict.fromkeys(s.potentials, 0.0)
    for e in circuit.elements:
        for node, key, sign in inflows(e, circuit.reference):
            sums[node] += sign * s.currents[key]
    return _largest(sums.values())


def _distance(a: Mapping[str, Number], b: Mapping[str, Number]) -> float:
    return _largest(a[name] - b[name] for name in a)


def _largest(values: Iterable[Number]) -> float:
    """The largest size; infinite where a value is no number, which ``max`` would pass over."""
    return max((abs(x) if cmath.isfinite(x) else math.inf for x in values), default=0.0)


def _ratio(size: float, scale: float) -> float:
    """Relative size; infinite where either is no finite number."""
    if size == 0.0:
        return 0.0
    return size / scale if scale and math.isfinite(size) and math.isfinite(scale) else math.inf
