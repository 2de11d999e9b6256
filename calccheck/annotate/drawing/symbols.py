"""Graphical symbols of parts after IEC 60617 (from memory), upright, ``SYMBOL`` high, the plus end above.

Resistor and impedance: rectangle; capacitor: two plates; inductor: half circles; ideal voltage source: circle, the conductor
running through; ideal current source: circle with a bar across it; diode: triangle and bar on a conductor running through.
Controlled sources: the same lines in a rhombus, as IEC 60375 has them (from memory). A gap: two open ends.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping

from calccheck.annotate.drawing.svg import circle, number, path, rectangle, segment, solid, text
from calccheck.model import Kind

SYMBOL = 32.0  # height
RADIUS = 11.0  # of a source
_MIDDLE = SYMBOL / 2
_HALF = 6.0  # of a resistor's width


def symbol(kind: Kind, x: float, y: float, down: bool) -> list[str]:
    """A symbol with its upper end at (x, y). ``down``: the plus end is above, else below."""
    return _SYMBOLS[kind](x, y, down)


def _ends(x: float, y: float, half: float) -> list[str]:
    """The conductor from both ends to a body that reaches ``half`` up and down from the middle."""
    return [segment(x, y, x, y + _MIDDLE - half), segment(x, y + _MIDDLE + half, x, y + SYMBOL)]


def _signs(x: float, y: float, down: bool) -> list[str]:
    """Plus and minus beside the two ends."""
    upper, lower = ("+", "−") if down else ("−", "+")
    return [text(x - 8.5, y + 6.0, upper, anchor="middle"), text(x - 8.5, y + SYMBOL + 1.0, lower, anchor="middle")]


def _counting(x: float, y: float, down: bool) -> list[str]:
    """An open arrow beside the symbol: the direction in which a source's current counts."""
    top, bottom = y + 5.0, y + SYMBOL - 5.0
    tip, back = (bottom, bottom - 5.0) if down else (top, top + 5.0)
    at = x - RADIUS - 3.5
    head = f"M{number(at - 2.5)} {number(back)}L{number(at)} {number(tip)}L{number(at + 2.5)} {number(back)}"
    return [segment(at, top, at, bottom), path(head)]


def _rhombus(x: float, y: float) -> str:
    r, m = number(RADIUS), y + _MIDDLE
    return path(f"M{number(x)} {number(m - RADIUS)}l{r} {r}l-{r} {r}l-{r} -{r}z")


def _resistor(x: float, y: float, down: bool) -> list[str]:
    return [rectangle(x - _HALF, y, 2 * _HALF, SYMBOL)]


def _impedance(x: float, y: float, down: bool) -> list[str]:
    return [*_resistor(x, y, down), text(x, y + _MIDDLE + 3.7, "Z", anchor="middle")]


def _voltage_source(x: float, y: float, down: bool) -> list[str]:
    return [circle(x, y + _MIDDLE, RADIUS), segment(x, y, x, y + SYMBOL), *_signs(x, y, down)]


def _current_source(x: float, y: float, down: bool) -> list[str]:
    bar = segment(x - RADIUS, y + _MIDDLE, x + RADIUS, y + _MIDDLE)
    return [circle(x, y + _MIDDLE, RADIUS), bar, *_ends(x, y, RADIUS), *_counting(x, y, down)]


def _controlled_voltage(x: float, y: float, down: bool) -> list[str]:
    return [_rhombus(x, y), segment(x, y, x, y + SYMBOL), *_signs(x, y, down)]


def _controlled_current(x: float, y: float, down: bool) -> list[str]:
    bar = segment(x - RADIUS, y + _MIDDLE, x + RADIUS, y + _MIDDLE)
    return [_rhombus(x, y), bar, *_ends(x, y, RADIUS), *_counting(x, y, down)]


def _capacitor(x: float, y: float, down: bool) -> list[str]:
    plates = [segment(x - 10, y + _MIDDLE + dy, x + 10, y + _MIDDLE + dy, 1.6) for dy in (-2.5, 2.5)]
    return [*plates, *_ends(x, y, 2.5)]


def _inductor(x: float, y: float, down: bool) -> list[str]:
    quarter = number(SYMBOL / 8)
    turns = f"a{quarter} {quarter} 0 0 1 0 {number(SYMBOL / 4)}" * 4
    return [path(f"M{number(x)} {number(y)}{turns}")]


def _short(x: float, y: float, down: bool) -> list[str]:
    return [segment(x, y, x, y + SYMBOL)]


def _open(x: float, y: float, down: bool) -> list[str]:
    return [*_ends(x, y, 9.0), circle(x, y + _MIDDLE - 7, 2.0), circle(x, y + _MIDDLE + 7, 2.0)]


def _diode(x: float, y: float, down: bool) -> list[str]:
    top, bottom = y + _MIDDLE - 7, y + _MIDDLE + 7
    base, tip = (top, bottom) if down else (bottom, top)
    triangle = f"M{number(x - 8)} {number(base)}H{number(x + 8)}L{number(x)} {number(tip)}z"
    return [path(triangle), segment(x - 8, tip, x + 8, tip), segment(x, y, x, y + SYMBOL)]


ROOM: Mapping[Kind, tuple[float, float]] = {
    "resistor": (9.0, 10.0),
    "impedance": (9.0, 10.0),
    "voltage source": (16.0, 15.0),
    "current source": (20.0, 15.0),
    "controlled voltage source": (16.0, 15.0),
    "controlled current source": (20.0, 15.0),
    "capacitor": (13.0, 14.0),
    "inductor": (6.0, 10.0),
    "short": (6.0, 8.0),
    "open": (6.0, 8.0),
    "diode": (11.0, 12.0),
}
"""What a symbol needs left of its conductor, its signs among it, and where lettering may begin right of it."""

_SYMBOLS: Mapping[Kind, Callable[[float, float, bool], list[str]]] = {
    "resistor": _resistor,
    "impedance": _impedance,
    "voltage source": _voltage_source,
    "current source": _current_source,
    "controlled voltage source": _controlled_voltage,
    "controlled current source": _controlled_current,
    "capacitor": _capacitor,
    "inductor": _inductor,
    "short": _short,
    "open": _open,
    "diode": _diode,
}


def arrow(x: float, y: float, down: bool) -> str:
    """A current's direction: a filled arrow head on its conductor, its middle at (x, y)."""
    tip, back = (4.5, -4.5) if down else (-4.5, 4.5)
    return solid(f"M{number(x - 4)} {number(y + back)}H{number(x + 4)}L{number(x)} {number(y + tip)}z")
