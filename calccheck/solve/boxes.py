"""Bounds of what is read from a circuit, and of its slopes, over a whole box of values.

With A the equations at the middle of the box and δ the deviations of the open values, a solution is x = x₀ + Σ δₖ·A⁻¹eₖ·qₖ,
where the drive qₖ = sₖ − wₖ·x is what one unit of that value puts into its row. So q = q₀ − P·δq with P = W·A⁻¹E, and bounds
of |q| follow from (I − |P|·|δ|)⁻¹·|q₀| where that inverse is not negative (a Neumann series that converges). What a reading
c·x gains with one open value is lₖ·qₖ, and l, the reading's transfer from each row, is bounded in the same way by the transpose:
the adjoint circuit (B. D. H. Tellegen, 1952; S. W. Director, R. A. Rohrer, 1969; both from memory).
"""

from __future__ import annotations

import numpy as np

from calccheck.solve.enclosures import Enclosure, Floats, Unbounded, product
from calccheck.solve.families import Family
from calccheck.solve.stamps import Array


class Box:
    """A family over a box of its branch values, which are given as enclosures over the sides of the box of varied values.

    Raises ``Unbounded`` where no bounds can be given, so that the circuit may have no solution somewhere in the box.
    """

    def __init__(self, family: Family, values: list[Enclosure], sides: int) -> None:
        self.values, self.sides = values, sides
        self.half = np.array([(v.high - v.low) / 2 for v in values])
        across = np.array([o.across for o in family.opened]).reshape(len(values), family.size)
        sources = np.array([o.source for o in family.opened])
        inverse, self.middle = family.at_values([(v.low + v.high) / 2 for v in values])
        self.transfer = inverse[:, [o.row for o in family.opened]]
        self.loops = across @ self.transfer
        self.drive = sources - across @ self.middle
        spread = np.abs(self.loops) * self.half
        self._grown = _neumann(spread)
        self.most_drive = self._grown @ np.abs(self.drive)
        self.drive_off = spread @ self.most_drive

    def read(self, functional: Array) -> Enclosure:
        """Bounds of a functional of the unknowns and of its slopes."""
        gains = functional @ self.transfer
        off = float(np.abs(gains) @ (self.half * self.most_drive))
        value = float(functional @ self.middle)
        spread = np.abs(self.loops).T * self.half
        gains_off = spread @ (_neumann(spread) @ np.abs(gains))
        slopes = product(gains - gains_off, gains + gains_off, self.drive - self.drive_off, self.drive + self.drive_off)
        least, most = np.zeros(self.sides), np.zeros(self.sides)
        for k, v in enumerate(self.values):
            low, high = product(slopes[0][k], slopes[1][k], v.least, v.most)
            least, most = least + low, most + high
        return Enclosure(value - off, value + off, least, most)


def _neumann(spread: Floats) -> Floats:
    """(I − B)⁻¹ of a matrix without negative entries; it has none itself just where the series I + B + B² + … converges."""
    with np.errstate(all="ignore"):
        try:
            found = np.linalg.inv(np.eye(len(spread)) - spread)
        except np.linalg.LinAlgError:
            raise Unbounded("the tolerances are too wide for bounds") from None
    if not np.isfinite(found).all() or (found < -1e-9).any():
        raise Unbounded("the tolerances are too wide for bounds")
    return np.asarray(found)
