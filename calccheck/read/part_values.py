"""What a part is, told by the unit of its value: ohms, siemens, volts, amperes, farads, henries."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Amount, Doubt, evaluate
from calccheck.component_code import component_code
from calccheck.formula import Group, Node, Number, Reference, references, walk
from calccheck.model import Control, Kind
from calccheck.read.expression import parse
from calccheck.read.names import customary, nearest
from calccheck.read.value_names import Scope, free, is_control, known, steering
from calccheck.source import Piece
from calccheck.units import (
    AMPERE,
    FARAD,
    HENRY,
    LOOKALIKES,
    NONE,
    OHM,
    SIEMENS,
    UNITS,
    VOLT,
    Dimension,
    Unit,
    printed,
    words,
)

KINDS: dict[Dimension, Kind] = {
    OHM: "resistor", SIEMENS: "resistor", VOLT: "voltage source", AMPERE: "current source", FARAD: "capacitor",
    HENRY: "inductor",
}  # fmt: skip
_SOURCES: dict[Dimension, Kind] = {VOLT: "controlled voltage source", AMPERE: "controlled current source"}
_PROBES = (Fraction(0), Fraction(2), Fraction(-1), Fraction(7, 3))  # beside 1, where the gain is taken
_SLACK = Fraction(1, 10**9)  # for gains behind roots and functions, which are floats
_RANGE = (Fraction(10) ** -300, Fraction(10) ** 300)
_EXPECTED = "a part is given in ohms, siemens, volts, amperes, farads or henries"

_UNIT_BEHIND_NAME = re.compile(r"(?P<expression>(?:.*[^\w.])?[^\W\d_]\w*[′″']*)\s+(?P<unit>[^\W\d_]+)", re.DOTALL)
_PREFIX_APART = re.compile(r"(?:.*[^\w.])?\d*\.?\d+\s*[TGMkmµunpf]\s+[^\W\d_]+", re.DOTALL)
_ANGLE = re.compile(r"∠\s*[+-]?\s*\d*\.?\d+\s*(?:°|rad\b)")
_IMAGINARY = re.compile(r"(?<![\w.])j(?=\d|(?!\w))")


@dataclass(frozen=True, slots=True)
class Value:
    """A part's kind and value, as ``model.Element`` keeps them; ``unsolved``: why this version does not solve the part."""

    kind: Kind
    value: Fraction | None = None
    stated: Amount | None = None
    control: Control | None = None
    unsolved: str = ""


@dataclass(frozen=True, slots=True)
class Written:
    """A value parsed. ``unit``: one that stands behind a name; ``alternating``: whether angles or j were blanked out."""

    what: Piece
    node: Node
    unit: Unit | None
    alternating: bool


def read_value(what: Piece, name: str, scope: Scope) -> Value:
    """The kind and value of a part called ``name`` from its value as written, without tolerance.

    Raises ``Doubt`` where it cannot be read, ``DimensionFault`` where its dimensions do not fit together.
    """
    code = component_code(what.text)
    if code is not None:
        return _by_code(what, name, code, scope)
    plain, alternating = _without_angles(what)
    if _PREFIX_APART.fullmatch(plain.text):
        raise Doubt(f"{what.text}: a prefix and its unit are one word", what.span())
    expression, unit = _unit_behind_name(plain, scope)
    node = parse(expression)
    _refuse_units_that_are_names(node, scope)
    written = Written(what, node, unit, alternating)
    control = [r for r in references(node) if is_control(r, scope)]
    if control:
        return _controlled(written, control, scope)
    unknown = free(node, scope)
    if unknown:
        return _with_free_symbol(written, unknown[0], scope)
    amount = evaluate(node, lambda r: known(r, scope))
    if unit:
        amount = _in_unit(amount, unit, what)
    return _valued(amount, what, alternating)


def _valued(amount: Amount, what: Piece, alternating: bool) -> Value:
    kind = KINDS.get(amount.dimension)
    if kind is None or amount.point:
        if amount.dimension == NONE:
            raise Doubt(f"{what.text} has no unit; {_EXPECTED}", what.span())
        found = "a temperature" if amount.point else words(amount.dimension)
        raise Doubt(f"{what.text} is {found}; {_EXPECTED}", what.span())
    if alternating or isinstance(amount.value, complex):
        if amount.dimension == OHM:
            return Value("impedance", unsolved="is an impedance")
        return Value(kind, unsolved=f"{what.text} is a phasor")
    value = _exact(amount, what)
    stated = Amount(value, amount.dimension)
    if amount.dimension != SIEMENS:
        return Value(kind, value, stated)
    return Value("resistor", 1 / value, stated) if value else Value("open", stated=stated)


def _exact(amount: Amount, what: Piece) -> Fraction:
    """A real amount as a rational that fits a floating-point number."""
    if isinstance(amount.value, complex):
        raise Doubt(f"{what.text} is complex", what.span())
    exact = Fraction(amount.value)
    if exact and not _RANGE[0] <= abs(exact) <= _RANGE[1]:
        raise Doubt(f"{what.text}: the value does not fit a floating-point number", what.span())
    return exact


def _by_code(what: Piece, name: str, code: tuple[Fraction, Dimension], scope: Scope) -> Value:
    """A code carries no unit, so a name that stands in its way leaves it in doubt."""
    value, dimension = code
    meant = printed(value, dimension, figures=3)
    if what.text in scope.givens or what.text in scope.parts:
        raise Doubt(f"{what.text} is a name here and the code of {meant}; write the value with its unit", what.span())
    promised = customary(name)
    if promised and dimension not in promised:
        reason = f"{what.text} is the code of {meant}, but {name} is called like {words(promised[0])}"
        raise Doubt(f"{reason}; write the value with its unit", what.span())
    return Value(KINDS[dimension], value, Amount(value, dimension))


def _without_angles(what: Piece) -> tuple[Piece, bool]:
    """The value with angles and the sign of imaginary numbers blanked out, and whether there were any.

    What is left has the same dimension and the same form, which is all that a part has that is not solved.
    """
    text = _ANGLE.sub(lambda m: " " * len(m[0]), what.text.translate(LOOKALIKES))
    if "∠" in text:
        at = text.index("∠")
        raise Doubt("an angle is a number and ° or rad: 10 V ∠ 30°", what.span(at, at + 1))
    text = _IMAGINARY.sub(lambda m: " " if text[m.end() : m.end() + 1].isdigit() else "1", text)
    return (Piece(text, what.at), True) if text != what.text.translate(LOOKALIKES) else (what, False)


# --- names in a value -----------------------------------------------------------------------------------------------


def _unit_behind_name(what: Piece, scope: Scope) -> tuple[Piece, Unit | None]:
    """``2*R Ω``: the expression and the unit that it is given in, where one stands behind a name."""
    m = _UNIT_BEHIND_NAME.fullmatch(what.text)
    unit = UNITS.get(m["unit"].translate(LOOKALIKES)) if m else None
    if m is None or unit is None or unit.dimension not in KINDS or m["unit"] in scope.givens:
        return what, None
    return what.part(*m.span("expression")), unit


def _in_unit(amount: Amount, unit: Unit, what: Piece) -> Amount:
    if amount.dimension != NONE:
        raise Doubt(f"{what.text}: the value has a unit already; leave out {unit.text}", what.span())
    return Amount(_exact(amount, what) * unit.factor, unit.dimension)


def _refuse_units_that_are_names(node: Node, scope: Scope) -> None:
    if not scope.givens:
        return
    for n in walk(node):
        for word in n.unit_words if isinstance(n, Number | Group) else ():
            if word in scope.givens:
                raise Doubt(f"{word} is a name here and a unit; write × between number and name", n.span)


def _with_free_symbol(written: Written, first: Reference, scope: Scope) -> Value:
    unit, node, what = written.unit, written.node, written.what
    if first.word in scope.parts:
        raise Doubt(f"{first.word} is a part; a value is worked from givens", first.span)
    if unit is None and isinstance(node, Group) and node.unit.text:
        unit = node.unit
    near = nearest(first.word, scope.givens)
    hint = f"is {near} meant?" if near else f"given {first.word} = … would give its value"
    if unit is None or unit.dimension not in KINDS:
        raise Doubt(f"{first.word} has no value and {what.text} no unit at its end; {hint}", first.span)
    return Value(KINDS[unit.dimension], unsolved=f"has the free symbol {first.word} for a value ({hint})")


# --- controlled sources ---------------------------------------------------------------------------------------------


def _controlled(written: Written, control: list[Reference], scope: Scope) -> Value:
    """A source whose value is proportional to one voltage or current of the circuit."""
    node, what = written.node, written.what
    steered_by = steering(control[0], scope)
    if any(steering(r, scope) != steered_by for r in control):
        raise Doubt("one quantity steers a source; write two sources in series or side by side", what.span())
    unknown = [r for r in free(node, scope) if r not in control]
    if unknown:
        raise Doubt(f"{unknown[0].word} has no value; given {unknown[0].word} = … would give it one", unknown[0].span)
    if written.unit:
        raise Doubt(f"{what.text}: the unit follows from the gain; leave out {written.unit.text}", what.span())
    dimension = VOLT if control[0].letter == "V" else AMPERE

    def at(x: Fraction) -> Amount:
        return evaluate(node, lambda r: Amount(x, dimension) if r in control else known(r, scope))

    gain = _gain(at, what)
    kind = _SOURCES.get(gain.dimension)
    if kind is None:
        reason = f"{what.text} comes out as {words(gain.dimension)}; a controlled source comes out in volts or amperes"
        raise Doubt(reason, what.span())
    if written.alternating:
        return Value(kind, unsolved="has a complex gain")
    return Value(kind, _exact(gain, what), control=steered_by)


def _gain(at: Callable[[Fraction], Amount], what: Piece) -> Amount:
    """The factor between a source and what steers it, which must be the same for every value of the latter."""
    gain = at(Fraction(1))
    factor = _exact(gain, what)
    for x in _PROBES:
        try:
            proportional = abs(_exact(at(x), what) - x * factor) <= _SLACK * abs(factor)
        except Doubt:
            proportional = False
        if not proportional:
            raise Doubt(f"{what.text} is not proportional to the quantity that steers it", what.span())
    return gain
