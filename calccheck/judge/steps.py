"""One member of a chain held against the truth of the chain."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from fractions import Fraction
from itertools import takewhile

from calccheck.arithmetic import (
    COHERENT,
    ICE,
    Amount,
    DimensionFault,
    Doubt,
    Real,
    decibels,
    evaluate,
    literal,
    real,
    size,
)
from calccheck.formula import Binary, Node, Number, numbers, references
from calccheck.judge import quantities, say
from calccheck.judge.laws import followed
from calccheck.judge.members import Names, Worked, without_unit
from calccheck.judge.phasors import PrintedPhasor, Sized, is_angle, nearest_turn, phasor_fit
from calccheck.judge.rounding import SLACK, Printed, coarse, deviation, equal, fit, on_scale
from calccheck.judge.scope import Key, Ledger
from calccheck.judge.trace import Meanings, Reach, Traced, reach, trace, worked_pieces
from calccheck.model import Basis, Finding, Relation, Step, Verdict
from calccheck.printing import shown
from calccheck.rules import RULES
from calccheck.units import NONE, WATT, words


@dataclass(slots=True)
class Ground:
    """What the members of one segment are held against, and what was said on the way.

    ``source``: the member that gives the truth; behind ``≈ formula`` the ``truth`` is that formula, ``held`` its member.
    ``carried``: value of the last substitution that reaches the truth.
    """

    truth: Amount
    basis: Basis
    source: Worked
    members: Sequence[Worked]
    names: Names
    ledger: Ledger
    carried: Amount | None = None
    held: Worked | None = None
    cautions: list[str] = field(default_factory=list)
    findings: list[Finding] = field(default_factory=list)

    def trace_truth(self) -> None:
        """A truth worked from printed numbers alone: say which of them stand for nothing."""
        if self.source.sort == "substitution":
            self.say_untraced(self.traced(self.source))

    def traced(self, w: Worked) -> list[Traced]:
        """What the printed numbers of a member stand for."""
        return trace(w.node, self.meanings(w), self.ledger)

    def meanings(self, w: Worked) -> Meanings:
        """What a number of this member may stand for."""
        before = [*takewhile(lambda m: m is not w, self.members)]
        fixed = [numbers(m.node) for m in before if m is self.source or m.sort == "formula"]
        constants = [literal(n) for found in fixed for n in found]
        pieces = [a for m in before for a in worked_pieces(m.node, self.names.amount)]
        repeated = [literal(n) for m in before for n in numbers(m.node)]
        return Meanings([*self.exact_values(), *constants], pieces, self.circuit_values(), repeated)

    def exact_values(self) -> list[Amount]:
        """Values of parts and givens, and of what ``with … as`` puts in their place."""
        found = [d.exact for d in self.ledger.names.values() if d.given]
        for c in self.ledger.circuits:
            for e in c.elements:
                if e.stated is not None:
                    found.append(e.stated)
        key = self.source.key
        return [*found, *(v for _, _, v in key.changes if v is not None)] if key else found

    def circuit_values(self) -> list[Sized]:
        """Voltages, currents and powers of the truth's circuit under its own qualifiers, printed or not."""
        key = self.source.key
        if key is None or key.circuit < 0 or key.letter not in ("V", "I", "P"):
            return []
        return quantities.values_around(key, self.ledger, self.source.member.span)

    def say_untraced(self, traced: Sequence[Traced]) -> None:
        """The caution about numbers that stand for nothing."""
        lost = [t.number for t in traced if not t.found]
        if lost:
            which = " and ".join(dict.fromkeys(_shown(n) for n in lost))
            verb = "stands" if len({_shown(n) for n in lost}) == 1 else "stand"
            self.cautions.append(
                f"untraced: {which} {verb} for no part, given, earlier value or piece of the formula; taken as exact"
            )


def _shown(n: Number) -> str:
    return f"{n.digits} {n.unit.text}".strip()


def judge_member(w: Worked, relation: Relation, ground: Ground) -> Step:
    """One ``=`` or ``≈``."""
    if w.doubt is not None:
        return _step(w, "unchecked", say.reason(w.doubt.reason, w.doubt.suggestion))
    assert w.amount is not None
    w = _temperature(w, ground)
    assert w.amount is not None
    if w.amount.level != ground.truth.level:
        return _decibels(w, relation, ground)
    if w.amount.dimension != ground.truth.dimension or w.amount.point != ground.truth.point:
        return _other_dimension(w, relation, ground)
    if isinstance(w.printed, PrintedPhasor) or (w.printed is not None and isinstance(ground.truth.value, complex)):
        return _phasor(w, w.printed, relation, ground)
    if w.printed is not None:
        return _value(w, w.printed, relation, ground)
    if relation == "≈":
        return _approximate_formula(w, ground)
    if numbers(w.node) or _spreads(w, ground):
        return _substitution(w, ground)
    if equal(w.amount.value, ground.truth.value):
        return _step(w, "agrees")
    return _step(
        w, "differs", f"{w.member.text} comes to {shown(w.amount)}, {_subject(ground)} to {shown(ground.truth)}"
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
        return _step(w, "unchecked", f"{_subject(ground)} is in dB, {w.member.text} is a plain number")
    node = next((m.node for m in ground.members if _is_ratio(m.node)), ground.source.node)
    try:
        level = decibels(node, lambda n: evaluate(n, ground.names.amount))
    except Doubt as d:
        return _step(w, "unchecked", say.reason(d.reason))
    plain, ground.truth = ground.truth, level
    step = judge_member(w, relation, ground)
    ground.truth = plain
    return step


def _is_ratio(node: Node) -> bool:
    return isinstance(node, Binary) and node.operator == "÷" and bool(references(node))


def _step(w: Worked, verdict: Verdict, message: str = "") -> Step:
    return Step(w.member.text, w.member.span, w.relation, verdict, w.amount, message)


def _subject(ground: Ground) -> str:
    return ground.source.member.text


# --- dimensions -----------------------------------------------------------------------------------------------------


def _other_dimension(w: Worked, relation: Relation, ground: Ground) -> Step:
    """A member in another dimension than the truth: numbers without units are read in coherent ones; the rest is a fault."""
    assert w.amount is not None
    bare_member = without_unit(w) and w.amount.dimension == NONE and ground.truth.dimension in _COHERENT
    bare_truth = without_unit(ground.source) and ground.truth.dimension == NONE and w.amount.dimension in _COHERENT
    if bare_member or bare_truth:
        return _bare(w, relation, ground, bare_member)
    if without_unit(w) or without_unit(ground.source):
        return _step(w, "unchecked", "numbers without units among quantities: write the unit behind each number")
    message = f"{_subject(ground)} is {words(ground.truth.dimension)}, {w.member.text} is {words(w.amount.dimension)}"
    ground.findings.append(Finding("dimension", RULES["dimension"].severity, message, w.member.span))
    return _step(w, "differs", message)


_COHERENT = {*COHERENT, WATT}


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
            f"no units in {w.member.text if bare_member else _subject(ground)}: read in coherent units"
        )
        return held
    ground.truth = before
    return _step(w, "unchecked", f"no units: read in coherent units it does not fit ({held.message}); write the units")


def _bare_fits(w: Worked, relation: Relation, ground: Ground) -> Step:
    assert w.amount is not None
    if isinstance(w.printed, Printed) and not isinstance(ground.truth.value, complex):
        return _value(w, w.printed, relation, ground)
    distance = size(w.amount.value - ground.truth.value)
    if distance <= ground.ledger.settings.carry * size(
        ground.truth.value
    ):  # its numbers cannot be traced without units
        ground.carried = w.amount
        return _step(w, "agrees")
    return _step(w, "differs", f"it comes to {shown(w.amount)}, not {shown(ground.truth)}")


# --- formulas and substitutions -------------------------------------------------------------------------------------


def _approximate_formula(w: Worked, ground: Ground) -> Step:
    assert w.amount is not None
    zero = ICE if ground.truth.point else 0
    off = deviation(w.amount.value - zero, ground.truth.value - zero)
    if equal(w.amount.value, ground.truth.value):
        step = _step(w, "agrees")
    elif off is not None and abs(off) <= ground.ledger.settings.approx:
        step = _step(w, "rounded", f"neglects {say.percent(off)} of {_subject(ground)}")
    else:
        gap = "from zero" if off is None else f"by {say.percent(off)}"
        message = f"{w.member.text} is {shown(w.amount)}, off {gap} from {_subject(ground)} = {shown(ground.truth)}: no approximation"
        return _step(w, "differs", message)
    ground.truth, ground.held = w.amount, w  # what follows is held to the formula, not to the truth before it
    return step


def _spreads(w: Worked, ground: Ground) -> dict[str, Real]:
    """How far the names in a member may be off: givens are rounded where the circuit knows better."""
    found: dict[str, Real] = {}
    for r in references(w.node):
        d = ground.ledger.names.get(r.word)
        if d is not None and d.spread and (not d.given or ground.basis == "circuit"):
            found[r.word] = d.spread
    return found


def _substitution(w: Worked, ground: Ground) -> Step:
    """A member with printed values in it: it reaches the truth within the rounding of its numbers."""
    assert w.amount is not None
    traced = ground.traced(w)
    ground.say_untraced(traced)
    truth = ground.truth.value
    try:
        reached = reach(w.node, ground.names.amount, traced, _spreads(w, ground))
    except (Doubt, DimensionFault):
        reached = Reach(w.amount.value, *(real(w.amount.value),) * 2)
    if reached.holds(truth):
        ground.carried = w.amount
        return _step(w, "agrees")
    faulty = next((t.faulty for t in traced if t.faulty is not None), None)
    message = f"{w.member.text} comes to {shown(w.amount)}, {_subject(ground)} to {shown(ground.truth)}"
    if reached.high > reached.low:
        low, high = (shown(Amount(x, w.amount.dimension)) for x in (reached.low, reached.high))
        message += f"; the rounding of its numbers allows {low} to {high}"
    if faulty is not None:
        message += f"; it carries on {shown(faulty.printed.amount, faulty.printed.written_in)}, which differs above"
    return _step(w, "differs", message)


# --- values ---------------------------------------------------------------------------------------------------------


def _phasor(w: Worked, p: Printed | PrintedPhasor, relation: Relation, ground: Ground) -> Step:
    """A printed phasor, each of its two figures by its own digits; a real value for a phasor is no phasor."""
    truth, settings = ground.truth, ground.ledger.settings
    if isinstance(p, Printed):
        name = _subject(ground)
        return _step(
            w, "unchecked", f"{name} is a phasor, {say.near(truth, p)}: print its angle, or claim |{name}| alone"
        )
    how = phasor_fit(
        p, truth.value, settings.carry, quantities.scale(ground.source.key, ground.ledger, truth.dimension)
    )
    if how == "exact place":
        return _step(w, "agrees")
    off, near = deviation(p.amount.value, truth.value) or 0.0, say.near(truth, p)
    carried = ground.carried
    if (
        abs(off) <= settings.carry
        and carried is not None
        and phasor_fit(p, carried.value, settings.carry, 0) == "exact place"
    ):
        return _step(w, "rounded", f"carried rounding: follows from the working before it; exact {near}")
    if how == "cut off":
        return _step(w, "rounded", f"cut off, not rounded: {near}")
    if how == "whole zeros":
        return _step(w, "rounded", f"rounded to its figures before the zeros: {near}")
    if relation == "≈" and p.figures <= 2 and abs(off) <= settings.approx:
        return _step(w, "rounded", f"near {near}")
    message = (
        f"{_subject(ground)} comes to {near}, printed {w.member.text} (off by {say.percent(abs(off))} of its magnitude)"
    )
    return _step(w, "differs", message)


def _value(w: Worked, p: Printed, relation: Relation, ground: Ground) -> Step:
    """A printed value: by its last place, then cut off, then carried rounding."""
    truth, settings = ground.truth, ground.ledger.settings
    t = real(truth.value)
    if is_angle(p) and truth.dimension == p.amount.dimension:
        t = nearest_turn(t, p.value)
        truth = replace(truth, value=t)
    if ground.source.restates and relation != "≈":
        return _restated(w, p, ground)
    zero = ICE if p.amount.point else 0
    p, t = on_scale(p, t)
    how = fit(p, t, settings.carry, _largest(ground) if p.digits == 0 else 0)
    if how == "exact place":
        if coarse(p, t) and not equal(p.value, t):
            ground.cautions.append(
                f"coarse: {w.member.text} says no more than ±{shown(Amount(p.half, truth.dimension), p.written_in, 3)}"
            )
        return _step(w, "agrees")
    off = deviation(p.value, t)
    near = say.near(truth, p)
    law = _carried(p, t, ground, zero)
    if law:
        return _step(
            w,
            "rounded",
            f"carried rounding: follows from {law}; exact {near}" + (f" ({say.percent(off)})" if off else ""),
        )
    if how == "cut off":
        return _step(w, "rounded", f"cut off, not rounded: {near}")
    if how == "whole zeros":
        return _step(w, "rounded", f"rounded to its figures before the zeros: {near}")
    if relation == "≈" and p.figures <= 2 and off is not None and abs(off) <= settings.approx:
        return _step(w, "rounded", f"near {near} ({say.percent(off)})")
    shift = f" ({say.percent(off)})" if off is not None else ""
    return _step(w, "differs", f"{_subject(ground)} comes to {near}, printed {w.member.text}{shift}")


def _largest(ground: Ground) -> Real:
    """What a bare zero is held to: the largest like value of the circuit, or of the formula where things cancel."""
    dimension = ground.truth.dimension
    pieces = worked_pieces(ground.source.node, ground.names.amount)
    largest: Real = max((x for d, x in pieces if d == dimension), default=0)
    if ground.basis == "circuit" and ground.source.key is not None and ground.source.key.circuit >= 0:
        return max(largest, quantities.scale(ground.source.key, ground.ledger, dimension))
    return largest


def _restated(w: Worked, p: Printed, ground: Ground) -> Step:
    """A part's own value, repeated: it is the very value or it is wrong."""
    if equal(p.value, ground.truth.value):
        return _step(w, "agrees")
    return _step(
        w,
        "differs",
        f"the circuit block has {_subject(ground)} = {shown(ground.truth, p.written_in)}, printed {w.member.text}",
    )


def _carried(p: Printed, truth: Real, ground: Ground, zero: Real) -> str:
    """What printed values the value follows from, within the carry that the sheet allows; nothing where it does not.

    ``zero``: where the degrees of a temperature count from.
    """
    if size(p.value - truth) > ground.ledger.settings.carry * size(truth):
        return ""
    if any(m.sort == "substitution" for m in ground.members):
        carried = ground.carried
        return "the working before it" if carried is not None and _follows(p, real(carried.value) - zero) else ""
    key: Key | None = ground.source.key
    if key is None or key.circuit < 0:
        return ""
    if any(
        r.key == key and r.stands and r.printed.value == p.value and r.printed.unit <= p.unit
        for r in ground.ledger.results
    ):
        return "the same value printed above"
    circuit = quantities.circuit_of(key, ground.ledger, ground.source.member.span)
    return next(
        (f"{law} with values printed above" for v, law in followed(key, ground.ledger, circuit) if _follows(p, v)), ""
    )


def _follows(p: Printed, v: Real) -> bool:
    return size(p.value - v) <= p.half + SLACK * size(v)
