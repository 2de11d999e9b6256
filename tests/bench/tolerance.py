"""What tolerances cost, as ratios to what cannot be done without.

    python tests/bench/tolerance.py

Extreme values: 20 quantities of a circuit of 20 nodes with 30 values that have tolerances, lower and upper, against one solution
of the circuit at its nominal values by both routes. Random values: 100,000 points of a circuit of 10 nodes with 20 such values,
against numpy's batch solution of the same matrices and nothing else.
"""

from __future__ import annotations

import random
import sys
import time
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

import numpy as np
from boxes import as_circuit, formula, name, network

from calccheck.solve import solve
from calccheck.solve.tolerance import Tolerances, _points
from calccheck.solve.workers import Families, Worker

SAMPLES = 100_000
Read = Callable[..., object]


def least(work: Callable[[], object], times: int) -> float:
    """The shortest of several runs, in seconds of the processor."""
    found = []
    for _ in range(times):
        start = time.process_time()
        work()
        found.append(time.process_time() - start)
    return min(found)


def extremes(times: int = 3, quantities: int = 20) -> tuple[float, float, int]:
    """Seconds for all extremes and for the nominal solution, and how many extremes are proved."""
    made = as_circuit(network(random.Random(1), 20, 30))
    nodes = [n for n in made.nodes() if n != made.reference]
    reads: list[Read] = [lambda s, n=n: s.potentials[n] for n in nodes]
    reads += [lambda s, n=n: s.currents[n] for n in ("R1", "R2", "R3")]
    proved: list[bool] = []

    def work() -> None:
        tolerances = Tolerances()
        proved.clear()
        for read in reads[:quantities]:
            boxed = formula(made, name("v"), {"v": read}, "0.05")
            proved.extend(tolerances.extreme(boxed, largest).proved for largest in (False, True))

    return least(work, times), least(lambda: solve(made), times), sum(proved)


def samples(times: int = 5, count: int = SAMPLES) -> tuple[float, float]:
    """Seconds for a sample of one voltage, drawn and worked, and for numpy's solution of its matrices."""
    made = as_circuit(network(random.Random(3), 10, 20))
    boxed = formula(made, name("v"), {"v": lambda s: s.potentials["n8"]}, "0.05")
    worker = Worker(boxed, Families())
    family = worker.read[0][0]
    points = _points(worker, count, 1, "uniform")
    leaves = dict(zip([v.key for v in boxed.varied], points.T, strict=True))
    stacked = [(a.copy(), b.copy()) for _, a, b in family._reduced(family.values(leaves.__getitem__)).chunks()]
    matrices, rights = (np.concatenate([pair[k] for pair in stacked]) for k in (0, 1))
    bare = least(lambda: np.linalg.solve(matrices, rights[..., None]), times)
    return least(lambda: Tolerances().sampled(boxed, count, 1, "uniform"), times), bare


if __name__ == "__main__":
    spent, nominal, proved = extremes()
    print(
        f"20 quantities, lower and upper extreme, 30 values: {spent * 1e3:.0f} ms, {spent / nominal:.0f} nominal solutions;"
    )
    print(f"{proved} of 40 proved")
    drawn, bare = samples()
    print(f"{SAMPLES} random values: {drawn * 1e3:.0f} ms, {drawn / bare:.2f} of the bare solution of the matrices")
