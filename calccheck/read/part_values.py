"""What a part is, told by the unit of its value: ohms, siemens, volts, amperes, farads, henries."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass, replace
from fractions import Fraction

from calccheck import arithmetic
from calccheck.arithmetic import Amount, Doubt
from calccheck.component_code import component_code
from calccheck.formula import Binary, Group, Node, Number, Reference, references, walk
from calccheck.model import Control, Kind
from calccheck.read.closed_formulas import closed, number_node
from calccheck.read.controls import check_proportional
from calccheck.read.expression import parse
from calccheck.read.names import customary, listed, nearest
from calccheck.read.symbols import KINDS, Written, amount_of
from calccheck.read.value_names import Scope, check_symbols, is_control, known, steering
from calccheck.source import Piece
from calccheck.units import AMPERE, LOOKALIKES, NONE, PLAIN, SIEMENS, UNITS, VOLT, Dimension, Unit, printed, words

SOURCES: tuple[Kind, ...] = ("voltage source", "current source")
_CONTROLLED: dict[Dimension, Kind] = {VOLT: "controlled voltage source", AMPERE: "controlled current source"}
_RANGE = (1e-300, 1e300)
_EXPECTED = "a part is given in ohms, siemens, volts, amperes, farads or henries"
_UNIT_BEHIND_NAME = re.compile(
    r"(?P<expression>(?:.*[^\w.])?[^\W\d_](?:\w*[′″']*|[^\W_]*_\{[^{}]*\}))\s+(?P<unit>[^\W\d_]+)", re.DOTALL
)
_PREFIX_APART = re.compile(r"(?:.*[^\w.])?\d*\.?\d+\s*[TGMkmµunpf]\s+[^\W\d_]+", re.DOTALL)


@dataclass(frozen=True, slots=True)
class Value:
    """A part's kind and value, as ``model.Element`` keeps them.

    ``dimension``: of the value as written. ``node``: the value with no names left but free symbols. ``symbolic``: whether it has
    such. ``alternating``: whether it is written as a phasor, by an angle or j. ``worked``: the value with the names of givens
    left in it, where there are such.
    """

    kind: Kind
    dimension: Dimension
    node: Node
    value: Fraction | None = None
    stated: Amount | None = None
    control: Control | None = None
    phasor: complex | None = None
    symbolic: bool = False
    alternating: bool = False
    worked: Node | None = None


# --- reading ---------------------------------------------------------------------------------------------------------


def write(what: Piece, name: str, scope: Scope) -> Written:
    """The value of a part called ``name`` parsed, without tolerance. Raises ``Doubt`` where it cannot be read."""

    def lookup(r: Reference) -> Amount:
        return known(r, scope)

    code = component_code(what.text)
    if code is not None:
        return Written(what, number_node(_by_code(what, name, code, scope), what.span()), lookup)
    if _PREFIX_APART.fullmatch(what.text.translate(LOOKALIKES)):
        raise Doubt(f"{what.text}: a prefix and its unit are one word", what.span())
    expression, unit = _unit_behind_name(what, scope)
    node = parse(expression)
    if isinstance(node, Number):  # nearly always: no name in it, no angle
        return Written(what, node, lookup, unit)
    alternating = any(isinstance(n, Binary) and n.operator == "∠" for n in walk(node))
    alternating = alternating or any(r.word == "j" and "j" not in scope.givens for r in references(node))
    steered_by = tuple(r for r in references(node) if is_control(r, scope))
    control = _one_control(steered_by, scope, what) if steered_by else None
    symbols = check_symbols(node, name, scope)
    if unit is None and symbols:
        node, unit = _unit_behind_bracket(node)
    return Written(what, node, lookup, unit, symbols, control, steered_by, alternating)


def _by_code(what: Piece, name: str, code: tuple[Fraction, Dimension], scope: Scope) -> Amount:
    """A code carries no unit, so a name that stands in its way leaves it in doubt."""
    meant = printed(*code, figures=3)
    if what.text in scope.givens or what.text in scope.parts:
        raise Doubt(f"{what.text} is a name here and the code of {meant}; write the value with its unit", what.span())
    promised = customary(name)
    if promised and code[1] not in promised:
        reason = f"{what.text} is the code of {meant}, but {name} is called like {words(promised[0])}"
        raise Doubt(f"{reason}; write the value with its unit", what.span())
    return Amount(*code)


def _unit_behind_name(what: Piece, scope: Scope) -> tuple[Piece, Unit | None]:
    """``2*R Ω``: the expression and the unit that it is given in, where one stands behind a name."""
    m = _UNIT_BEHIND_NAME.fullmatch(what.text)
    unit = UNITS.get(m["unit"].translate(LOOKALIKES)) if m else None
    if m is None or unit is None or unit.dimension not in KINDS or m["unit"] in scope.givens:
        return what, None
    return what.part(*m.span("expression")), unit


def _unit_behind_bracket(node: Node) -> tuple[Node, Unit | None]:
    """``(R + 2) kΩ``, ``R*(1 + x) Ω``: the value and the unit at its end."""
    if isinstance(node, Group) and node.unit.text:
        return replace(node, unit=PLAIN, unit_words=()), node.unit
    if isinstance(node, Binary) and node.operator in ("×", "·"):
        right, unit = _unit_behind_bracket(node.right)
        return replace(node, right=right), unit
    return node, None


def _one_control(steered_by: tuple[Reference, ...], scope: Scope, what: Piece) -> Control:
    control = steering(steered_by[0], scope)
    if any(steering(r, scope) != control for r in steered_by):
        raise Doubt("one quantity steers a source; write two sources in series or side by side", what.span())
    return control


# --- working out -----------------------------------------------------------------------------------------------------


def read_value(written: Written, scope: Scope) -> Value:
    """The kind and value of a part, symbols being of the dimensions in ``scope``.

    Raises ``Doubt`` where it has none, ``DimensionFault`` where its dimensions do not fit together.
    """
    _refuse_units_that_are_names(written.node, scope)
    amount = amount_of(written, scope.symbols)
    _refuse_unknown(written, amount, scope)
    worked = _with_givens(amount, written, scope)
    node = closed(written.node, written.symbols, written.at)
    amount, node = _in_unit(amount, node, written)
    if written.control is None:
        value = _sorted(amount, node, written)
        return value if worked is None else replace(value, worked=worked)
    check_proportional(written, scope.symbols)
    kind = _CONTROLLED.get(amount.dimension)
    if kind is None:
        reason = f"{written.what.text} comes out as {words(amount.dimension)}; a controlled source comes out in volts or amperes"
        raise Doubt(reason, written.what.span())
    return replace(_valued(kind, amount, node, written), worked=worked)


def _with_givens(amount: Amount, w: Written, scope: Scope) -> Node | None:
    """The value as a formula of the givens in it."""
    names = [r.word for r in references(w.node) if r.word in scope.givens]
    if not names or w.symbols:
        return None
    return _in_unit(amount, closed(w.node, names, w.at), w)[1]


def _refuse_units_that_are_names(node: Node, scope: Scope) -> None:
    names = {*scope.givens, *(() if isinstance(node, Number) else scope.symbols)}
    for n in walk(node) if names else ():
        for word in n.unit_words if isinstance(n, Number | Group) else ():
            if word in names:
                raise Doubt(f"{word} is a name here and a unit; write × between number and name", n.span)


def _refuse_unknown(w: Written, amount: Amount, scope: Scope) -> None:
    """Symbols whose dimension nothing tells."""
    unknown = [s for s in w.symbols if s not in scope.symbols]
    _refuse_divisor(w, amount)
    if not unknown:
        return
    if w.unit is None and amount.dimension == NONE:
        near = nearest(unknown[0], scope.givens)
        hint = f"is {near} meant?" if near else f"given {unknown[0]} = … would give its value"
        place = next(r.span for r in references(w.node) if r.word == unknown[0])
        raise Doubt(f"{unknown[0]} has no value and {w.what.text} no unit at its end; {hint}", place)
    if w.unit is not None and len(unknown) > 1:
        reason = f"nothing tells which of {listed(unknown)} is {words(w.unit.dimension)}"
        raise Doubt(
            f"{reason}; it stands alone as the value of some part first: {unknown[0]} {w.unit.text}", w.what.span()
        )


def _refuse_divisor(w: Written, amount: Amount) -> None:
    """``R/2 Ω`` is R over 2 Ω by the language, but hardly what its writer means."""
    node = w.node
    if not w.symbols or w.unit or not (isinstance(node, Binary) and node.operator == "÷"):
        return
    under = node.right
    if isinstance(under, Number | Group) and amount.dimension in (NONE, tuple(-x for x in under.unit.dimension)):
        unit = under.unit.text
        if unit:
            reason = f"{w.what.text} is read as divided by what stands behind the stroke with its unit {unit}"
            raise Doubt(f"{reason}; put brackets around all that the unit belongs to: (…) {unit}", under.span)


def _in_unit(amount: Amount, node: Node, w: Written) -> tuple[Amount, Node]:
    """The value in the unit at its end, which multiplies a plain number and only says what a symbol is."""
    if w.unit is None:
        return amount, node
    unit, what = w.unit, w.what
    if amount.dimension == NONE:
        scaled = Amount(arithmetic.trimmed(amount.value * unit.factor), unit.dimension)
        return scaled, Group(node, what.span(), unit)
    if not w.symbols:
        lead = "the unit follows from the gain" if w.control else "the value has a unit already"
        raise Doubt(f"{what.text}: {lead}; leave out {unit.text}", what.span())
    if amount.dimension != unit.dimension:
        raise Doubt(f"{what.text} comes out as {words(amount.dimension)}, not {words(unit.dimension)}", what.span())
    if unit.factor != 1:
        base = next(u.text for u in UNITS.values() if u.dimension == unit.dimension and u.factor == 1)
        raise Doubt(
            f"a free symbol stands for the whole quantity, prefix and all; write {base} for {unit.text}", what.span()
        )
    return amount, node


def _sorted(amount: Amount, node: Node, w: Written) -> Value:
    """The kind and value that an amount makes of a part."""
    what = w.what
    kind = KINDS.get(amount.dimension)
    if kind is None or amount.point:
        if amount.dimension == NONE:
            raise Doubt(f"{what.text} has no unit; {_EXPECTED}", what.span())
        found = "a temperature" if amount.point else words(amount.dimension)
        raise Doubt(f"{what.text} is {found}; {_EXPECTED}", what.span())
    if w.alternating or isinstance(amount.value, complex):
        if kind not in (*SOURCES, "resistor"):
            raise Doubt(f"{what.text} is complex; {words(amount.dimension)} is a plain value", what.span())
        kind = "impedance" if kind == "resistor" else kind
    return _valued(kind, amount, node, w)


def _valued(kind: Kind, amount: Amount, node: Node, w: Written) -> Value:
    alternating = w.alternating or isinstance(amount.value, complex)
    inverted = amount.dimension == SIEMENS and w.control is None
    if w.symbols:
        if inverted and kind == "impedance":
            node = Binary("÷", number_node(Amount(Fraction(1)), node.span), Group(node, node.span), node.span)
        return Value(kind, amount.dimension, node, control=w.control, symbolic=True, alternating=alternating)
    value = _in_range(amount.value, w.what)
    stated = None if w.control else Amount(value, amount.dimension)
    if inverted and value == 0:
        return Value("open", SIEMENS, node, stated=stated)
    value = 1 / value if inverted else value
    if alternating:
        return Value(kind, amount.dimension, node, None, stated, w.control, complex(value), alternating=True)
    assert isinstance(value, Fraction)
    return Value(kind, amount.dimension, node, value, stated, w.control)


def _in_range(value: arithmetic.Value, what: Piece) -> Fraction | complex:
    """A value that fits floating-point numbers, a real one as a rational."""
    exact = value if isinstance(value, complex) else Fraction(value)
    try:
        magnitude = abs(complex(exact))
    except OverflowError:
        magnitude = math.inf
    if exact and not _RANGE[0] <= magnitude <= _RANGE[1]:
        raise Doubt(f"{what.text}: the value does not fit a floating-point number", what.span())
    return exact
