"""One member of a chain held against the truth of the chain."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction

from calccheck.arithmetic import (
    COHERENT,
    ICE,
    Amount,
    DimensionFault,
    Doubt,
    Real,
    decibels,
    evaluate,
    real,
    size,
)
from calccheck.formula import Binary, Node, Number, Reference, references
from calccheck.judge import say
from calccheck.judge.aligned import number_by_number
from calccheck.judge.ground import Ground, decided, subject
from calccheck.judge.members import Worked, without_unit
from calccheck.judge.phasors import PrintedPhasor
from calccheck.judge.rounding import Printed, deviation, equal, printed
from calccheck.judge.trace import Reach, Traced, reach
from calccheck.judge.values import judge_phasor, judge_value, largest
from calccheck.model import Finding, Relation, Step
from calccheck.printing import shown
from calccheck.rules import RULES
from calccheck.units import NONE, WATT, words

NOISE = 1e-12  # of the largest like value of a circuit: what its solution in floating point leaves uncertain


def judge_member(w: Worked, relation: Relation, ground: Ground) -> Step:
    """One ``=`` or ``≈``."""
    step = _judged(w, relation, ground)
    if step.verdict != "differs" or ground.basis != "circuit" or isinstance(ground.truth.value, Fraction):
        return step
    a = step.amount
    if a is None or a.dimension != ground.truth.dimension or a.level or a.point:
        return step
    if size(a.value - ground.truth.value) > NOISE * largest(ground):
        return step
    message = (
        f"{subject(ground)} is too near to zero beside the other values of its circuit to be certain in its digits"
    )
    return replace(step, verdict="unchecked", message=message)


def _judged(w: Worked, relation: Relation, ground: Ground) -> Step:
    if w.doubt is not None:
        return decided(w, "unchecked", say.reason(w.doubt.reason, w.doubt.suggestion))
    assert w.amount is not None
    w = _temperature(w, ground)
    assert w.amount is not None
    if w.amount.level != ground.truth.level:
        return _decibels(w, relation, ground)
    if w.amount.dimension != ground.truth.dimension or w.amount.point != ground.truth.point:
        return _other_dimension(w, relation, ground)
    if isinstance(w.printed, PrintedPhasor) or (w.printed is not None and isinstance(ground.truth.value, complex)):
        return judge_phasor(w, w.printed, relation, ground)
    if w.printed is not None:
        return judge_value(w, w.printed, relation, ground)
    if relation == "≈":
        return _approximate_formula(w, ground)
    decimals = any(n.digits.as_tuple().exponent != 0 for n in w.numbers)
    if w.sort == "substitution" and decimals and without_unit(w) and _has_units(ground):
        return _bare(w, relation, ground, bare_member=True)
    if w.numbers or _spreads(w, ground):
        return _substitution(w, ground)
    if equal(w.amount.value, ground.truth.value):
        return decided(w, "agrees")
    return decided(
        w, "differs", f"{w.member.text} comes to {shown(w.amount)}, {subject(ground)} to {shown(ground.truth)}"
    )


def _temperature(w: Worked, ground: Ground) -> Worked:
    """``18 °C`` printed for a difference of temperatures is 18 K; ``328 K`` printed for a temperature counts from 0 K."""
    p = w.printed
    if not isinstance(p, Printed) or ground.truth.dimension != p.amount.dimension:
        return w
    if p.amount.point == ground.truth.point:
        return w
    if ground.truth.point:
        return replace(w, amount=replace(p.amount, point=True))
    kelvins = Amount(Fraction(p.digits), p.amount.dimension)
    return replace(w, amount=kelvins, printed=replace(p, amount=kelvins))


def _decibels(w: Worked, relation: Relation, ground: Ground) -> Step:
    """``V_out / V_in = 0.333 = −9.54 dB``: the truth taken in decibels where it is a ratio that has them."""
    assert w.amount is not None
    if not w.amount.level:
        return decided(w, "unchecked", f"{subject(ground)} is in dB, {w.member.text} is a plain number")
    node = next((m.node for m in ground.members if is_ratio(m.node)), ground.source.node)
    try:
        level = decibels(node, lambda n: evaluate(n, ground.names.amount))
    except Doubt as d:
        return decided(w, "unchecked", say.reason(d.reason))
    plain, ground.truth = ground.truth, level
    step = judge_member(w, relation, ground)
    ground.truth = plain
    return step


def is_ratio(node: Node) -> bool:
    """Whether an expression is a ratio in which a name stands."""
    return isinstance(node, Binary) and node.operator == "÷" and bool(references(node))


# --- dimensions -----------------------------------------------------------------------------------------------------


def _other_dimension(w: Worked, relation: Relation, ground: Ground) -> Step:
    """A member in another dimension than the truth: numbers without units are read in coherent ones; the rest is a fault."""
    assert w.amount is not None
    bare_member = without_unit(w) and w.amount.dimension == NONE and ground.truth.dimension in _COHERENT
    bare_truth = without_unit(ground.source) and ground.truth.dimension == NONE and w.amount.dimension in _COHERENT
    if bare_member or bare_truth:
        return _bare(w, relation, ground, bare_member)
    if without_unit(w) or without_unit(ground.source):
        return decided(w, "unchecked", "numbers without units among quantities: write the unit behind each number")
    message = f"{subject(ground)} is {words(ground.truth.dimension)}, {w.member.text} is {words(w.amount.dimension)}"
    ground.findings.append(Finding("dimension", RULES["dimension"].severity, message, w.member.span))
    return decided(w, "differs", message)


_COHERENT = {*COHERENT, WATT}


def _has_units(ground: Ground) -> bool:
    """Whether the formula that gives the truth has names with units, so that decimals put for them lack theirs."""
    named = [a for n, a in ground.source.pieces if isinstance(n, Reference) and n is not ground.source.node]
    return any(a.dimension != NONE for a in named)


def _bare(w: Worked, relation: Relation, ground: Ground, bare_member: bool) -> Step:
    """Numbers without units read in volts, amperes, ohms, farads, henries, seconds: right, or unchecked, never wrong."""
    assert w.amount is not None
    dimension = ground.truth.dimension if bare_member else w.amount.dimension
    dressed = replace(w, amount=Amount(w.amount.value, dimension))
    if isinstance(w.printed, Printed):
        dressed = replace(dressed, printed=replace(w.printed, amount=Amount(w.printed.value, dimension)))
    before = ground.truth
    ground.truth = Amount(ground.truth.value, dimension)
    held = _bare_fits(dressed, relation, ground)
    if held.verdict in ("agrees", "rounded"):
        ground.cautions.append(
            f"no units in {w.member.text if bare_member else subject(ground)}: read in coherent units"
        )
        return held
    ground.truth = before
    return decided(
        w, "unchecked", f"no units: read in coherent units it does not fit ({held.message}); write the units"
    )


def _bare_fits(w: Worked, relation: Relation, ground: Ground) -> Step:
    assert w.amount is not None
    if isinstance(w.printed, Printed) and not isinstance(ground.truth.value, complex):
        return judge_value(w, w.printed, relation, ground)
    traced = [Traced(n, _bare_room(n), True, several=True) for n in w.numbers]
    if _reached(w, traced, {}, ground).holds(ground.truth.value):
        ground.carried = w.amount
        return decided(w, "agrees")
    return decided(w, "differs", f"it comes to {shown(w.amount)}, not {shown(ground.truth)}")


def _bare_room(n: Number) -> Real:
    """How far a number without a unit may be from what it stands for, which cannot be traced: a short whole one counts."""
    p = printed(n)
    return 0 if p is None or (n.digits.as_tuple().exponent == 0 and p.figures < 3) else p.half


# --- formulas and substitutions -------------------------------------------------------------------------------------


def _approximate_formula(w: Worked, ground: Ground) -> Step:
    assert w.amount is not None
    zero = ICE if ground.truth.point else 0
    off = deviation(w.amount.value - zero, ground.truth.value - zero)
    if equal(w.amount.value, ground.truth.value):
        step = decided(w, "agrees")
    elif off is not None and abs(off) <= ground.ledger.settings.approx:
        step = decided(w, "rounded", f"neglects {say.percent(off)} of {subject(ground)}")
    else:
        gap = "from zero" if off is None else f"by {say.percent(off)}"
        message = f"{w.member.text} is {shown(w.amount)}, off {gap} from {subject(ground)} = {shown(ground.truth)}: no approximation"
        return decided(w, "differs", message)
    ground.truth, ground.held = w.amount, w  # what follows is held to the formula, not to the truth before it
    return step


def _spreads(w: Worked, ground: Ground) -> dict[str, Real]:
    """How far the names in a member may be off: givens are rounded where the circuit knows better."""
    found: dict[str, Real] = {}
    for r in w.references:
        d = ground.ledger.names.get(r.word)
        if d is not None and d.spread and (not d.given or ground.basis == "circuit"):
            found[r.word] = d.spread
    return found


def _reached(w: Worked, traced: Sequence[Traced], spreads: dict[str, Real], ground: Ground) -> Reach:
    assert w.amount is not None
    try:
        return reach(w.node, ground.names.amount, traced, spreads)
    except (Doubt, DimensionFault):
        return Reach(w.amount.value, *(real(w.amount.value),) * 2)


def _substitution(w: Worked, ground: Ground) -> Step:
    """A member with printed values in it: it reaches the truth within the rounding of its numbers."""
    assert w.amount is not None
    if not _spreads(w, ground) and number_by_number(w, ground):
        ground.carried = w.amount
        return decided(w, "agrees")
    traced = ground.traced(w)
    ground.say_untraced(traced)
    truth = ground.truth.value
    reached = _reached(w, traced, _spreads(w, ground), ground)
    if reached.holds(truth):
        ground.carried = w.amount
        return decided(w, "agrees")
    faulty = next((t.faulty for t in traced if t.faulty is not None), None)
    message = f"{w.member.text} comes to {shown(w.amount)}, {subject(ground)} to {shown(ground.truth)}"
    if reached.high > reached.low:
        low, high = (shown(Amount(x, w.amount.dimension)) for x in (reached.low, reached.high))
        message += f"; the rounding of its numbers allows {low} to {high}"
    if faulty is not None:
        message += f"; it carries on {shown(faulty.printed.amount, faulty.printed.written_in)}, which differs above"
    return decided(w, "differs", message)
