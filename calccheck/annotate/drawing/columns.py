"""In which order the parts stand from left to right, so that few lines are crossed and lines stay short.

A deterministic search: each part in turn is put where it costs least, then each is taken out and put back where it costs least,
until nothing is gained or the work allowed is used up.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

_CROSSING = 6  # how many columns of line are given for one crossing less
_WORK = 45_000  # conductors looked at in all: bounds the time


@dataclass(frozen=True, slots=True)
class Track:
    """One upright conductor: the levels of the lines that it meets and of those that it passes."""

    meets: tuple[int, ...]
    passes: tuple[int, ...]


Shape = tuple[Track, ...]
"""A part's conductors from left to right."""


def ordered(shapes: Sequence[Shape], levels: int, first: Sequence[int] = ()) -> list[int]:
    """The parts' numbers from left to right. ``first``: parts that should rather stand left than right (sources)."""
    size = sum(map(len, shapes))
    allowed = _WORK // max(1, size)
    best: list[int] = []
    least = float("inf")
    for start in _starts(shapes):
        order, used = _settled(start, shapes, levels, allowed // 2)
        allowed -= used
        cost = _cost(order, shapes, levels)
        if cost < least:
            best, least = order, cost
    middle = (len(best) - 1) / 2
    lean = sum(best.index(p) - middle for p in first)
    return best[::-1] if lean > 0 else best


def _starts(shapes: Sequence[Shape]) -> list[list[int]]:
    """Two orders to begin with: as written, and the longest first."""
    written = list(range(len(shapes)))
    reach = [-sum(len(t.meets) + len(t.passes) for t in s) for s in shapes]
    return [written, sorted(written, key=lambda k: reach[k])]


def _settled(start: list[int], shapes: Sequence[Shape], levels: int, allowed: int) -> tuple[list[int], int]:
    """An order from which no single part can be moved with gain, and how many orders were tried."""
    order: list[int] = []
    used = 0
    if len(start) ** 2 > allowed:
        return start, 0
    for p in start:
        order, _ = _placed(p, order, shapes, levels)
        used += len(order)
    cost = _cost(order, shapes, levels)
    gained = True
    while gained and used < allowed:
        gained = False
        for p in start:
            rest = [q for q in order if q != p]
            moved, now = _placed(p, rest, shapes, levels)
            used += len(order)
            if now < cost:
                order, cost, gained = moved, now, True
    return order, used


def _placed(p: int, order: list[int], shapes: Sequence[Shape], levels: int) -> tuple[list[int], float]:
    """The order with one more part where it costs least, as far right as that allows."""
    tried = [[*order[:at], p, *order[at:]] for at in range(len(order), -1, -1)]
    costs = [_cost(t, shapes, levels) for t in tried]
    least = min(costs)
    return tried[costs.index(least)], least


def _cost(order: Sequence[int], shapes: Sequence[Shape], levels: int) -> float:
    """Crossings and length of line."""
    left, right = [-1] * levels, [-1] * levels
    x = 0
    passing: list[tuple[int, tuple[int, ...]]] = []
    for p in order:
        for track in shapes[p]:
            for n in track.meets:
                if left[n] < 0:
                    left[n] = x
                right[n] = x
            if track.passes:
                passing.append((x, track.passes))
            x += 1
    crossings = 0
    for x, levels_passed in passing:
        for n in levels_passed:
            if left[n] < x < right[n]:
                crossings += 1
    return _CROSSING * crossings + sum(right) - sum(left)
