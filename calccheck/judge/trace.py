"""What the printed numbers of a substitution stand for, and how far their rounding lets the member reach."""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Sequence
from dataclasses import dataclass

from calccheck.arithmetic import Amount, Doubt, Lookup, Real, Value, evaluate, real, size
from calccheck.formula import Binary, Node, Number, Reference, Unary, references, walk
from calccheck.judge.phasors import Sized, is_angle, sized
from calccheck.judge.regrouped import regrouped
from calccheck.judge.rounding import SLACK, Printed, bare_zero, printed
from calccheck.judge.scope import Ledger, Result, magnitude
from calccheck.units import NONE


@dataclass(frozen=True, slots=True)
class Traced:
    """A printed number: how far the exact value that it stands for may be from it (0 where it is exact).

    ``found``: whether it stands for anything. ``several``: whether it may stand for more than one thing, so that the same
    digits elsewhere in the member need not mean the same. ``faulty``: the earlier result that it repeats, where that one
    does not stand.
    """

    number: Number
    room: Real
    found: bool
    several: bool = False
    faulty: Result | None = None

    @property
    def key(self) -> object:
        """What moves together with this number."""
        return self.number.span if self.several else (self.number.digits, self.number.unit.text)


@dataclass(frozen=True, slots=True)
class Meanings:
    """What the numbers of a member may stand for.

    ``exact``: values beside those of parts and givens of which a number must be the very value, as constants of the formula.
    ``pieces``: worked pieces of the members before it, of which it may be a right rounding, as of ``around``, the circuit's
    own values. ``repeated``: the printed numbers of the members before it.
    """

    exact: Sequence[Amount]
    pieces: Sequence[Sized]
    around: Sequence[Sized]
    repeated: Sequence[Amount]


def trace(nodes: Sequence[Node], meanings: Meanings, ledger: Ledger) -> list[Traced]:
    """What each printed number of a member stands for. ``nodes``: all of the member's."""
    counts = _exponents(nodes)
    found = [n for n in nodes if isinstance(n, Number)]
    return [Traced(n, 0, True) if n in counts else _one(n, meanings, ledger) for n in found]


def _exponents(nodes: Sequence[Node]) -> list[Node]:
    """The numbers that stand as exponents: they count and round nothing."""
    raised = [b.right for b in nodes if isinstance(b, Binary) and b.operator == "^"]
    return [r.operand if isinstance(r, Unary) else r for r in raised]


def _one(n: Number, meanings: Meanings, ledger: Ledger) -> Traced:
    p = printed(n)
    assert p is not None
    exactly = magnitude(p.amount) in ledger.exact or any(_same(p, a) for a in meanings.exact)
    if not exactly and _counts(n):
        return Traced(n, 0, True)
    x = float(size(p.value))
    if exactly:
        return Traced(n, 0, True)
    rounds = _rounded_by(p, meanings.pieces)
    if rounds and all(abs(a - x) <= _ALIKE * x for a in rounds):
        return Traced(n, 0, True)
    rounds += _rounded_by(p, meanings.around) + _rounded_by(p, _near(p, ledger))
    earlier = _earlier(p, ledger)
    if earlier is not None and earlier.stands:
        truth = float(size(earlier.truth.value))
        return Traced(n, max(p.half, size(size(p.value) - size(earlier.truth.value))), True, _several([*rounds, truth]))
    if rounds:
        return Traced(n, p.half, True, _several(rounds))
    if earlier is not None:
        return Traced(n, 0, True, faulty=earlier)
    plain = p.amount.dimension == NONE and not n.unit.text
    real_value = is_angle(p) and p.digits == 0  # which has no angle that could be traced
    found = plain or real_value or any(_same(p, a) for a in meanings.repeated)
    worked = not found and bool(n.unit.text) and p.figures >= 3  # a result whose working the sheet leaves out
    return Traced(n, p.half if worked else 0, found)


_ALIKE = 1e-12


def _several(values: Sequence[float]) -> bool:
    """Whether these are more than one value."""
    return max(values) - min(values) > _ALIKE * max(values)


def _rounded_by(p: Printed, found: Sequence[Sized]) -> list[float]:
    """The magnitudes of which a printed one is a right rounding; a zero without places is none."""
    if bare_zero(p) and not is_angle(p):
        return []
    x, room = float(size(p.value)), float(p.half)
    return [a for d, a in found if abs(a - x) <= room + 1e-9 * a and d == p.amount.dimension]


def _counts(n: Number) -> bool:
    """Whether a number is a count, as the 2 of ``2 × 3.4 V``: a whole one of one figure, without a unit."""
    return not n.unit.text and n.digits.as_tuple().exponent == 0 and abs(n.digits) < 10


def _same(p: Printed, a: Amount) -> bool:
    return a.dimension == p.amount.dimension and size(a.value) == size(p.value)


def _near(p: Printed, ledger: Ledger) -> list[Sized]:
    """The exact values of earlier results next to a number, which may carry them on with fewer figures."""
    truths = ledger.truths.get(p.amount.dimension, []) if p.figures > 1 else []
    low, high = (float(size(p.value)) * (1 + sign * 1e-8) + sign * float(p.half) for sign in (-1, 1))
    return [(p.amount.dimension, x) for x in truths[bisect_left(truths, low) : bisect_right(truths, high)]]


def _earlier(p: Printed, ledger: Ledger) -> Result | None:
    """The last earlier result printed with this value, one that stands before one that does not."""
    value = magnitude(p.amount)
    return ledger.standing.get(value) or ledger.failing.get(value)


def sizes(pieces: Sequence[tuple[Node, Amount]]) -> list[Sized]:
    """The magnitudes of the worked pieces of an expression; a printed real number is none."""
    own = [(n, a) for n, a in pieces if not isinstance(n, Number) and printed(n) is None]
    return [s for _, a in own for s in sized(a.value, a.dimension)] + regrouped(pieces)


@dataclass(frozen=True, slots=True)
class Reach:
    """What values a member may stand for: real ones from ``low`` to ``high``, complex ones within ``radius`` of ``middle``."""

    middle: Value
    low: Real = 0
    high: Real = 0
    radius: Real = 0

    def holds(self, truth: Value) -> bool:
        """Whether the truth is among them, to 1e-9."""
        slack = SLACK * size(truth)
        if isinstance(truth, complex) or isinstance(self.middle, complex):
            return bool(size(self.middle - truth) <= self.radius + slack)
        return self.low - slack <= truth <= self.high + slack


def reach(node: Node, lookup: Lookup, traced: Sequence[Traced], spreads: dict[str, Real]) -> Reach:
    """The values that a member may stand for, each rounded number moved within its room.

    Numbers printed alike move together, unless they may stand for several things. ``spreads``: room of names by word. The direction of each is found by moving it
    alone; then all are moved at once, so that products of small moves are not lost.
    """
    rooms: dict[object, Real] = {t.key: t.room for t in traced if t.room}
    if spreads:
        rooms |= {r.word: spreads[r.word] for r in references(node) if spreads.get(r.word)}
    middle = evaluate(node, lookup).value
    if isinstance(middle, complex) or _may_turn(node):
        middle = complex(middle)
        shifts = [_moved(node, lookup, {key: sign * room}) for key, room in rooms.items() for sign in (1, -1)]
        pairs = zip(shifts[::2], shifts[1::2], strict=True)
        return Reach(middle, radius=sum(max(size(a - middle), size(b - middle)) for a, b in pairs) * (1 + SLACK))
    if not rooms:
        return Reach(middle, middle, middle)
    up: dict[object, Real] = {}
    still = float(middle)
    for key, room in rooms.items():
        up[key] = room if real(_moved(node, lookup, {key: room})) >= still else -room
    down = {key: -shift for key, shift in up.items()}
    low, high = real(_moved(node, lookup, down)), real(_moved(node, lookup, up))
    return Reach(middle, min(low, middle), max(high, middle))


def _may_turn(node: Node) -> bool:
    """Whether printed phasors stand in a member, which may be real by rounding alone: ``10.0 A ∠ 0.0°``."""
    return any(
        n.operator == "∠" if isinstance(n, Binary) else isinstance(n, Reference) and n.word == "j" for n in walk(node)
    )


def _moved(node: Node, lookup: Lookup, shifts: dict[object, Real]) -> Value:
    """The member with some of its numbers moved, in floating point: their rooms are far larger than its error."""

    def number(n: Number) -> Amount:
        a = n.amount
        shift = shifts.get(n.span) or shifts.get((n.digits, n.unit.text), 0)
        return Amount(float(real(a.value)) + float(shift), a.dimension, a.point, level=a.level)

    def name(r: Reference) -> Amount:
        a = lookup(r)
        value = a.value if isinstance(a.value, complex) else float(a.value)
        return Amount(value + float(shifts.get(r.word, 0)), a.dimension, a.point, level=a.level)

    try:
        return evaluate(node, name, number).value
    except Doubt:  # moved onto a division by zero: the unmoved value decides
        return evaluate(node, lookup).value
