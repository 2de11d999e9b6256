"""Equations that vary, at thousands of points: their matrices built in pieces, solved at once, read."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from calccheck.solve.stamps import Array

CHUNK = 3000  # points solved at once: these fit into the processor's cache


@dataclass(frozen=True, slots=True)
class Factor:
    """What varies in equations: values, an array over the points, and where they stand on the left and right, times what."""

    values: Array
    entries: Sequence[tuple[int, int, Any]]
    sources: Sequence[tuple[int, Any]] = ()


@dataclass(frozen=True, slots=True)
class Reduced:
    """Equations of a family without the currents of impedances.

    ``keep``: the unknowns that are left, each counted in its ``scale``. ``matrix``, ``right``: the constant part.
    ``taken``: of each impedance taken out, how its voltage is read from the unknowns, and its admittance.
    """

    keep: Array
    scale: Array
    matrix: Array
    right: Array
    factors: Sequence[Factor]
    taken: Mapping[int, tuple[Array, Array]]

    def chunks(self) -> Iterator[tuple[slice, Array, Array]]:
        """Matrices and right sides, so many points at a time, and which points these are."""
        points = max((len(f.values) for f in self.factors), default=1)
        for start in range(0, points, CHUNK):
            here = slice(start, min(points, start + CHUNK))
            left = np.repeat(self.matrix[..., None], here.stop - start, axis=2)
            right = np.repeat(self.right[:, None], here.stop - start, axis=1)
            for f in self.factors:
                for i, j, x in f.entries:
                    _add(left[i, j], x, f.values[here])
                for i, x in f.sources:
                    _add(right[i], x, f.values[here])
            yield here, left.transpose(2, 0, 1), right.T

    def read(self, solution: Array, functional: Array, here: slice) -> Array:
        """A functional of all unknowns of the family, over some of the points."""
        found = _summed(solution, functional[self.keep] * self.scale)
        for k, (across, admittance) in self.taken.items():
            if functional[k]:
                some = admittance[here] if np.ndim(admittance) else admittance
                found = found + functional[k] * some * _summed(solution, across * self.scale)
        return np.asarray(found)


def _summed(solution: Array, weights: Array) -> Array:
    """The weighted sum of columns, nearly all of whose weights are zero; a product of matrices would wake more processors."""
    total = np.zeros(len(solution), np.result_type(solution, weights))
    for k in np.flatnonzero(weights).tolist():
        total += weights[k] * solution[:, k]
    return total


def entries(pattern: Array) -> list[tuple[int, int, Any]]:
    """The places of a matrix that are not zero, with what stands there."""
    return [(i, j, pattern[i, j]) for i, j in np.argwhere(pattern).tolist()]


def _add(to: Any, coefficient: Any, values: Array) -> None:
    if coefficient == 1:
        to += values
    elif coefficient == -1:
        to -= values
    else:
        to += coefficient * values
