"""What moves a quantity, largest first: for each value a bar from the quantity's change at one end of its tolerance to the other.

The bars stand about the nominal value; what a value at its lower end does is hatched falling, at its upper end rising: it is
read without colour.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence

from calccheck.annotate.bars import cut, hatching, signed
from calccheck.annotate.drawing import svg
from calccheck.arithmetic import Value
from calccheck.model import Sensitivity

MOST = 12  # values shown; the rest move it less
_EDGE, _ROW, _THICK = 4.0, 15.0, 10.0
_LENGTH, _APART = 150.0, 8.0
_LONGEST_NAME, _LONGEST_QUANTITY = 26, 44  # characters


def picture(quantity: str, moves: Sequence[Sensitivity], unit: str = "", missing: Collection[str] = ()) -> svg.Picture:
    """The image and its size; changes in ``unit`` where it fits. ``missing``: characters that no font shows."""
    found = [m for m in moves if m.low.value or m.high.value][:MOST]
    names = [cut(svg.visible(m.name, missing), _LONGEST_NAME) for m in found]
    values = [f"{signed(m.low, unit)} … {signed(m.high, unit)}" for m in found]
    left = _EDGE + max(map(svg.width, names)) + _APART
    right = left + _LENGTH + _APART + max(map(svg.width, values))
    largest = max(max(abs(_real(m.low.value)), abs(_real(m.high.value))) for m in found)
    head = cut(svg.visible(quantity, missing), _LONGEST_QUANTITY)
    body = [svg.text(_EDGE, _EDGE + svg.ascent(), head, bold=True)]
    middle = left + _LENGTH / 2
    for k, (move, name, value) in enumerate(zip(found, names, values, strict=True)):
        y = _EDGE + _ROW * (k + 1)
        base = y + _ROW / 2 + 3.6
        body += [svg.text(left - _APART, base, name, anchor="end"), svg.text(right, base, value, anchor="end")]
        body.append(svg.segment(middle, y, middle, y + _ROW, 0.6))
        for end, rising in ((move.low.value, False), (move.high.value, True)):
            body += _side(middle, middle + _LENGTH / 2 * _real(end) / largest, y, rising)
    wide = max(right, _EDGE + svg.width(head)) + _EDGE
    words = "; ".join(f"{name} {value}" for name, value in zip(names, values, strict=True))
    return svg.picture(wide, 2 * _EDGE + _ROW * (len(found) + 1), f"What moves {quantity}", words, body)


def _side(middle: float, end: float, y: float, rising: bool) -> list[str]:
    """The half of a bar that one end of the tolerance brings about."""
    low, high, top = min(middle, end), max(middle, end), y + (_ROW - _THICK) / 2
    if high - low < 0.5:
        return []
    return [svg.rectangle(low, top, high - low, _THICK, 0.8), *hatching(low, high, top, rising)]


def _real(value: Value) -> float:
    return float(value.real)
