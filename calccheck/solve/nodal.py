"""First route: the whole circuit at once, in floating point."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from calccheck.arithmetic import Value, size
from calccheck.model import Circuit, State
from calccheck.solve.branches import Network, branches_of, network_of, with_terminals
from calccheck.solve.part_faults import part_faults
from calccheck.solve.stamps import Array, Layout, layout_of, stamp

SINGULAR = 1e13  # condition of the levelled equations beyond which their solution says nothing


def nodal_state(network: Network) -> State:
    """The state of a network whose structure is sound; not finite where the equations are singular after all."""
    at = layout_of(network)
    matrix, right = equations(network, at)
    unit = unit_current(network)
    matrix, right = _levelled(matrix[None], right[None], len(at.nodes) - 1, unit)
    with np.errstate(all="ignore"):
        try:
            x = np.linalg.solve(matrix, right[..., None])[0, :, 0]
        except np.linalg.LinAlgError:
            x = np.full(at.size - 1, np.nan)
    return _state(network.circuit, at, x, unit)


def condition(network: Network) -> float:
    """Condition number (1-norm) of the levelled equations; infinite where they are singular."""
    at = layout_of(network)
    matrix, right = equations(network, at)
    matrix, _ = _levelled(matrix[None], right[None], len(at.nodes) - 1, unit_current(network))
    return float(_conditions(matrix)[0])


def batch_states(circuits: Sequence[Circuit], frequency: Fraction) -> list[State | None]:
    """The states of many variants of a circuit at a frequency, in one ``numpy.linalg.solve`` for each size of equations.

    Quickest when the variants share the names of nodes and parts and most of their ``Element`` objects. ``None`` for a
    circuit that has problems, or whose equations are singular or too near to it.
    """
    states: list[State | None] = [None] * len(circuits)
    for stacks in _by_size(circuits, frequency).values():
        matrices = np.concatenate([s.matrices for s in stacks])
        rights = np.concatenate([s.rights for s in stacks])
        with np.errstate(all="ignore"):
            sound = _conditions(matrices) < SINGULAR
            solved = np.linalg.solve(matrices[sound], rights[sound][..., None])[..., 0]
        members = [(k, s) for s in stacks for k in s.members]
        for (k, s), x in zip((m for m, good in zip(members, sound, strict=True) if good), solved, strict=True):
            states[k] = _state(circuits[k], s.at, x, s.unit)
    return states


@dataclass(frozen=True, slots=True)
class _Stack:
    """Levelled equations of the circuits with one layout, and where those circuits stand in the batch."""

    at: Layout
    unit: float
    members: list[int]
    matrices: Array
    rights: Array


def _by_size(circuits: Sequence[Circuit], frequency: Fraction) -> dict[int, list[_Stack]]:
    """The equations of a batch, by their size; without circuits that have nothing to solve or a part that cannot be."""
    alike: dict[object, list[int]] = defaultdict(list)
    for k, c in enumerate(circuits):
        if c.elements and not c.problems and not part_faults(c, frequency):
            alike[c.reference, frozenset(c.nodes()), tuple((e.name, e.terminals) for e in c.elements)].append(k)
    sizes: dict[int, list[_Stack]] = defaultdict(list)
    for members in alike.values():
        first = network_of(circuits[members[0]], frequency)
        at, unit = layout_of(first), unit_current(first)
        variants = _variants(first, [circuits[k] for k in members], at)
        sizes[at.size].append(_Stack(at, unit, members, *_levelled(*variants, len(at.nodes) - 1, unit)))
    return sizes


def equations(network: Network, at: Layout) -> tuple[Array, Array]:
    """Matrix and right side, the reference's row and column included."""
    kind = complex if network.frequency else float
    matrix, right = np.zeros((at.size, at.size), kind), np.zeros(at.size, kind)
    for b in network.branches:
        stamp(matrix, right, b, at)
    return matrix, right


def _variants(first: Network, circuits: Sequence[Circuit], at: Layout) -> tuple[Array, Array]:
    """The equations of all circuits of one layout: those of the first, and over them what differs."""
    matrix, right = equations(first, at)
    matrices, rights = np.repeat(matrix[None], len(circuits), axis=0), np.repeat(right[None], len(circuits), axis=0)
    for k, c in enumerate(circuits):
        for e, e0 in zip(c.elements, first.circuit.elements, strict=True):
            if e is not e0:
                for b in branches_of(e, c.reference, first.frequency):
                    stamp(matrices[k], rights[k], b, at)
    return matrices, rights


def unit_current(network: Network) -> float:
    """One volt over the geometric mean of the impedances: currents counted in it are of the order of the voltages."""
    sizes = [math.log(size(b.value)) for b in network.branches if b.role == "impedance"]
    return math.exp(-sum(sizes) / len(sizes)) if sizes else 1.0


def _levelled(matrices: Array, rights: Array, nodes: int, unit: float) -> tuple[Array, Array]:
    """Without the reference, currents counted in ``unit``, and the largest coefficient of every row brought to one."""
    matrices, rights = matrices[:, 1:, 1:].copy(), rights[:, 1:]
    matrices[:, :, nodes:] *= unit
    largest = np.abs(matrices).max(axis=2, initial=0.0)
    largest[largest == 0.0] = 1.0
    return matrices / largest[..., None], rights / largest


def _conditions(matrices: Array) -> Array:
    """Condition numbers of a stack of matrices; infinite for a singular one."""
    singular = np.linalg.slogdet(matrices)[0] == 0.0
    inverses = np.linalg.inv(np.where(singular[:, None, None], np.eye(matrices.shape[-1]), matrices))
    norms = [np.abs(m).sum(axis=1).max(axis=1, initial=0.0) for m in (matrices, inverses)]
    return np.where(singular, np.inf, norms[0] * norms[1])


def _state(circuit: Circuit, at: Layout, x: Array, unit: float) -> State:
    nodes = len(at.nodes) - 1
    zero = 0j if np.iscomplexobj(x) else 0.0
    volts: list[Value] = x[:nodes].tolist()
    amperes: list[Value] = (x[nodes:] * unit).tolist()
    currents = dict(zip(at.branches, amperes, strict=True))
    return State(dict(zip(at.nodes, [zero, *volts], strict=True)), with_terminals(circuit, currents))
