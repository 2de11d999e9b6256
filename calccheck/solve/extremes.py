"""The least and the largest value of a formula within tolerances: proved where that can be done, else searched, and said which.

First every value along which the formula provably rises or falls over the whole box is set to its end, and the box, which has
fewer sides now, is looked at again. Where none is left, that corner is the extreme. Of up to ``CORNERS`` values that are left all
corners are worked, which proves the extreme of a formula whose form has it there. What remains is searched: along one value at
a time from several corners, the best kept.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from fractions import Fraction

import numpy as np

from calccheck.formula import Node
from calccheck.solve.enclosures import Enclosure, Floats, Unbounded
from calccheck.solve.forms import Form, form_of
from calccheck.solve.workers import Pole, Worker
from calccheck.toleranced import Extreme

CORNERS = 12
_STARTS = 8
_ROUNDS = 60
_LEVEL = 1e-12  # a share of the largest effect of a value, below which another's is nothing
_SURE = 1e-9  # a share of a slope that rounding may turn
_GRID = 17


@dataclass(slots=True)
class _Hunt:
    """The box while values are set to their ends.

    ``bounded``: whether the circuit has a solution everywhere in it. ``effect``: the largest that a value may have. ``free``:
    values that have none.
    """

    worker: Worker
    low: Floats
    high: Floats
    sign: int
    bounded: bool = False
    effect: float = 0.0
    free: set[int] = field(default_factory=set)

    @property
    def left(self) -> list[int]:
        """The values not set yet."""
        return [int(k) for k in np.flatnonzero(self.low < self.high)]


def extreme(worker: Worker, largest: bool) -> Extreme:
    """The largest or the least value within the tolerances. Raises ``Pole`` where there is none, ``Doubt`` for a phasor."""
    hunt = _Hunt(worker, worker.low.copy(), worker.high.copy(), 1 if largest else -1)
    _set_ends(hunt)
    left, form = hunt.left, form_of(worker.formula)
    if not left:
        return _found(hunt, hunt.low, True, "proved by the sign of every slope")
    if len(left) > CORNERS:
        return _search(hunt, form)
    corners = _corners(hunt, left)
    if not hunt.bounded and not worker.one_signed(corners):
        raise Pole("the circuit's determinant changes sign within the tolerances: it has no single solution there")
    at = _best(hunt, corners)
    if form is not None and (form.kind == "quotient" or (form.kind == "valley") == largest):
        own = _position(worker, form)
        if own in left:
            return _along_own(hunt, corners, own)
        return _found(hunt, at, True, f"proved: all {len(corners)} corners that slopes leave open are worked")
    if form is not None and form.inner is not None and _unbent(hunt, form.inner, corners):
        return _found(hunt, at, True, f"proved: all {len(corners)} corners that slopes leave open are worked")
    return _search(hunt, form, [at])


def _unbent(hunt: _Hunt, inner: Node, corners: Floats) -> bool:
    """Whether a quotient keeps its sign, so that its size or square has its least value at a corner, as it has."""
    values = hunt.worker.part(inner).values(corners)
    return bool((values > 0).all() or (values < 0).all())


def _set_ends(hunt: _Hunt) -> None:
    """Sets every value along which the formula surely rises or falls to its end, as long as there are any."""
    while hunt.left:
        try:
            found = hunt.worker.enclosed(hunt.low, hunt.high)
        except Unbounded:
            return
        hunt.bounded = True
        if not _set_some(hunt, found):
            return


def _set_some(hunt: _Hunt, found: Enclosure) -> bool:
    width = hunt.high - hunt.low
    most, least = (found.most, found.least) if hunt.sign > 0 else (-found.least, -found.most)
    effect = np.maximum(np.abs(most), np.abs(least)) * width
    hunt.effect = max(hunt.effect, float(effect.max(initial=0.0)))
    nothing = effect <= _LEVEL * hunt.effect
    rises, falls = least >= -_SURE * most, most <= -_SURE * least
    before = len(hunt.left)
    for k in hunt.left:
        if nothing[k]:
            hunt.free.add(k)
            hunt.low[k] = hunt.high[k] = hunt.worker.nominal[k]
        elif rises[k]:
            hunt.low[k] = hunt.high[k]
        elif falls[k]:
            hunt.high[k] = hunt.low[k]
    return len(hunt.left) < before


def _corners(hunt: _Hunt, left: Sequence[int]) -> Floats:
    """All corners of what is left of the box, a row each."""
    points = np.repeat(hunt.low[None], 2 ** len(left), axis=0)
    for bit, k in enumerate(left):
        points[(np.arange(len(points)) >> bit) % 2 == 1, k] = hunt.high[k]
    return points


def _best(hunt: _Hunt, points: Floats) -> Floats:
    return np.asarray(points[int(np.argmax(hunt.sign * hunt.worker.values(points)))])


def _position(worker: Worker, form: Form) -> int:
    return next((k for k, v in enumerate(worker.formula.varied) if v.key == form.own), -1)


def _along_own(hunt: _Hunt, corners: Floats, own: int) -> Extreme:
    """The extreme of a form with one turning point along one value: that line searched at every corner of the others."""
    lines = corners[corners[:, own] == hunt.low[own]]
    low, high = np.full(len(lines), hunt.low[own]), np.full(len(lines), hunt.high[own])
    best = _best(hunt, corners)
    shares = np.linspace(0, 1, _GRID)
    for _ in range(12):
        points = np.repeat(lines, _GRID, axis=0)
        points[:, own] = (low[:, None] + (high - low)[:, None] * shares).reshape(-1)
        values = hunt.sign * hunt.worker.values(points).reshape(-1, _GRID)
        best = _best(hunt, np.vstack([best, points[int(np.argmax(values))]]))
        top = values.argmax(axis=1)
        low, high = (low + (high - low) * shares[np.clip(top + step, 0, _GRID - 1)] for step in (-1, 1))
    inside = hunt.low[own] < best[own] < hunt.high[own]
    how = (
        "proved: one turning point, at every corner of the others"
        if inside
        else f"proved: all {len(corners)} corners are worked"
    )
    return _found(hunt, best, True, how)


def _search(hunt: _Hunt, form: Form | None, starts: Sequence[Floats] = ()) -> Extreme:
    """The best found along one value at a time; between their ends too, unless the form has its extremes at corners."""
    left, at_corners = hunt.left, form is not None and form.kind == "quotient" and not form.own
    rng = np.random.default_rng(0)
    ends = np.where(rng.random((_STARTS, len(hunt.low))) < 0.5, hunt.low, hunt.high)
    best = _best(hunt, np.vstack([*starts, ends, (hunt.low + hunt.high) / 2, _uphill(hunt)]))
    if not hunt.bounded and not hunt.worker.one_signed(np.vstack([ends, best])):
        raise Pole("the circuit's determinant changes sign within the tolerances: it has no single solution there")
    tops = [_climbed(hunt, p, left, at_corners) for p in (best, _uphill(hunt), *ends[:3])]
    return _found(hunt, _best(hunt, np.vstack(tops)), False, "found by a search, not proved")


def _uphill(hunt: _Hunt) -> Floats:
    """The corner to which the slopes at the middle of the box point."""
    middle, step = (hunt.low + hunt.high) / 2, 1e-3 * (hunt.high - hunt.low)
    away = np.diag(step)
    rise = hunt.sign * (hunt.worker.values(middle + away) - hunt.worker.values(middle - away))
    return np.where(rise > 0, hunt.high, hunt.low)


def _climbed(hunt: _Hunt, start: Floats, left: Sequence[int], at_corners: bool) -> Floats:
    point, best = start.copy(), float(hunt.sign * hunt.worker.values(start[None])[0])
    reach = 1.0
    for _ in range(_ROUNDS):
        points = _lines(hunt, point, left, at_corners, reach)
        values = hunt.sign * hunt.worker.values(points)
        top = int(np.argmax(values))
        if values[top] > best + 1e-13 * abs(best):
            point, best = points[top].copy(), float(values[top])
        elif at_corners or reach < 1e-8:
            break
        else:
            reach /= _GRID - 1
    return point


def _lines(hunt: _Hunt, point: Floats, left: Sequence[int], at_corners: bool, reach: float) -> Floats:
    """Points along every value through a point: its two ends, or a grid that spans a share of the box around it."""
    width = hunt.high - hunt.low
    made = []
    for k in left:
        along = np.array([hunt.low[k], hunt.high[k]])
        if not at_corners:
            around = point[k] + reach * width[k] * np.linspace(-1, 1, _GRID)
            along = np.concatenate([along, np.clip(around, hunt.low[k], hunt.high[k])])
        points = np.repeat(point[None], len(along), axis=0)
        points[:, k] = along
        made.append(points)
    return np.vstack(made)


def _found(hunt: _Hunt, at: Floats, proved: bool, how: str) -> Extreme:
    """The extreme, its point in rationals: the very ends where it lies at ends."""
    worker = hunt.worker
    varied = worker.formula.varied
    others = np.repeat(at[None], 2 * len(at), axis=0)  # each value at its other end, then in the middle
    for k in range(len(at)):
        others[2 * k, k] = worker.high[k] if at[k] == worker.low[k] else worker.low[k]
        others[2 * k + 1, k] = (worker.low[k] + worker.high[k]) / 2
    value, *moved = worker.values(np.vstack([at, others])).tolist()
    still = [abs(x - value) <= _LEVEL * max(abs(x), abs(value)) for x in moved]
    steady = {k for k in range(len(at)) if still[2 * k] and still[2 * k + 1]}
    point = {}
    for k, v in enumerate(varied):
        ends = {float(v.low): v.low, float(v.high): v.high, float(v.nominal): v.nominal}
        point[v.key] = v.nominal if k in steady else ends.get(float(at[k]), Fraction(float(at[k])))
    return Extreme(value, point, proved, how, frozenset(varied[k].key for k in steady | hunt.free))
