"""What the printed numbers of a substitution stand for, and how far their rounding lets the member reach."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Amount, DimensionFault, Doubt, Lookup, Real, Value, evaluate, literal, real, size
from calccheck.formula import Node, Number, Reference, numbers, references, walk
from calccheck.judge.phasors import parts
from calccheck.judge.rounding import SLACK, Printed, printed
from calccheck.judge.scope import Ledger, Result
from calccheck.units import NONE


@dataclass(frozen=True, slots=True)
class Traced:
    """A printed number: how far the exact value that it stands for may be from it (0 where it is exact).

    ``found``: whether it stands for anything. ``faulty``: the earlier result that it repeats, where that one does not stand.
    """

    number: Number
    room: Real
    found: bool
    faulty: Result | None = None


def trace(node: Node, pieces: Sequence[Amount], exact: Sequence[Amount], ledger: Ledger) -> list[Traced]:
    """What each printed number of a member stands for.

    ``exact``: values of parts and givens, of which a number must be the very value. ``pieces``: worked values of the formula
    before the member and of the circuit, of which it may be a right rounding.
    """
    return [_one(n, pieces, exact, ledger) for n in numbers(node)]


def _one(n: Number, pieces: Sequence[Amount], exact: Sequence[Amount], ledger: Ledger) -> Traced:
    p = printed(n)
    assert p is not None
    same = [a for a in exact if a.dimension == p.amount.dimension and size(a.value) == size(p.value)]
    if same:
        return Traced(n, 0, True)
    earlier = _earlier(p, ledger)
    if earlier is not None and earlier.stands:
        return Traced(n, max(p.half, size(size(p.value) - size(earlier.truth.value))), True)
    if any(_rounds(p, a) for a in pieces):
        return Traced(n, p.half, True)
    if earlier is not None:
        return Traced(n, 0, True, faulty=earlier)
    counts = p.amount.dimension == NONE and not n.unit.text
    return Traced(n, 0, counts)


def _earlier(p: Printed, ledger: Ledger) -> Result | None:
    """The last earlier result printed with this value, one that stands before one that does not."""
    same = [
        r
        for r in ledger.results
        if r.printed.amount.dimension == p.amount.dimension and size(r.printed.value) == size(p.value)
    ]
    return next((r for r in reversed(same) if r.stands), same[-1] if same else None)


def _rounds(p: Printed, a: Amount) -> bool:
    if a.dimension != p.amount.dimension or p.digits == 0:
        return False
    return size(size(a.value) - size(p.value)) <= p.half + SLACK * size(a.value)


def worked_pieces(node: Node, lookup: Lookup) -> list[Amount]:
    """The amounts of all pieces of an expression that can be worked out."""
    found = []
    for piece in walk(node):
        try:
            found += parts(evaluate(piece, lookup))
        except (Doubt, DimensionFault):
            continue
    return found


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

    Numbers printed alike move together. ``spreads``: room of names by word. The direction of each is found by moving it
    alone; then all are moved at once, so that products of small moves are not lost.
    """
    rooms: dict[object, Real] = {(t.number.digits, t.number.unit.text): t.room for t in traced if t.room}
    rooms |= {r.word: spreads[r.word] for r in references(node) if spreads.get(r.word)}
    middle = evaluate(node, lookup).value
    if isinstance(middle, complex):
        shifts = [_moved(node, lookup, {key: sign * room}) for key, room in rooms.items() for sign in (1, -1)]
        pairs = zip(shifts[::2], shifts[1::2], strict=True)
        return Reach(middle, radius=sum(max(size(a - middle), size(b - middle)) for a, b in pairs) * (1 + SLACK))
    if not rooms:
        return Reach(middle, middle, middle)
    up: dict[object, Real] = {}
    for key, room in rooms.items():
        up[key] = room if real(_moved(node, lookup, {key: room})) >= middle else -room
    down = {key: -shift for key, shift in up.items()}
    low, high = real(_moved(node, lookup, down)), real(_moved(node, lookup, up))
    return Reach(middle, min(low, middle), max(high, middle))


def _moved(node: Node, lookup: Lookup, shifts: dict[object, Real]) -> Value:
    def number(n: Number) -> Amount:
        a = literal(n)
        return Amount(a.value + shifts.get((n.digits, n.unit.text), Fraction(0)), a.dimension, a.point)

    def name(r: Reference) -> Amount:
        a = lookup(r)
        return Amount(a.value + shifts.get(r.word, Fraction(0)), a.dimension, a.point)

    try:
        return evaluate(node, name, number).value
    except Doubt:  # moved onto a division by zero: the unmoved value decides
        return evaluate(node, lookup).value
