"""Sums of parts, and how far the two routes agree: the figures that stand in every report."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Real
from calccheck.model import Circuit, Solution, State


def state(solution: Solution, due_to: Iterable[str] | None = None) -> State:
    """The state due to those independent sources alone, by name, or to all for ``None``: the sum of their parts.

    Rationals where the solution is exact. Raises ``KeyError`` for a name that is no independent source of the circuit.
    """
    names = solution.parts if due_to is None else dict.fromkeys(due_to)
    return _sum(solution.nodal, [solution.parts[name] for name in names], Fraction(0) if solution.exact else 0.0)


def total(solution: Solution) -> State:
    """The state with all independent sources at work, by superposition."""
    return state(solution)


def compared(circuit: Circuit, nodal: State, parts: Mapping[str, State], exact: bool) -> Solution:
    """The solution of both routes with gap, residual, balance and scales.

    A scale is the largest voltage between two nodes, current, or power of a part, in the circuit or in any part of the
    superposition: where sources cancel, rounding is still of the order of what cancels.
    """
    whole = _floats(_sum(nodal, parts.values(), Fraction(0) if exact else 0.0))
    sizes = [_sizes(circuit, s) for s in (whole, *map(_floats, parts.values()))]
    volts, amperes, watts = (max(column) for column in zip(*sizes, strict=True))
    ohms = [abs(float(e.value)) for e in circuit.elements if e.kind == "resistor" and e.value] or [1.0]
    at_volts, at_amperes = volts or amperes * max(ohms), amperes or volts / min(ohms)
    found = _floats(nodal)
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
    )


def _sum(like: State, states: Iterable[State], zero: Real) -> State:
    potentials, currents = dict.fromkeys(like.potentials, zero), dict.fromkeys(like.currents, zero)
    for s in states:
        for sums, terms in ((potentials, s.potentials), (currents, s.currents)):
            for name, x in terms.items():
                sums[name] += x
    return State(potentials, currents)


@dataclass(frozen=True, slots=True)
class _Floats:
    """A state to measure by."""

    potentials: dict[str, float]
    currents: dict[str, float]


def _floats(s: State) -> _Floats:
    return _Floats(
        {name: float(v) for name, v in s.potentials.items()}, {name: float(i) for name, i in s.currents.items()}
    )


def _sizes(circuit: Circuit, s: _Floats) -> tuple[float, float, float]:
    """Largest voltage between two nodes, largest current, largest power of a part."""
    volts = s.potentials.values()
    return max(volts) - min(volts), _largest(s.currents.values()), _largest(_powers(circuit, s))


def _powers(circuit: Circuit, s: _Floats) -> list[float]:
    return [(s.potentials[e.plus] - s.potentials[e.minus]) * s.currents[e.name] for e in circuit.elements]


def _residual(circuit: Circuit, s: _Floats) -> float:
    """The largest sum of currents at a node, in amperes."""
    sums = dict.fromkeys(s.potentials, 0.0)
    for e in circuit.elements:
        sums[e.plus] += s.currents[e.name]
        sums[e.minus] -= s.currents[e.name]
    return _largest(sums.values())


def _distance(a: Mapping[str, float], b: Mapping[str, float]) -> float:
    return _largest(a[name] - b[name] for name in a)


def _largest(values: Iterable[float]) -> float:
    """The largest size; infinite where a value is no number, which ``max`` would pass over."""
    return max((abs(x) if math.isfinite(x) else math.inf for x in values), default=0.0)


def _ratio(size: float, scale: float) -> float:
    """Relative size; infinite where either is no finite number."""
    if size == 0.0:
        return 0.0
    return size / scale if scale and math.isfinite(size) and math.isfinite(scale) else math.inf
