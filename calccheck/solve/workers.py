"""A formula over readings of circuits, worked at many points, and enclosed over a box of its varied values."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from calccheck.arithmetic import Doubt
from calccheck.formula import Node
from calccheck.solve.boxes import Box
from calccheck.solve.enclosures import ENCLOSING, Enclosure, Floats, Unbounded, constant
from calccheck.solve.families import Family
from calccheck.solve.stamps import Array
from calccheck.toleranced import Formula, Functions, Reading, worked


class Pole(Doubt):
    """A value without bounds somewhere within the tolerances."""


class Families:
    """The families of the circuits that are read, each made once; circuits are told apart by identity and kept."""

    def __init__(self) -> None:
        self._made: dict[tuple[int, float], tuple[Family, Reading]] = {}
        self._functionals: dict[int, tuple[Array, Reading]] = {}

    def of(self, reading: Reading) -> Family:
        """The family of a reading's circuit."""
        key = id(reading.circuit), float(reading.frequency)
        if key not in self._made:
            self._made[key] = Family(reading), reading
        return self._made[key][0]

    def functional(self, reading: Reading) -> Array:
        """How a reading is summed from the unknowns of its family."""
        if id(reading) not in self._functionals:
            self._functionals[id(reading)] = self.of(reading).functional(reading.read), reading
        return self._functionals[id(reading)][0]


class Worker:
    """One formula with the families that it reads."""

    def __init__(self, formula: Formula, families: Families) -> None:
        self.formula, self._families = formula, families
        grouped: dict[int, tuple[Family, list[str]]] = {}
        for name, reading in formula.readings.items():
            family = families.of(reading)
            grouped.setdefault(id(family), (family, []))[1].append(name)
        self.read = list(grouped.values())
        self.low = np.array([float(v.low) for v in formula.varied])
        self.high = np.array([float(v.high) for v in formula.varied])
        self.nominal = np.array([float(v.nominal) for v in formula.varied])
        self._keys = [v.key for v in formula.varied]

    def part(self, node: Node) -> Worker:
        """The worker of a piece of the formula."""
        return Worker(replace(self.formula, node=node), self._families)

    @property
    def alternating(self) -> bool:
        """Whether phasors are read."""
        return any(family.frequency for family, _ in self.read)

    def _leaves(self, points: Floats) -> dict[str, Any]:
        leaves: dict[str, Any] = {
            k: v if isinstance(v, complex) else float(v) for k, v in self.formula.constants.items()
        }
        return leaves | dict(zip(self._keys, np.ascontiguousarray(points.T), strict=True))

    def values(self, points: Floats) -> Floats:
        """The formula at many points, a row each. Raises ``Pole`` where it has no value at one of them."""
        leaves = self._leaves(points)
        try:
            for family, names in self.read:
                functionals = [self._families.functional(self.formula.readings[name]) for name in names]
                solved = family.solved(family.values(leaves.__getitem__, ARRAYS), functionals)
                leaves |= zip(names, solved, strict=True)
        except np.linalg.LinAlgError:
            raise Pole("the circuit has no single solution at some values within the tolerances") from None
        with np.errstate(all="ignore"):
            found = np.asarray(worked(self.formula.node, leaves.__getitem__, float, ARRAYS))
        if np.iscomplexobj(found):
            raise Doubt("a phasor has no extremes; take its magnitude |…|")
        if not np.isfinite(found).all():
            raise Pole("it has no finite value at some values within the tolerances")
        return np.broadcast_to(found, (len(points),))

    def one_signed(self, points: Floats) -> bool:
        """Whether the determinants of all circuits keep their signs over these points."""
        leaves = self._leaves(points)
        for family, _ in self.read:
            if family.opened and not family.frequency:
                signs = family.signs(family.values(leaves.__getitem__, ARRAYS))
                if (signs == 0).any() or (signs != signs[0]).any():
                    return False
        return True

    def enclosed(self, low: Floats, high: Floats) -> Enclosure:
        """Bounds of the formula over a box and of its slopes. Raises ``Unbounded`` where none can be given."""
        if self.alternating:
            raise Unbounded("phasors are searched")
        sides = len(low)
        leaves: dict[str, Enclosure] = {}
        for k, key in enumerate(self._keys):
            along = np.zeros(sides)
            along[k] = 1.0
            leaves[key] = Enclosure(float(low[k]), float(high[k]), along, along)
        for key, value in self.formula.constants.items():
            if isinstance(value, complex):
                raise Unbounded("phasors are searched")
            leaves[key] = constant(float(value), sides)
        try:
            for family, names in self.read:
                box = Box(family, [_at_least(v, sides) for v in family.values(leaves.__getitem__, ENCLOSING)], sides)
                leaves |= {name: box.read(self._families.functional(self.formula.readings[name])) for name in names}
            found: Any = worked(self.formula.node, leaves.__getitem__, float, ENCLOSING)
        except (np.linalg.LinAlgError, ZeroDivisionError, OverflowError, Doubt):
            raise Unbounded("no bounds can be given") from None
        return _at_least(found, sides)


def _at_least(value: Any, sides: int) -> Enclosure:
    return value if isinstance(value, Enclosure) else constant(float(value), sides)


def _over(a: Any, b: Any) -> Any:
    divisor = np.asarray(b)
    if not np.iscomplexobj(divisor) and divisor.size and divisor.min() <= 0 <= divisor.max():
        raise Pole("what it is divided by passes zero within the tolerances")
    return a / b


ARRAYS: Functions = {
    "abs": np.abs, "sqrt": np.sqrt, "exp": np.exp, "ln": np.log, "log10": np.log10, "sin": np.sin, "cos": np.cos, "tan": np.tan,
    "asin": np.arcsin, "acos": np.arccos, "atan": np.arctan, "min": lambda *x: np.minimum.reduce(np.broadcast_arrays(*x)),
    "max": lambda *x: np.maximum.reduce(np.broadcast_arrays(*x)), "re": np.real, "im": np.imag, "conj": np.conj,
    "arg": np.angle, "power": lambda x, i: x * i * i, "over": _over, "parallel": lambda a, b: a * b / (a + b),
}  # fmt: skip
"""The functions of arrays over points."""
