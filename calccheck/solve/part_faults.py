"""What keeps a part by itself from being solved: no value, a value out of all bounds, nothing to steer it, no frequency."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from fractions import Fraction

from calccheck.arithmetic import Value
from calccheck.model import UNSTATED, Circuit, Control, Device, Element, Finding
from calccheck.rules import RULES
from calccheck.solve.branches import names_of
from calccheck.source import Span

_WIDEST = 100  # a value lies within 2 to the power of ±this, about 1e±30 in SI, far outside any of the trade
_BOUND = 2.0**_WIDEST
_TWO_WAY = ("resistor", "voltage source", "current source", "capacitor", "inductor")
_TERMINALS = {"transistor": {"base", "collector", "emitter"}, "op-amp": {"plus", "minus", "out"}}


def fault(message: str, span: Span, suggestion: str = "", kind: str = "structure") -> Finding:
    """A finding of this stage."""
    return Finding(kind, RULES[kind].severity, message, span, suggestion)


def hertz(frequency: Fraction) -> str:
    """A frequency in words."""
    return "DC" if not frequency else "AC" if frequency == UNSTATED else f"{float(frequency):.10g} Hz"


def part_faults(circuit: Circuit, frequency: Fraction) -> tuple[Finding, ...]:
    """What is wrong with the parts one by one, at a frequency in hertz (0: DC)."""
    found = [text for e in circuit.elements for text in _texts(e, circuit)]
    if frequency != UNSTATED and not _in_bounds(frequency):
        found.append(fault("The frequency lies outside 1e−30 to 1e30 Hz. Check prefix and exponent.", circuit.span))
    elif frequency or any(e.phasor is not None for e in circuit.elements):
        others = sorted({e.frequency for e in circuit.sources() if e.frequency})
        found += [text for e in circuit.elements for text in _at(e, frequency, others)]
    return tuple(found)


def _texts(e: Element, circuit: Circuit) -> list[Finding]:
    if e.kind in _TWO_WAY and e.phasor is None and e.value is not None and _in_bounds(e.value):
        return []  # most parts, without further ado
    if e.kind in ("short", "open"):
        return []
    for what, x in _values(e):
        if x is None:
            return [fault(f"{e.name} has no number for {what}, which a solution needs.", e.span)]
        if not _in_bounds(x):
            text = f"{e.name} has {what} outside 1e−30 to 1e30 in SI units. Check prefix and exponent."
            return [fault(text, e.span)]
    if e.kind.startswith("controlled"):
        return _control_faults(e, circuit)
    return _model_faults(e) if e.kind in _MODELS else []


def _values(e: Element) -> list[tuple[str, Value | None]]:
    """The numbers that the part needs, with their names. At DC a capacitor is a gap and an inductor a link without any."""
    if e.kind in _MODELS:
        return _MODELS[e.kind](e.device or Device())
    if e.kind in ("capacitor", "inductor") and e.value is None:
        return []
    return [("a value", e.value if e.phasor is None else e.phasor)]


def _of_transistor(d: Device) -> list[tuple[str, Value | None]]:
    return [("V_BE", d.v_be), ("beta", d.beta), *([("V_CE", d.v_ce)] if d.state == "saturated" else [])]


_MODELS: dict[str, Callable[[Device], list[tuple[str, Value | None]]]] = {
    "transistor": _of_transistor,
    "diode": lambda d: [("its drop", d.drop)],
    "transformer": lambda d: [("its ratio", d.ratio or None)],
    "op-amp": lambda d: [],
}


def _in_bounds(x: Value) -> bool:
    if isinstance(x, Fraction):
        return not x or abs(x.numerator.bit_length() - x.denominator.bit_length()) <= _WIDEST
    return not x or 1 / _BOUND <= abs(x) <= _BOUND


def _model_faults(e: Element) -> list[Finding]:
    """Terminals and signs of a part of several terminals."""
    words = [word for word, _ in e.terminals]
    wanted = _TERMINALS.get(e.kind, set())
    if (wanted and set(words) != wanted) or (e.kind == "transformer" and len(words) != 4):
        needs = ", ".join(sorted(wanted)) or "two pairs of nodes"
        return [fault(f"{e.name} ({e.kind}) needs the terminals {needs}.", e.span)]
    device = e.device or Device()
    states = {"transistor": ("active", "saturated"), "diode": ("conducting", "blocking")}.get(e.kind)
    if states and device.state not in states:
        return [fault(f"{e.name} ({e.kind}) has no state; it is taken as {' or '.join(states)}.", e.span)]
    if e.kind == "transistor" and not device.polarity:
        return [fault(f"{e.name} is neither npn nor pnp.", e.span)]
    drops = [x for x in (device.v_be, device.v_ce, device.drop, device.beta) if x is not None and x < 0]
    if drops:
        text = f"{e.name} has a drop or a beta below zero; for a pnp too they are written as positive values."
        return [fault(text, e.span)]
    return []


# --- frequencies ----------------------------------------------------------------------------------------------------


def _at(e: Element, frequency: Fraction, others: list[Fraction]) -> list[Finding]:
    """What a part lacks at a frequency; ``others``: those of the circuit's AC sources."""
    if e.kind in ("voltage source", "current source"):
        return _source_faults(e, frequency, others)
    if e.kind in ("capacitor", "inductor"):
        return _reactance_faults(e, frequency)
    if e.phasor is not None:
        return _phasor_faults(e, frequency, others)
    return []


def _source_faults(e: Element, frequency: Fraction, others: list[Fraction]) -> list[Finding]:
    if e.phasor is not None and e.frequency is None:
        return [fault(f"{e.name} has a phasor for a value but no frequency.", e.span)]
    if e.frequency == UNSTATED and frequency and (len(others) > 1 or frequency != UNSTATED):
        text = f"{e.name} has no frequency, but others are named here. Write it behind its value, as in: 50 Hz"
        return [fault(text, e.span)]
    return []


def _reactance_faults(e: Element, frequency: Fraction) -> list[Finding]:
    if not frequency:
        return []
    if e.value is None:
        return [fault(f"{e.name} has no number for a value, which a solution at {hertz(frequency)} needs.", e.span)]
    if frequency == UNSTATED and e.value:
        text = f"{e.name} ({e.kind}) depends on the frequency, and no source names one. Write it behind a source's value, as in: 50 Hz"
        return [fault(text, e.span)]
    return []


def _phasor_faults(e: Element, frequency: Fraction, others: list[Fraction]) -> list[Finding]:
    """An impedance or a complex gain is known at one frequency only."""
    what = "is an impedance" if e.kind == "impedance" else "has a complex gain"
    remedy = (
        "Write it as a resistor with an inductor or a capacitor."
        if e.kind == "impedance"
        else "Build it of parts that are known at every frequency."
    )
    if not frequency:
        return [fault(f"{e.name} {what}, known at one AC frequency and not at DC. {remedy}", e.span)]
    if [f for f in others if f != frequency]:
        listed = " and ".join(hertz(f) for f in sorted({*others, frequency}))
        text = f"{e.name} {what}, known at one frequency, but the circuit has several: {listed}. {remedy}"
        return [fault(text, e.span)]
    return []


# --- controls -------------------------------------------------------------------------------------------------------


def _control_faults(e: Element, circuit: Circuit) -> list[Finding]:
    control = e.control or Control()
    if control == Control():
        return [fault(f"{e.name} is a controlled source, but nothing is named that controls it.", e.span)]
    if control.part:
        names, wanted = {name for x in circuit.elements for name in names_of(x)}, [control.part]
    else:
        names, wanted = {*circuit.nodes(), circuit.reference}, [control.plus, control.minus]
    what = "the current of part" if control.part else "the voltage at node"
    several = circuit.element(control.part) if control.part else None
    if several is not None and several.terminals and control.part not in names:
        text = f"{e.name} is controlled by the current of {control.part}, which has several terminals"
        return [fault(f"{text}. Name the terminal: {' or '.join(names_of(several))}.", e.span)]
    return [
        fault(f"{e.name} is controlled by {what} {n or '(no name)'}, which this circuit does not have.{_near(n, names)}", e.span)
        for n in dict.fromkeys(wanted) if n not in names or not n
    ]  # fmt: skip


def _near(name: str, names: Iterable[str]) -> str:
    from difflib import get_close_matches  # late: needed only in a message

    near = get_close_matches(name, sorted(n for n in names if n), n=1)
    return f" Did you mean {near[0]}?" if near else " Name one that it has, or add the one that is missing."
