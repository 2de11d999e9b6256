"""The law of every kind of branch as one row of the nodal equations, and how rows and columns are numbered.

Modified nodal analysis (C.-W. Ho, A. E. Ruehli, P. A. Brennan, IEEE Trans. Circuits Syst. CAS-22, 1975) with the current of
every branch kept as an unknown: a branch owns one row (its law) and one column (its current in the sums at its two nodes), so
a changed part changes nothing else.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from calccheck.model import Control
from calccheck.solve.branches import Branch, Network, Role

Array = NDArray[np.inexact[Any]]
Number = float | complex
Law = tuple[list[tuple[int, Number]], Number]  # coefficients by column, and the right side


@dataclass(frozen=True, slots=True)
class Layout:
    """Row and column of every node (the reference is 0, left out of the solve) and of every branch, by name."""

    nodes: dict[str, int]
    branches: dict[str, int]

    @property
    def size(self) -> int:
        """Rows and columns, the reference's included."""
        return len(self.nodes) + len(self.branches)


def layout_of(network: Network) -> Layout:
    """The numbering of a network; networks with the same names have the same one."""
    reference = network.circuit.reference
    names = [reference, *sorted(set(network.nodes) - {reference})]
    return Layout(
        {name: k for k, name in enumerate(names)},
        {b.name: k for k, b in enumerate(network.branches, start=len(names))},
    )


def stamp(matrix: Array, right: Array, b: Branch, at: Layout) -> None:
    """Writes a branch's row and column into the equations, over what stood there."""
    own, nodes = at.branches[b.name], len(at.nodes)
    matrix[own] = 0.0
    matrix[:nodes, own] = 0.0
    matrix[at.nodes[b.plus], own] += 1.0
    matrix[at.nodes[b.minus], own] -= 1.0
    coefficients, right[own] = LAWS[b.role](b, at)
    for column, x in coefficients:
        matrix[own, column] += x


def _number(b: Branch) -> Number:
    return b.value if isinstance(b.value, complex) else float(b.value)


def _across(b: Branch, at: Layout) -> list[tuple[int, Number]]:
    return [(at.nodes[b.plus], 1.0), (at.nodes[b.minus], -1.0)]


def _control(b: Branch, at: Layout, gain: Number) -> list[tuple[int, Number]]:
    """What steers a branch, times minus its gain."""
    control = b.control or Control()
    if control.part:
        return [(at.branches[control.part], -gain)]
    return [(at.nodes[control.plus], -gain), (at.nodes[control.minus], gain)]


def _impedance(b: Branch, at: Layout) -> Law:
    """V − Z·I = 0."""
    return [*_across(b, at), (at.branches[b.name], -_number(b))], 0.0


def _voltage(b: Branch, at: Layout) -> Law:
    return _across(b, at), _number(b)


def _current(b: Branch, at: Layout) -> Law:
    return [(at.branches[b.name], 1.0)], _number(b)


def _controlled_voltage(b: Branch, at: Layout) -> Law:
    return [*_across(b, at), *_control(b, at, _number(b))], 0.0


def _controlled_current(b: Branch, at: Layout) -> Law:
    return [(at.branches[b.name], 1.0), *_control(b, at, _number(b))], 0.0


def _nullor(b: Branch, at: Layout) -> Law:
    """No voltage where it controls; its own current and voltage are what the rest makes them."""
    return _control(b, at, -1.0), 0.0


def _link(b: Branch, at: Layout) -> Law:
    return _across(b, at), 0.0


def _gap(b: Branch, at: Layout) -> Law:
    return [(at.branches[b.name], 1.0)], 0.0


LAWS: dict[Role, Callable[[Branch, Layout], Law]] = {
    "impedance": _impedance,
    "voltage": _voltage,
    "current": _current,
    "controlled voltage": _controlled_voltage,
    "controlled current": _controlled_current,
    "nullor": _nullor,
    "link": _link,
    "gap": _gap,
}
