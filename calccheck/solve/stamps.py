"""The law of every kind of part as one row of the nodal equations, and how rows and columns are numbered.

Modified nodal analysis (C.-W. Ho, A. E. Ruehli, P. A. Brennan, IEEE Trans. Circuits Syst. CAS-22, 1975) with the current of
every part kept as an unknown: a part owns one row (its law) and one column (its current in the sums at its two nodes), so a
changed part changes nothing else.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from calccheck.model import Circuit, Control, Element
from calccheck.solve.at_dc import value

Array = NDArray[np.floating[Any]]
Law = tuple[list[tuple[int, float]], float]  # coefficients by column, and the right side


@dataclass(frozen=True, slots=True)
class Layout:
    """Row and column of every node (the reference is 0, left out of the solve) and of every part, by name."""

    nodes: dict[str, int]
    parts: dict[str, int]

    @property
    def size(self) -> int:
        """Rows and columns, the reference's included."""
        return len(self.nodes) + len(self.parts)


def layout_of(circuit: Circuit) -> Layout:
    """The numbering of a circuit; circuits with the same names have the same one."""
    names = [circuit.reference, *sorted(set(circuit.nodes()) - {circuit.reference})]
    return Layout(
        {name: k for k, name in enumerate(names)},
        {e.name: k for k, e in enumerate(circuit.elements, start=len(names))},
    )


def stamp(matrix: Array, right: Array, e: Element, at: Layout) -> None:
    """Writes a part's row and column into the equations, over what stood there."""
    own, nodes = at.parts[e.name], len(at.nodes)
    matrix[own] = 0.0
    matrix[:nodes, own] = 0.0
    matrix[at.nodes[e.plus], own] += 1.0
    matrix[at.nodes[e.minus], own] -= 1.0
    coefficients, right[own] = LAWS[e.kind](e, at)
    for column, x in coefficients:
        matrix[own, column] += x


def _number(e: Element) -> float:
    return float(value(e))


def _across(e: Element, at: Layout) -> list[tuple[int, float]]:
    return [(at.nodes[e.plus], 1.0), (at.nodes[e.minus], -1.0)]


def _control(e: Element, at: Layout) -> list[tuple[int, float]]:
    """What steers a controlled source, times minus its gain."""
    gain, control = _number(e), e.control or Control()
    if control.part:
        return [(at.parts[control.part], -gain)]
    return [(at.nodes[control.plus], -gain), (at.nodes[control.minus], gain)]


def _resistor(e: Element, at: Layout) -> Law:
    """V − R·I = 0, which holds for no resistance as well."""
    return [*_across(e, at), (at.parts[e.name], -_number(e))], 0.0


def _voltage_source(e: Element, at: Layout) -> Law:
    return _across(e, at), _number(e)


def _current_source(e: Element, at: Layout) -> Law:
    return [(at.parts[e.name], 1.0)], _number(e)


def _controlled_voltage(e: Element, at: Layout) -> Law:
    return [*_across(e, at), *_control(e, at)], 0.0


def _controlled_current(e: Element, at: Layout) -> Law:
    return [(at.parts[e.name], 1.0), *_control(e, at)], 0.0


def _link(e: Element, at: Layout) -> Law:
    return _across(e, at), 0.0


def _gap(e: Element, at: Layout) -> Law:
    return [(at.parts[e.name], 1.0)], 0.0


LAWS: dict[str, Callable[[Element, Layout], Law]] = {
    "resistor": _resistor,
    "voltage source": _voltage_source,
    "current source": _current_source,
    "controlled voltage source": _controlled_voltage,
    "controlled current source": _controlled_current,
    "short": _link,
    "open": _gap,
    "inductor": _link,
    "capacitor": _gap,
}
