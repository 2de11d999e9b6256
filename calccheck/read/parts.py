"""From a part's line to the part: its value worked out, its tolerance read, what is odd about it said."""

from __future__ import annotations

from calccheck.arithmetic import Doubt
from calccheck.model import Element, Finding, Kind
from calccheck.read.attributes import read_tolerance
from calccheck.read.names import customary
from calccheck.read.part_lines import PartLine
from calccheck.read.part_values import Value, read_value
from calccheck.read.value_names import Scope
from calccheck.rules import RULES
from calccheck.source import Sheet, Span
from calccheck.units import AMPERE, FARAD, HENRY, OHM, VOLT, Dimension, words

_DIMENSIONS: dict[Kind, Dimension] = {
    "resistor": OHM, "impedance": OHM, "voltage source": VOLT, "controlled voltage source": VOLT, "current source": AMPERE,
    "controlled current source": AMPERE, "capacitor": FARAD, "inductor": HENRY,
}  # fmt: skip
_UNSOLVED: dict[Kind, str] = {
    "op-amp": "is an op-amp", "transformer": "is a transformer", "transistor": "is a transistor", "diode": "is a diode",
}  # fmt: skip
_SOURCES: tuple[Kind, ...] = ("voltage source", "current source")


def read_part(part: PartLine, scope: Scope, sheet: Sheet) -> tuple[Element, list[Finding]]:
    """The part and what is to be said of it. Raises ``Doubt`` or ``DimensionFault`` where it cannot be read."""
    value = read_part_value(part, scope)
    tolerance = read_tolerance(part.tolerance, _tolerated(value)) if part.tolerance else None
    if tolerance and value.control and not tolerance.relative:
        raise Doubt("the tolerance of a gain is written ±5 %", tolerance.span)
    plus, minus = part.ends
    element = Element(
        part.name, value.kind, plus, minus, part.body.span(), value.value, value.stated, part.what.text, value.control,
        tolerance, tuple(part.ratings), tuple(part.terminals),
    )  # fmt: skip
    return element, [*_cautions(part, element), *_not_solved(part, value, sheet)]


def read_part_value(part: PartLine, scope: Scope) -> Value:
    """The kind and value of a part, a source's frequency taken into account."""
    if part.shape.kind:
        return Value(part.shape.kind, unsolved=_UNSOLVED.get(part.shape.kind, ""))
    try:
        value = read_value(part.what, part.name, scope)
    except Doubt as doubt:
        doubt.span = doubt.span or part.what.span()
        raise
    if part.frequency is None:
        return value
    if value.kind not in _SOURCES:
        raise Doubt(f"a frequency belongs to a source; {part.name} is none", part.frequency.span())
    return Value(value.kind, unsolved=value.unsolved or f"is a source of {part.frequency.text}")


def _tolerated(value: Value) -> Dimension | None:
    """The dimension that an absolute tolerance of this value has; a conductance has one in siemens."""
    return value.stated.dimension if value.stated else None if value.unsolved else _DIMENSIONS.get(value.kind)


def _not_solved(part: PartLine, value: Value, sheet: Sheet) -> list[Finding]:
    if not value.unsolved:
        return []
    line, _ = sheet.line_column(part.name_span.start)
    message = f"{part.name} (line {line}) {value.unsolved}, which this version reads but does not solve"
    return [_finding("not-solved-here", message, part.body.span())]


def _cautions(part: PartLine, element: Element) -> list[Finding]:
    found = []
    dimension = element.stated.dimension if element.stated else _DIMENSIONS.get(element.kind)
    promised = customary(element.name)
    if promised and dimension and dimension not in promised:
        message = f"{element.name} is called like {words(promised[0])} and has the value of {words(dimension)}"
        found.append(_finding("letter", message, part.name_span))
    if element.kind == "resistor" and element.value is not None and element.value < 0:
        message = f"{element.name} has a resistance below zero, {element.written}"
        found.append(_finding("negative-resistance", message, part.what.span()))
    return found


def _finding(kind: str, message: str, span: Span) -> Finding:
    return Finding(kind, RULES[kind].severity, message, span)
