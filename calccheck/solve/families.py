"""A circuit with the values of some of its parts left open: its equations at thousands of values at once.

Each open value stands in one row of the equations of ``stamps``, so that the equations are their constant part and, for each
open value, that value times a matrix of rank one. For solving, the currents of impedances are taken out first, which leaves the
equations of nodal analysis.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import Any

import numpy as np

from calccheck.arithmetic import Value
from calccheck.model import Element, State
from calccheck.solve.branches import Branch, branches_of, network_of, with_terminals
from calccheck.solve.nodal import equations, unit_current
from calccheck.solve.reduced import Factor, Reduced, entries
from calccheck.solve.stamps import LAWS, Array, Layout, layout_of
from calccheck.toleranced import PLAIN, Effect, Functions, Reading, worked

_NOTHING = 1e-11  # a determinant beside the largest of its family that may as well be zero


@dataclass(frozen=True, slots=True)
class Open:
    """An open value of a branch: ``row`` of its law, in which the value times ``across`` stands, and ``source`` times it on the right.

    The branch's value in the equations (ohms, volts, amperes, a gain) is ``slope`` times the part's, or ``slope`` over it.
    """

    branch: str
    effect: Effect
    row: int
    across: Array
    source: float
    slope: complex
    inverse: bool

    def value(self, x: Any) -> Any:
        """The branch's value from the part's."""
        return self.slope / x if self.inverse else self.slope * x


class Family:
    """All circuits that differ from one in the open values alone, at one frequency. Rows and columns leave out the reference."""

    def __init__(self, reading: Reading) -> None:
        self.circuit, self.frequency = reading.circuit, reading.frequency
        network = network_of(self.circuit, self.frequency)
        self.at: Layout = layout_of(network)
        matrix, right = equations(network, self.at)
        self.matrix, self.right = matrix[1:, 1:], right[1:]
        self.opened = [o for e in reading.effects for o in self._open(e)]
        self._unit = unit_current(network)
        self._separable = self._found_separable(network.branches)
        for o in self.opened:  # what is left is the constant part
            nominal = next(b for b in network.branches if b.name == o.branch)
            self.matrix[o.row] -= plain(nominal.value) * o.across
            self.right[o.row] -= plain(nominal.value) * o.source

    @property
    def size(self) -> int:
        """The number of unknowns: node voltages, then currents of branches."""
        return len(self.right)

    def functional(self, read: Callable[[State], Value]) -> Array:
        """The coefficients with which a reading of a state is a sum of the unknowns."""
        basis: Any = np.vstack([np.zeros(self.size), np.eye(self.size)])
        currents = {name: basis[k] for name, k in self.at.branches.items()}
        state = State({name: basis[k] for name, k in self.at.nodes.items()}, with_terminals(self.circuit, currents))
        found: Any = read(state)
        return np.asarray(found)

    def values(self, leaf: Callable[[str], Any], functions: Functions = PLAIN) -> list[Any]:
        """The value of every open branch, in any kind of number; ``leaf`` gives the varied values."""
        return [o.value(worked(o.effect.node, leaf, float, functions)) for o in self.opened]

    def _open(self, effect: Effect) -> list[Open]:
        """The branches in which a value of a part stands; none at a frequency at which it does not."""
        element = next(e for e in self.circuit.elements if e.name == effect.part)
        one, two = (self._branches(element, effect.field, x) for x in (1, 2))
        found = []
        for a, b in zip(one, two, strict=True):
            if a.value == b.value:
                continue
            inverse = abs(plain(b.value)) < abs(plain(a.value))
            laws = [self._law(replace(a, value=Fraction(x))) for x in (0, 1)]
            across, source = laws[1][0] - laws[0][0], laws[1][1] - laws[0][1]
            row = self.at.branches[a.name] - 1
            found.append(Open(a.name, effect, row, across, source, plain(a.value), inverse))
        return found

    def _branches(self, e: Element, field: str, x: int) -> Sequence[Branch]:
        if field == "phasor":
            made = replace(e, phasor=complex(x))
        elif field == "value":
            made = replace(e, value=Fraction(x))
        else:
            assert e.device is not None
            changes: dict[str, Any] = {field: Fraction(x)}
            made = replace(e, device=replace(e.device, **changes))
        return branches_of(made, self.circuit.reference, self.frequency)

    def _law(self, branch: Branch) -> tuple[Array, Any]:
        coefficients, right = LAWS[branch.role](branch, self.at)
        row = np.zeros(self.at.size, self.matrix.dtype)
        for column, x in coefficients:
            row[column] += x
        return row[1:], right

    def _found_separable(self, branches: Sequence[Branch]) -> tuple[int, ...]:
        """The columns of impedances' currents that stand in no law but their own, and so in the sums at two nodes alone."""
        nodes = len(self.at.nodes) - 1
        stands = (self.matrix[nodes:] != 0).astype(int).sum(axis=0)
        for o in self.opened:
            stands += (o.across != 0) & (self.matrix[o.row] == 0)
        own = [self.at.branches[b.name] - 1 for b in branches if b.role == "impedance"]
        return tuple(k for k in own if stands[k] == 1)

    # --- solving ------------------------------------------------------------------------------------------------------

    def solved(self, values: Sequence[Array], functionals: Sequence[Array]) -> list[Array]:
        """Readings at many points: an array for each functional. ``values``: of every open branch, an array over the points.

        Raises ``numpy.linalg.LinAlgError`` where the equations are singular at one of the points.
        """
        reduced = self._reduced(values)
        found: list[list[Array]] = [[] for _ in functionals]
        for here, a, b in reduced.chunks():
            solution = np.linalg.solve(a, b[..., None])[..., 0]
            for reads, functional in zip(found, functionals, strict=True):
                reads.append(reduced.read(solution, functional, here))
        return [np.concatenate(reads) for reads in found]

    def at_values(self, values: Sequence[float]) -> tuple[Array, Array]:
        """The inverse of all equations at one value of every open branch, and the solution there."""
        matrix, right = self.matrix.copy(), self.right.copy()
        for o, v in zip(self.opened, values, strict=True):
            matrix[o.row] += v * o.across
            right[o.row] += v * o.source
        columns = np.where(np.arange(self.size) < len(self.at.nodes) - 1, 1.0, self._unit)
        rows = 1 / np.abs(matrix * columns).max(axis=1, initial=1e-300)
        inverse = columns[:, None] * np.linalg.inv(matrix * columns * rows[:, None]) * rows
        return inverse, inverse @ right

    def signs(self, values: Sequence[Array]) -> Array:
        """The sign of the determinant at many points, but for a factor that is the same at all of them; 0 where rounding hides it."""
        found = [np.linalg.slogdet(a) for _, a, _ in self._reduced(values).chunks()]
        signs, sizes = (np.concatenate([f[k] for f in found]) for k in (0, 1))
        return np.where(sizes < sizes.max() + math.log(_NOTHING), 0.0, signs)

    def _reduced(self, values: Sequence[Array]) -> Reduced:
        stacked = np.broadcast_arrays(*(np.atleast_1d(np.asarray(v)) for v in values))
        where = {o.row: v for o, v in zip(self.opened, stacked, strict=True)}
        out = [k for k in self._separable if _one_signed(where.get(k, -self.matrix[k, k]))]
        keep = np.array([k for k in range(self.size) if k not in set(out)], dtype=int)
        nodes = len(self.at.nodes) - 1
        columns = np.where(keep < nodes, 1.0, self._unit)  # currents counted in it, in the sums at nodes too
        rows = np.where(keep < nodes, 1 / self._unit, 1.0)[:, None]
        matrix, right = self.matrix[np.ix_(keep, keep)] * columns * rows, self.right[keep] * rows[:, 0]
        factors: list[Factor] = []
        taken: dict[int, tuple[Array, Array]] = {}
        for k in out:
            across, ohms = self.matrix[k, keep], where.get(k, -self.matrix[k, k])
            taken[k] = across, 1 / ohms
            pattern = np.outer(self.matrix[keep, k], across)
            if k in where:
                factors.append(Factor(1 / (self._unit * ohms), entries(pattern)))
            else:
                matrix = matrix + pattern / (self._unit * ohms)
        for o, v in zip(self.opened, stacked, strict=True):
            if o.row not in taken:
                own = keep == o.row
                pattern = own[:, None] * o.across[keep] * columns
                factors.append(
                    Factor(v, entries(pattern), [(int(i), o.source) for i in np.flatnonzero(own * o.source)])
                )
        return Reduced(keep, columns, matrix, right.astype(matrix.dtype), factors, taken)


def _one_signed(values: Any) -> bool:
    """Whether values are of one sign, zero being none; of complex ones, whether none is zero."""
    array = np.asarray(values)
    if np.iscomplexobj(array):
        return bool((array != 0).all())
    return bool((array > 0).all() or (array < 0).all())


def plain(x: Value) -> Any:
    """A value as a float or a complex number."""
    return x if isinstance(x, complex) else float(x)
