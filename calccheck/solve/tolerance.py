"""What tolerances do to a formula over readings of circuits: extremes, random values, slopes."""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np

from calccheck.solve.enclosures import Floats
from calccheck.solve.extremes import extreme
from calccheck.solve.workers import Families, Worker
from calccheck.toleranced import Extreme, Formula, Sample, Spread

_STEP = 1e-4  # of a tolerance, for the slopes


class Tolerances:
    """Works formulas of one sheet over their tolerances; what is known of a circuit is kept."""

    def __init__(self) -> None:
        self._families = Families()

    def extreme(self, formula: Formula, largest: bool) -> Extreme:
        """The largest or the least value of a formula. Raises ``Doubt`` where it has none."""
        return extreme(Worker(formula, self._families), largest)

    def slopes(self, formula: Formula) -> Mapping[str, float]:
        """The slope of a formula at its nominal values along every varied value, by key (central differences)."""
        worker = Worker(formula, self._families)
        width = worker.high - worker.low
        step = _STEP * np.where(width > 0, width, np.where(worker.nominal == 0, 1.0, 0.01 * np.abs(worker.nominal)))
        away = np.diag(step)
        values = worker.values(np.vstack([worker.nominal + away, worker.nominal - away]))
        rise = (values[: len(step)] - values[len(step) :]) / (2 * step)
        return {v.key: float(x) for v, x in zip(formula.varied, rise, strict=True)}

    def at_ends(self, formula: Formula) -> Mapping[str, tuple[float, float]]:
        """The formula with one varied value at its low and at its high end, all others nominal, by key."""
        worker = Worker(formula, self._families)
        points = np.repeat(worker.nominal[None], 2 * len(formula.varied), axis=0)
        for k in range(len(formula.varied)):
            points[2 * k, k], points[2 * k + 1, k] = worker.low[k], worker.high[k]
        values = worker.values(points).tolist()
        return {v.key: (values[2 * k], values[2 * k + 1]) for k, v in enumerate(formula.varied)}

    def sampled(self, formula: Formula, size: int, seed: int, spread: Spread) -> Sample:
        """Moments of a formula whose varied values are independent and random.

        ``uniform`` from end to end, or ``normal`` about the middle with the ends at three sigma. The standard error of sigma is
        that of a sample's standard deviation by its fourth moment (H. Cramér, Mathematical Methods of Statistics, 1946, 27.4;
        from memory).
        """
        values = self.values(formula, size, seed, spread)
        mean, sigma = float(values.mean()), float(values.std(ddof=1))
        squares = np.square(values - mean)
        fourth = float(np.square(squares).mean()) - sigma**4
        error = math.sqrt(max(fourth, 0.0) / size) / (2 * sigma) if sigma else 0.0
        return Sample(size, mean, sigma, error, float((values >= 0).mean()))

    def values(self, formula: Formula, size: int, seed: int, spread: Spread) -> Floats:
        """The formula at random points."""
        worker = Worker(formula, self._families)
        return worker.values(_points(worker, size, seed, spread))


def _points(worker: Worker, size: int, seed: int, spread: Spread) -> Floats:
    rng = np.random.default_rng(seed)
    low, width = worker.low[:, None], (worker.high - worker.low)[:, None]
    shape = len(worker.low), size
    drawn = rng.random(shape) if spread == "uniform" else 0.5 + rng.standard_normal(shape) / 6
    drawn *= width
    drawn += low
    return drawn.T
