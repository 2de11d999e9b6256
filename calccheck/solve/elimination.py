"""Elimination of sparse linear equations, in whole numbers (nothing is ever rounded) or in floating point.

A row is a mapping from column to coefficient and adds up to zero. Columns from 0 on belong to the unknowns, those from −1 down
to what is known (the strengths of sources). Exact rows are kept as whole numbers without a common factor, a form of the
fraction-free elimination of E. H. Bareiss (Math. Comp. 22, 1968); pivots follow H. M. Markowitz (Manage. Sci. 3, 1957): the
shortest row, and in it the column that the fewest rows share.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction
from math import gcd, lcm
from typing import Any, TypeVar

Row = dict[int, Any]  # all coefficients of one kind: rational, floating-point, complex
N = TypeVar("N", int, complex)
_SAFE = 0.1  # a floating-point pivot is no less than this part of the largest coefficient of its row


class Singular(Exception):
    """The equations have no single solution."""


def solve_exact(rows: Sequence[Row]) -> list[Row]:
    """Each unknown as a combination of what is known; as many rows as unknowns.

    Raises ``Singular`` where, and only where, the rows depend on one another.
    """
    steps = _steps([_whole(row) for row in rows], lambda sizes: 0, _combined)
    return _substituted(steps, Fraction(1))


def solve_float(rows: Sequence[Row]) -> list[Row]:
    """As ``solve_exact``, in real or complex floating point; rows that depend on one another may go unnoticed."""
    steps = _steps([{j: x for j, x in row.items() if x} for row in rows], lambda sizes: _SAFE * max(sizes), _subtracted)
    return _substituted(steps, 1.0)


def _whole(row: Row) -> dict[int, int]:
    """The row times the number that makes it whole."""
    pairs = [(j, Fraction(x)) for j, x in row.items() if x]
    multiple = lcm(*(x.denominator for _, x in pairs))
    return {j: x.numerator * (multiple // x.denominator) for j, x in pairs}


def _combined(row: dict[int, int], by: dict[int, int], column: int) -> dict[int, int]:
    """The whole row freed of a column by whole multiples of both, without the common factor of what is left."""
    a, p = row[column], by[column]
    common = gcd(a, p)
    a, p = a // common, p // common
    new = {j: p * x for j, x in row.items()}
    for j, x in by.items():
        new[j] = new.get(j, 0) - a * x
    common = gcd(*new.values()) or 1
    return {j: x // common for j, x in new.items() if x}


def _subtracted(row: dict[int, complex], by: dict[int, complex], column: int) -> dict[int, complex]:
    """The row freed of a column by a multiple of another."""
    factor = row[column] / by[column]
    new = dict(row)
    for j, x in by.items():
        new[j] = new.get(j, 0.0) - factor * x
    del new[column]
    return {j: x for j, x in new.items() if x}


def _steps(
    rows: list[dict[int, N]],
    floor: Callable[[Sequence[float]], float],
    cancel: Callable[[dict[int, N], dict[int, N], int], dict[int, N]],
) -> list[tuple[int, dict[int, N]]]:
    """The columns in the order in which they are settled, each with a row free of the columns settled before it."""
    sharing: list[set[int]] = [{k for k, row in enumerate(rows) if j in row} for j in range(len(rows))]
    waiting, steps = set(range(len(rows))), []
    while waiting:
        k = min(waiting, key=lambda r: len(rows[r]))
        waiting.remove(k)
        row = rows[k]
        heads = [j for j in row if j >= 0]
        if not heads:
            raise Singular
        sizes: list[float] = [abs(row[j]) for j in heads]
        least = floor(sizes)
        column = min((j for j, x in zip(heads, sizes, strict=True) if x >= least), key=lambda j: len(sharing[j]))
        for j in heads:
            sharing[j].remove(k)
        for r in sharing[column]:
            rows[r] = cancel(rows[r], row, column)
            for j in heads:
                if j in rows[r]:
                    sharing[j].add(r)
                elif j != column:
                    sharing[j].discard(r)
        steps.append((column, row))
    return steps


def _substituted(steps: list[tuple[int, dict[int, N]]], one: Fraction | float) -> list[Row]:
    """The unknowns from the last step back to the first."""
    solved: list[Row] = [{} for _ in steps]
    for column, row in reversed(steps):
        total: Row = {}
        for j, x in row.items():
            if j < 0:
                total[j] = total.get(j, 0) + x
            elif j != column:
                for k, y in solved[j].items():
                    total[k] = total.get(k, 0) + x * y
        solved[column] = {k: -one * y / row[column] for k, y in total.items()}
    return solved
