"""What tolerances make of an expression: its extremes, the root-sum-square of its deviations, its spread at random values."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import Any

from calccheck.arithmetic import Amount, Doubt, Real, Value, plainest, size
from calccheck.formula import Binary, Call, Node, Reference
from calccheck.judge import quantities
from calccheck.judge.closing import Closing, Exact
from calccheck.judge.scope import Ledger
from calccheck.judge.varied import Values
from calccheck.model import Circuit, Element
from calccheck.printing import shown
from calccheck.source import Span
from calccheck.toleranced import PLAIN, Effect, Extreme, Formula, Point, Tolerancing, worked
from calccheck.units import AMPERE, NONE, VOLT, WATT, Dimension

ERRORS = 3  # standard errors that a sampled value may be off
_NAMED = 8  # values that a sentence names
_SAME = 1e-6  # relative difference of the extreme as found and as solved again


@dataclass(frozen=True, slots=True)
class Found:
    """A value over tolerances, and how it was found in words. ``allowance``: how far a sampled value may be off."""

    amount: Amount
    told: str
    allowance: Real = 0
    where: str = ""
    how: str = ""
    point: Point | None = None


@dataclass(frozen=True, slots=True)
class Spreading:
    """Expressions of one place in the sheet: the circuit above it, and the amounts of its names."""

    nearest: int
    ledger: Ledger
    exact: Exact

    def closing(self) -> Closing:
        """A fresh start."""
        return Closing(self.ledger, self.exact, Values(self.ledger))

    @property
    def tolerances(self) -> Tolerancing:
        """What works formulas over tolerances."""
        if self.ledger.tolerances is None:
            raise Doubt("tolerances are not worked here")
        return self.ledger.tolerances()


class NothingVaries(Doubt):
    """An expression in which nothing has a tolerance."""


def over(ref: Reference, work: Callable[[Node], Amount], s: Spreading) -> Found:
    """``min``, ``max``, ``sigma`` or ``yield`` of what stands behind. ``work``: the nominal amount of an expression."""
    if ref.prefix in ("worst", "rss"):
        raise Doubt(f"{ref.prefix} has two values: write {ref.text} = LOW … HIGH or MIDDLE ± DEVIATION", ref.span)
    if ref.prefix == "yield":
        return _yield(ref, work, s)
    node = inner(ref)
    if ref.prefix == "sigma":
        return _sigma(node, work(node), s)
    return extreme(node, work(node), ref.prefix == "max", s)


def inner(ref: Reference) -> Node:
    """What stands behind a prefix."""
    if ref.bracket:
        return ref.bracket[0][1]
    return replace(ref, prefix="", text=ref.text.removeprefix(ref.prefix).strip())


def extreme(node: Node, nominal: Amount, largest: bool, s: Spreading, scale: Real = 0) -> Found:
    """The least or the largest value of an expression within tolerances, solved again where it lies.

    ``scale``: of what it is worked from, where that may cancel.
    """
    closing = s.closing()
    formula = closing.formula(closing.closed(node, s.nearest))
    _refuse_steady(formula, node.span)
    found = s.tolerances.extreme(formula, largest)
    value = value_at(formula, closing, found.point, s.ledger, node.span)
    like = max(size(value), size(found.value), size(nominal.value), scale, _scale(formula, nominal.dimension, s.ledger))
    if isinstance(value, complex) or size(value - found.value) > _SAME * like:
        raise Doubt("the extreme found and its solution by two routes do not agree", node.span)
    where = place(found, formula)
    told = f"the {'largest' if largest else 'least'} within tolerances, {where}; {found.how}"
    return Found(replace(nominal, value=value), told, 0, where, found.how, found.point)


def _scale(formula: Formula, dimension: Dimension, ledger: Ledger) -> Real:
    """The largest like value of the circuits that are read: where things cancel, rounding is still of the order of what cancels."""
    largest = {VOLT: "volts", AMPERE: "amperes", WATT: "watts"}.get(dimension)
    found = [ledger.solve(r.circuit, r.frequency) for r in formula.readings.values()] if largest else []
    return max((getattr(solution, largest) for solution in found if largest), default=0)


def _refuse_steady(formula: Formula, span: Span) -> None:
    if not formula.varied:
        raise NothingVaries(
            "nothing in it has a tolerance: state those of the parts and assumptions that it rests on", span
        )


def place(found: Extreme, formula: Formula) -> str:
    """The point of an extreme in words: ``at R1 and R3 high, R2 low``."""
    high, low, between = [], [], []
    for v in formula.varied:
        x = found.point[v.key]
        if v.key in found.free:
            continue
        if x == v.high:
            high.append(v.label)
        elif x == v.low:
            low.append(v.label)
        else:
            between.append(f"{v.label} = {shown(Amount(x, v.dimension))}")
    told = [f"{_listed(names)} {end}" for names, end in ((high, "high"), (low, "low")) if names]
    if between:
        told.append(_listed(between))
    return f"at {', '.join(told)}" if told else "whatever the tolerances"


def _listed(names: Sequence[str]) -> str:
    if len(names) > _NAMED:
        return f"{', '.join(names[: _NAMED - 1])} and {len(names) - _NAMED + 1} more"
    return " and ".join([", ".join(names[:-1]), names[-1]] if len(names) > 1 else names)


# --- linearised and at random ---------------------------------------------------------------------------------------


def root_sum_square(node: Node, s: Spreading) -> tuple[float, str]:
    """The root of the sum of the squares of the deviations, each by its slope at the nominal values (JCGM 100:2008, 5.1.2)."""
    closing = s.closing()
    formula = closing.formula(closing.closed(node, s.nearest))
    _refuse_steady(formula, node.span)
    slopes = s.tolerances.slopes(formula)
    up = down = 0.0
    for v in formula.varied:
        effects = [slopes[v.key] * float(end - v.nominal) for end in (v.low, v.high)]
        up, down = up + max(*effects, 0.0) ** 2, down + min(*effects, 0.0) ** 2
    told = (
        f"root-sum-square of {len(formula.varied)} deviations, each by its slope at the nominal values (JCGM 100, 5.1.2): assumes "
        "that they are independent, small, and of like probability; it is no extreme"
    )
    return math.sqrt(max(up, down)), told


def _sigma(node: Node, nominal: Amount, s: Spreading) -> Found:
    closing = s.closing()
    formula = closing.formula(closing.closed(node, s.nearest))
    _refuse_steady(formula, node.span)
    settings = s.ledger.settings
    sample = s.tolerances.sampled(formula, settings.samples, settings.seed, settings.spread)
    return Found(
        Amount(sample.sigma, nominal.dimension), f"standard deviation of {sampling(s)}", ERRORS * sample.sigma_error
    )


def sampling(s: Spreading) -> str:
    """How random values are drawn, in words."""
    settings = s.ledger.settings
    spread = (
        "uniform within the tolerances" if settings.spread == "uniform" else "normal with the tolerances at three sigma"
    )
    return f"{settings.samples} random values, independent, {spread}, seed {settings.seed}, held to {ERRORS} standard errors"


def _yield(ref: Reference, work: Callable[[Node], Amount], s: Spreading) -> Found:
    """The share of random values for which the relations in a bracket hold."""
    if not ref.bracket:
        raise Doubt("yield needs a relation: yield (V_out ≤ 3.4 V)", ref.span)
    closing = s.closing()
    rooms: list[Node] = []
    for (_, left), (relation, right) in zip(ref.bracket, ref.bracket[1:], strict=False):
        low, high = (left, right) if relation in ("<", "≤") else (right, left)
        if relation not in ("<", "≤", ">", "≥"):
            raise Doubt(f"yield counts what lies below or above a limit; {relation} is no such relation", ref.span)
        room = Binary("-", high, low, ref.span)
        work(room)  # says where the two are of unlike dimensions
        rooms.append(closing.closed(room, s.nearest))
    node = rooms[0] if len(rooms) == 1 else Call("min", tuple(rooms), ref.span)
    formula = closing.formula(node)
    _refuse_steady(formula, ref.span)
    settings = s.ledger.settings
    sample = s.tolerances.sampled(formula, settings.samples, settings.seed, settings.spread)
    share = min(max(sample.share, 1 / sample.size), 1 - 1 / sample.size)
    error = math.sqrt(share * (1 - share) / sample.size)
    return Found(Amount(sample.share, NONE), f"share of {sampling(s)}", ERRORS * error)


# --- at one point ---------------------------------------------------------------------------------------------------


def value_at(formula: Formula, closing: Closing, point: Point, ledger: Ledger, span: Span) -> Value:
    """A formula at one point, its circuits solved there by both routes. Raises ``Doubt`` where a part's assumed state fails."""
    leaves: dict[str, Any] = {**formula.constants, **point}
    made: dict[int, Circuit] = {}
    for name, reading in formula.readings.items():
        if id(reading.circuit) not in made:
            made[id(reading.circuit)] = put(reading.circuit, reading.effects, leaves)
        state = quantities.whole(made[id(reading.circuit)], ledger, span, reading.frequency)
        leaves[name] = plainest(reading.read(state))
    for circuit, index in closing.wholes.values():
        reason = ledger.fails(put(circuit, closing.values.effects(circuit, index), leaves))
        if reason:
            raise Doubt(f"within tolerances an assumed state does not hold: {reason}", span)
    try:
        found: Value = worked(formula.node, leaves.__getitem__, lambda x: x, PLAIN)
    except (ZeroDivisionError, ValueError, OverflowError):
        raise Doubt("it has no value at some values within the tolerances", span) from None
    return found


def at(node: Node, found: Found, s: Spreading) -> Value:
    """Another expression at the point of an extreme."""
    assert found.point is not None
    closing = s.closing()
    formula = closing.formula(closing.closed(node, s.nearest))
    return value_at(formula, closing, found.point, s.ledger, node.span)


def put(circuit: Circuit, effects: Sequence[Effect], leaves: dict[str, Any]) -> Circuit:
    """The circuit with its varied values as ``leaves`` has them."""
    if not effects:
        return circuit
    changed: dict[str, Element] = {}
    for effect in effects:
        e = changed.get(effect.part) or next(e for e in circuit.elements if e.name == effect.part)
        changed[effect.part] = _with_value(e, effect, worked(effect.node, leaves.__getitem__, lambda x: x, PLAIN))
    return replace(circuit, elements=tuple(changed.get(e.name, e) for e in circuit.elements))


def _with_value(e: Element, effect: Effect, value: Any) -> Element:
    if effect.field == "phasor":
        return replace(e, phasor=complex(value))
    if effect.field == "value":
        return replace(e, value=Fraction(value))
    assert e.device is not None
    changes: dict[str, Any] = {effect.field: Fraction(value)}
    return replace(e, device=replace(e.device, **changes))


def ends(ledger: Ledger) -> list[Amount]:
    """The least and the largest values of all parts and assumptions with a tolerance."""
    values = Values(ledger)
    try:
        for k, c in enumerate(ledger.circuits):
            values.effects(c, k)
        for d in ledger.names.values():
            values.given(d, Span(0, 0))
    except Doubt:
        return []
    return [Amount(x, v.dimension) for v in values.varied.values() for x in (v.low, v.high)]
