"""From a part's line to the part: its value worked out, its tolerance read, what is odd about it said."""

from __future__ import annotations

from dataclasses import replace

from calccheck.arithmetic import Doubt
from calccheck.model import UNSTATED, Device, Element, Finding
from calccheck.read.attributes import read_tolerance
from calccheck.read.names import customary
from calccheck.read.part_lines import PartLine, turns_ratio
from calccheck.read.part_values import SOURCES, Value, read_value, write
from calccheck.read.symbols import Written
from calccheck.read.value_names import Scope
from calccheck.rules import RULES
from calccheck.source import Span
from calccheck.units import words


def write_part(part: PartLine, scope: Scope) -> Written | None:
    """A part's value parsed; ``None`` for a part that is told by a word. Raises ``Doubt`` where it cannot be read."""
    if part.shape.kind:
        return None
    try:
        return write(part.what, part.name, scope)
    except Doubt as doubt:
        doubt.span = doubt.span or part.what.span()
        raise


def read_part(part: PartLine, written: Written | None, scope: Scope) -> tuple[Element, list[Finding]]:
    """The part and what is to be said of it. Raises ``Doubt`` or ``DimensionFault`` where it cannot be read."""
    if written is None:
        return _by_word(part), []
    try:
        value = read_value(written, scope)
    except Doubt as doubt:
        doubt.span = doubt.span or part.what.span()
        raise
    plus, minus = part.ends
    found = [read_tolerance(p, value.dimension) for p in (part.tolerance, part.drift) if p]
    tolerance, drift = [*found, None, None][:2]
    if tolerance and not tolerance.relative and (value.control or value.kind == "impedance"):
        what = "a gain" if value.control else "an impedance"
        raise Doubt(f"the tolerance of {what} is written ±5 %", tolerance.span)
    if tolerance and tolerance.relative and value.stated is not None and value.stated.value == 0:
        raise Doubt(f"{tolerance.text} of zero is nothing; write it in the unit of the value", tolerance.span)
    element = Element(
        part.name, value.kind, plus, minus, part.body.span(), value.value, value.stated, part.what.text, value.control,
        tolerance, tuple(part.ratings), phasor=value.phasor, formula=value.node if value.symbolic else None,
        worked=value.worked, drift=drift,
    )  # fmt: skip
    return _alternating(element, part, value), _cautions(part, element, value)


def _alternating(e: Element, part: PartLine, value: Value) -> Element:
    """The part with its frequency: a source's as written, or one that the circuit must tell."""
    if e.kind not in SOURCES:
        if part.frequency is not None:
            raise Doubt(f"a frequency belongs to a source; {part.name} is none", part.frequency.span())
        return e
    frequency = part.hertz or (UNSTATED if value.alternating else None)
    if frequency is None:
        return e
    if e.value is None:
        return replace(e, frequency=frequency)
    return replace(e, frequency=frequency, value=None, phasor=complex(e.value))


def _by_word(part: PartLine) -> Element:
    """A link, a gap, or a part with a model."""
    plus, minus = part.ends
    kind = part.shape.kind
    assert kind is not None
    return Element(
        part.name, kind, plus, minus, part.body.span(), written=part.what.text, ratings=tuple(part.ratings),
        terminals=tuple(part.terminals), device=_device(part),
    )  # fmt: skip


def _device(part: PartLine) -> Device | None:
    found = part.values
    value = {word: v.value for word, v in found.items()}
    tolerances = tuple((word, v.tolerance) for word, v in found.items() if v.tolerance)
    match part.shape.kind:
        case "op-amp":
            swing = found.get("swing")
            return Device(swing_low=swing.value if swing else None, swing_high=swing.high if swing else None)
        case "transformer":
            return Device(ratio=turns_ratio(part.what.text))
        case "transistor":
            return Device(
                "saturated" if part.flags else "active", "pnp" if part.what.text == "pnp" else "npn",
                value["beta"], value["V_BE"], value.get("V_CE"), tolerances=tolerances,
            )  # fmt: skip
        case "diode":
            return Device("blocking" if part.flags else "conducting", drop=value["drop"], tolerances=tolerances)
    return None


def _cautions(part: PartLine, element: Element, value: Value) -> list[Finding]:
    found = []
    promised = customary(element.name)
    if promised and value.dimension not in promised:
        message = f"{element.name} is called like {words(promised[0])} and has the value of {words(value.dimension)}"
        found.append(_finding("letter", message, part.name_span))
    if element.kind == "resistor" and element.value is not None and element.value < 0:
        message = f"{element.name} has a resistance below zero, {element.written}"
        found.append(_finding("negative-resistance", message, part.what.span()))
    return found


def _finding(kind: str, message: str, span: Span) -> Finding:
    return Finding(kind, RULES[kind].severity, message, span)
