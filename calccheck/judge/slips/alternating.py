"""Slips of alternating current: peak for rms, the other sign of an angle or a reactance, f for ω, line for phase values."""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterator
from dataclasses import replace
from decimal import Decimal
from fractions import Fraction

from calccheck.arithmetic import Value
from calccheck.formula import Binary, Call, Group, Node, Number, Reference, Unary, references, walk
from calccheck.judge.members import Names
from calccheck.judge.slips.again import POWERS
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.redo import Variant, put
from calccheck.judge.slips.rewriting import Rewriting, dimension_of, everywhere, in_formulas, opened
from calccheck.judge.slips.sources import acting
from calccheck.model import Circuit, Element
from calccheck.units import AMPERE, HERTZ, VOLT, WATT

REACTIVE = ("capacitor", "inductor")
_TURN = 2 * math.pi


# --- peak and rms ---------------------------------------------------------------------------------------------------


def peak_rms(case: Case) -> Iterator[Guess]:
    """The peak value for the rms one or the reverse: √2 in voltages and currents, 2 in powers; of all sources or of one."""
    if not case.alternating or case.which == "arg" or case.level:
        return
    over, under = "a peak value taken for an rms value", "an rms value taken for a peak value"
    parts = acting(case)
    if not parts:
        yield from _scaled(case, over, under)
        return
    moving = [name for name, (_, f) in parts.items() if f != 0]
    single = len(moving) > 1 and case.key is not None and case.key.letter not in POWERS
    for names in (moving, *([[name] for name in moving[:_MOST_SOURCES]] if single else [])):
        of = "" if names == moving else f" of {names[0]}"
        for factor, what in ((math.sqrt(2), over), (math.sqrt(0.5), under)):
            terms = tuple((factor if name in names else 1, s, f) for name, (s, f) in parts.items())
            if names:
                yield Guess(what + of, terms=terms)


_MOST_SOURCES = 6


def _scaled(case: Case, over: str, under: str) -> Iterator[Guess]:
    """Of what is no sum of parts by source: the value by its dimension."""
    factor = {VOLT: math.sqrt(2), AMPERE: math.sqrt(2), WATT: 2.0}.get(case.miss.truth.dimension)
    if factor is not None:
        yield Guess(over, _times(case.truth, factor))
        yield Guess(under, _times(case.truth, 1 / factor))


def _times(value: Value, factor: float) -> Value:
    return complex(value) * factor if isinstance(value, complex) else float(value) * factor


# --- the other sign -------------------------------------------------------------------------------------------------


def conjugate(case: Case) -> Iterator[Guess]:
    """An angle, an imaginary part or a reactive power with the other sign; or that of a part of the circuit."""
    reactive = case.key is not None and case.key.letter == "Q"
    if isinstance(case.truth, complex):
        yield Guess("the angle, or the imaginary part, with the other sign", case.truth.conjugate())
    elif reactive or case.which in ("arg", "im"):
        yield Guess("the angle, or the reactive part, with the other sign", -case.truth)
    circuit = case.circuit
    if circuit is not None and case.alternating:
        for v in case.redo.variants(_turned, circuit):
            yield Guess(v.what, circuit=v.circuit)


def _turned(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    """The reactance of one part, or the angle of one source, with the other sign."""
    for e in circuit.elements:
        if e.kind in REACTIVE and e.value:
            yield Variant(f"the reactance of {e.name} with the other sign", put(circuit, [replace(e, value=-e.value)]))
        elif e.phasor is not None and e.phasor.imag:
            what = "reactance" if e.kind == "impedance" else "angle"
            turned = replace(e, phasor=e.phasor.conjugate(), stated=None)
            yield Variant(f"the {what} of {e.name} with the other sign", put(circuit, [turned]))


# --- frequency and angular frequency --------------------------------------------------------------------------------


def omega_frequency(case: Case) -> Iterator[Guess]:
    """f in place of ω or ω in place of f, so that reactances are off by 2π; in the circuit, a formula or a frequency."""
    if case.circuit is not None and case.alternating:
        for v in case.redo.variants(_by_turns, case.circuit):
            yield Guess(v.what, circuit=v.circuit)
    if case.miss.truth.dimension == HERTZ:
        yield Guess("ω given for f: 2π forgotten", _times(case.truth, _TURN))
        yield Guess("f given for ω: 2π too much", _times(case.truth, 1 / _TURN))
    yield from in_formulas(case, _without_turn)


def _by_turns(circuit: Circuit, _: frozenset[str]) -> Iterator[Variant]:
    parts = [e for e in circuit.elements if e.kind in REACTIVE and e.value]
    turn = Fraction(_TURN)
    for some in (parts, *([[e] for e in parts] if len(parts) > 1 else [])):
        of = "every reactance" if len(some) == len(parts) > 1 else f"the reactance of {some[0].name}" if some else ""
        for factor, what in ((1 / turn, "f taken for ω in"), (turn, "2π counted twice in")):
            if some:
                yield Variant(f"{what} {of}", put(circuit, [_scaled_part(e, factor) for e in some]))


def _scaled_part(e: Element, factor: Fraction) -> Element:
    return replace(e, value=e.value * factor if e.value is not None else None)


def _without_turn(node: Node, names: Names) -> Iterator[Rewriting]:
    """Every π left out together with its 2; or where none stands, 2π brought in or out with a frequency."""
    told = "f taken for ω", "ω taken for f"
    if any(r.word == "π" for r in references(node)):
        half = Number(Decimal("0.5"), node.span)
        yield everywhere(node, lambda n: half if _is_pi(n) else None), told[0], told[1]
    elif isinstance(node, Reference | Number) and dimension_of(node, names) == HERTZ:
        turn = Number(Decimal(_TURN), node.span)
        yield Group(Binary("÷", node, turn, node.span), node.span), *told
        yield Group(Binary("×", node, turn, node.span), node.span), told[1], told[0]


def _is_pi(n: Node) -> bool:
    return isinstance(n, Reference) and n.word == "π"


# --- three phases ---------------------------------------------------------------------------------------------------


def line_phase(case: Case) -> Iterator[Guess]:
    """Line values for phase values or the reverse: √3 in a three-phase circuit, with the 30° between them or without."""
    if not (_three_phases(case.circuit) or _with_root_of_three(case.held.node)):
        return
    if case.miss.truth.dimension not in (VOLT, AMPERE, WATT) or case.which == "arg":
        return
    root = math.sqrt(3)
    for factor, what in (
        (root, "the line value taken for the phase value"),
        (1 / root, "the phase value for the line's"),
    ):
        yield Guess(f"{what}, √3 between them", _times(case.truth, factor))
        if isinstance(case.truth, complex):
            for degrees in (30, -30):
                turned = case.truth * cmath.rect(factor, math.radians(degrees))
                yield Guess(f"{what}, √3 and 30° between them", turned)


def _three_phases(circuit: Circuit | None) -> bool:
    """Whether three like sources of a circuit stand a third of a turn apart, nearly."""
    sources = [e for e in circuit.sources() if e.frequency] if circuit is not None else []
    values = [(e.kind, e.frequency, e.phasor if e.phasor is not None else complex(e.value or 0)) for e in sources]
    for kind, f, first in values:
        turned = [first * cmath.rect(1, sign * _TURN / 3) for sign in (1, -1)]
        if first and all(
            any((kind, f) == (k, g) and abs(v - t) <= _UNLIKE * abs(t) for k, g, v in values) for t in turned
        ):
            return True
    return False


_UNLIKE = 0.1


def _with_root_of_three(node: Node) -> bool:
    for n in walk(node):
        inner = n.operand if isinstance(n, Unary) and n.sign == "√" else None
        if isinstance(n, Call) and n.function == "sqrt":
            inner = n.arguments[0]
        inner = opened(inner) if inner is not None else None
        if isinstance(inner, Number) and inner.digits == 3:
            return True
    return False
