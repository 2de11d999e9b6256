"""A printed value held against the truth: by its last place, then as carried rounding, then cut off."""

from __future__ import annotations

from dataclasses import replace

from calccheck.arithmetic import ICE, Amount, DimensionFault, Doubt, Real, evaluate, real, size
from calccheck.formula import Reference
from calccheck.judge import quantities, say
from calccheck.judge.ground import Ground, decided, subject
from calccheck.judge.laws import followed
from calccheck.judge.members import Worked
from calccheck.judge.phasors import PrintedPhasor, is_angle, nearest_turn, phasor_fit
from calccheck.judge.rounding import Printed, coarse, deviation, equal, fit, on_scale, within
from calccheck.judge.scope import Key, Meaning
from calccheck.judge.trace import sizes
from calccheck.model import Relation, Step
from calccheck.printing import shown


def judge_phasor(w: Worked, p: Printed | PrintedPhasor, relation: Relation, ground: Ground) -> Step:
    """A printed phasor, each of its two figures by its own digits; a real value for a phasor is no phasor."""
    truth, settings = ground.truth, ground.ledger.settings
    if isinstance(p, Printed):
        name = subject(ground)
        return decided(
            w, "unchecked", f"{name} is a phasor, {say.near(truth, p)}: print its angle, or claim |{name}| alone"
        )
    how = phasor_fit(
        p, truth.value, settings.carry, quantities.scale(ground.source.key, ground.ledger, truth.dimension)
    )
    if how == "exact place":
        return decided(w, "agrees")
    off, near = deviation(p.amount.value, truth.value) or 0.0, say.near(truth, p)
    carried = ground.carried
    if (
        abs(off) <= settings.carry
        and carried is not None
        and phasor_fit(p, carried.value, settings.carry, 0) == "exact place"
    ):
        return decided(w, "rounded", f"carried rounding: follows from the working before it; exact {near}")
    if how == "cut off":
        return decided(w, "rounded", f"cut off, not rounded: {near}")
    if how == "whole zeros":
        return decided(w, "rounded", f"rounded to its figures before the zeros: {near}")
    if relation == "≈" and p.figures <= 2 and abs(off) <= settings.approx:
        return decided(w, "rounded", f"near {near}")
    message = (
        f"{subject(ground)} comes to {near}, printed {w.member.text} (off by {say.percent(abs(off))} of its magnitude)"
    )
    return decided(w, "differs", message)


def judge_value(w: Worked, p: Printed, relation: Relation, ground: Ground) -> Step:
    """A printed value: by its last place, then cut off, then carried rounding."""
    truth, settings = ground.truth, ground.ledger.settings
    t = real(truth.value)
    angle = is_angle(p) and truth.dimension == p.amount.dimension
    if angle:
        t = nearest_turn(t, p.value)
        truth = replace(truth, value=t)
    if ground.source.restates and relation != "≈":
        return _restated(w, p, ground)
    zero = ICE if p.amount.point else 0
    p, t = on_scale(p, t)
    how = fit(p, t, settings.carry, None if angle else largest(ground) if p.digits == 0 else 0)
    if how == "exact place":
        if coarse(p, t) and not equal(p.value, t):
            ground.cautions.append(
                f"coarse: {w.member.text} says no more than ±{shown(Amount(p.half, truth.dimension), p.written_in, 3)}"
            )
        return decided(w, "agrees")
    off = deviation(p.value, t)
    near = say.near(truth, p)
    allowance = ground.names.allowance(ground.source)
    if allowance and size(p.value - t) <= (p.half if p.digits else 0) + allowance:
        return decided(w, "agrees")
    if p.figures >= 2 and 0 < ground.outwards * (p.value - t) < p.unit:
        return decided(w, "rounded", f"rounded outwards (as JCGM 100, 7.2.6, allows): {near}")
    law = _carried(p, t, ground, zero)
    if law:
        return decided(
            w,
            "rounded",
            f"carried rounding: follows from {law}; exact {near}" + (f" ({say.percent(off)})" if off else ""),
        )
    if how == "cut off":
        return decided(w, "rounded", f"cut off, not rounded: {near}")
    if how == "whole zeros":
        return decided(w, "rounded", f"rounded to its figures before the zeros: {near}")
    if relation == "≈" and p.figures <= 2 and off is not None and abs(off) <= settings.approx:
        return decided(w, "rounded", f"near {near} ({say.percent(off)})")
    shift = f" ({say.percent(off)})" if off is not None else ""
    return decided(w, "differs", f"{subject(ground)} comes to {near}, printed {w.member.text}{shift}")


def largest(ground: Ground) -> Real:
    """What a bare zero is held to: the largest like value of the circuit, or of the formula where things cancel."""
    dimension = ground.truth.dimension
    found: Real = max((x for d, x in sizes(ground.source.pieces) if d == dimension), default=0)
    if ground.basis == "circuit" and ground.source.key is not None and ground.source.key.circuit >= 0:
        return max(found, quantities.scale(ground.source.key, ground.ledger, dimension))
    return found


def _restated(w: Worked, p: Printed, ground: Ground) -> Step:
    """A part's own value, repeated: it is the very value or it is wrong."""
    if equal(p.value, ground.truth.value):
        return decided(w, "agrees")
    return decided(
        w,
        "differs",
        f"the circuit block has {subject(ground)} = {shown(ground.truth, p.written_in)}, printed {w.member.text}",
    )


def _carried(p: Printed, truth: Real, ground: Ground, zero: Real) -> str:
    """What printed values the value follows from, within the carry that the sheet allows; nothing where it does not.

    ``zero``: where the degrees of a temperature count from.
    """
    if size(p.value - truth) > ground.ledger.settings.carry * size(truth):
        return ""
    if any(m.sort == "substitution" for m in ground.members):
        carried = ground.carried
        return "the working before it" if carried is not None and within(p, real(carried.value) - zero) else ""
    if any(within(p, v - zero) for m in ground.members if (v := _from_printed(m, ground)) is not None):
        return "the formula with values printed above"
    key: Key | None = ground.source.key
    if key is None or key.circuit < 0:
        return ""
    same = ground.ledger.of_quantity.get(key, {}).get(p.value)
    if same is not None and same.printed.unit <= p.unit:
        return "the same value printed above"
    circuit = quantities.circuit_of(key, ground.ledger, ground.source.member.span)
    return next(
        (f"{law} with values printed above" for v, law in followed(key, ground.ledger, circuit) if within(p, v)), ""
    )


def _from_printed(m: Worked, ground: Ground) -> Real | None:
    """What a formula comes to with the values that are printed above for its names and quantities; nothing where none is."""
    found: list[Amount] = []

    def lookup(ref: Reference) -> Amount:
        a, meaning = ground.names.amount(ref), ground.names.meaning(ref)
        shown = _last_printed(meaning, ground)
        if shown is None or shown.amount.dimension != a.dimension or shown.amount.point != a.point:
            return a
        found.append(shown.amount)
        return replace(a, value=shown.amount.value)

    if m.sort != "formula" or isinstance(m.node, Reference):
        return None
    try:
        value = evaluate(m.node, lookup).value
    except (Doubt, DimensionFault):
        return None
    return None if isinstance(value, complex) or not found else value


def _last_printed(meaning: Meaning | None, ground: Ground) -> Printed | None:
    if meaning is None:
        return None
    if meaning.defined is not None:
        shown = meaning.defined.printed
        return shown if isinstance(shown, Printed) and not meaning.defined.given else None
    values = ground.ledger.of_quantity.get(meaning.key) if meaning.key is not None else None
    return values[next(reversed(values))].printed if values else None
