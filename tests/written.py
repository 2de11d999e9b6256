"""Circuits and values written out as the text of calc sheets, for laws over random ones."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from decimal import ROUND_HALF_EVEN, ROUND_HALF_UP, Context, Decimal
from fractions import Fraction

from calccheck.model import Circuit, Element

PREFIXES = {"p": -12, "n": -9, "µ": -6, "m": -3, "": 0, "k": 3, "M": 6}
UNIT = {"V": "V", "I": "A", "P": "W", "R": "Ω", "Isc": "A"}
_UNITS = {"resistor": "Ω", "voltage source": "V", "current source": "A"}


def exactly(value: Fraction) -> str:
    """A decimal fraction in all its digits."""
    digits = Context(prec=60).divide(Decimal(value.numerator), Decimal(value.denominator))
    assert Fraction(digits) == value
    return f"{digits:f}"


def what(e: Element, names: Mapping[str, str]) -> str:
    """The value of a part as a circuit block states it."""
    if e.kind in _UNITS:
        return f"{exactly(e.value)} {_UNITS[e.kind]}"
    if e.control is None:
        return {"short": "short", "open": "open", "capacitor": "100 nF", "inductor": "2.2 mH"}[e.kind]
    volts = e.kind == "controlled voltage source"
    if e.control.part:
        unit, by = (" Ω" if volts else ""), f"I_{e.control.part}"
    else:
        plus, minus = (names.get(n, n) for n in (e.control.plus, e.control.minus))
        unit, by = ("" if volts else " S"), f"V_{{{plus},{minus}}}"
    return f"{exactly(e.value)}{unit} * {by}"


def block(made: Circuit, names: Mapping[str, str] | None = None, order: Sequence[int] | None = None) -> str:
    """A circuit as a fence. ``names``: other names for its nodes; ``order``: of its lines."""
    names = names or {}
    lines = [
        f"{e.name}: {what(e, names)}, {names.get(e.plus, e.plus)} to {names.get(e.minus, e.minus)}"
        for e in made.elements
    ]
    lines = [lines[k] for k in order] if order is not None else lines
    return "\n".join(["```circuit", f"reference {names.get(made.reference, made.reference)}", *lines, "```", "", ""])


def working(*statements: str) -> str:
    """A working fence."""
    return "\n".join(["```working", *statements, "```", "", ""])


def to_figures(value: Fraction, figures: int, half_up: bool = True) -> Decimal:
    """A value rounded to significant figures by decimal arithmetic, a tie away from zero or to the even digit."""
    exact = Context(prec=120).divide(Decimal(value.numerator), Decimal(value.denominator))
    short = Context(prec=figures, rounding=ROUND_HALF_UP if half_up else ROUND_HALF_EVEN).plus(exact)
    return short.quantize(Decimal(1).scaleb(short.adjusted() - figures + 1))  # zeros at its end are figures too


def step(digits: Decimal) -> Decimal:
    """The unit of the last place."""
    return Decimal(1).scaleb(int(digits.as_tuple().exponent))


def spelt(digits: Decimal, unit: str, prefix: str = "", form: str = "plain") -> str:
    """A rounded value of ``unit`` as a sheet prints it, in a prefixed unit, ``plain`` or with an exponent.

    With an exponent wherever it would else be a whole number with zeros at its end, which tells fewer figures than it shows.
    """
    shown = digits.scaleb(-PREFIXES[prefix])
    exponent, last = int(shown.as_tuple().exponent), shown.as_tuple().digits[-1]
    if form == "plain" and (exponent < 0 or (exponent == 0 and last != 0)):
        text = f"{shown:f}"
    else:
        power = shown.adjusted()
        mantissa = f"{shown.scaleb(-power):f}"
        text = f"{mantissa}×10^{power}" if form == "power" else f"{mantissa}e{power}"
    return f"{text.replace('-', '−', 1) if text.startswith('-') else text} {prefix}{unit}"
