"""Superposition at a glance: what each source brings to a quantity, each bar beginning where the one before it ends.

Sources are told apart by their names, signs by sign, direction of the tip and hatching: it is read without colour.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass
from itertools import accumulate, pairwise

from calccheck.annotate.drawing import svg
from calccheck.arithmetic import Amount, plainest
from calccheck.printing import shown

_EDGE, _ROW, _THICK = 4.0, 15.0, 10.0
_LENGTH = 150.0  # of the scale
_APART = 8.0  # between names, bars and values
_RULE = 4.0  # above the total
_HATCH = 4.0  # from line to line
_FIGURES = 4
_LONGEST_NAME, _LONGEST_QUANTITY = 26, 44  # characters


@dataclass(frozen=True, slots=True)
class Bar:
    """One row; ``start`` and ``end`` as fractions of the scale, ``None`` for phasors, whose lengths do not add."""

    name: str
    value: str
    start: float | None
    end: float | None


def bars(quantity: str, parts: Sequence[tuple[str, Amount]], unit: str = "") -> str:
    """One SVG image of the parts by source and their sum; the values in ``unit`` where it fits."""
    return picture(quantity, parts, unit).svg


def picture(
    quantity: str, parts: Sequence[tuple[str, Amount]], unit: str = "", missing: Collection[str] = ()
) -> svg.Picture:
    """The image and its size. Parts at AC are listed by magnitude and angle. ``missing``: characters that no font shows."""
    found = rows(parts, unit)
    names = [cut(svg.visible(bar.name, missing), _LONGEST_NAME) for bar in found]
    left = _EDGE + max(map(svg.width, names)) + _APART
    right = left + (_LENGTH + _APART if found[-1].end is not None else 0.0)
    right += max(svg.width(bar.value) for bar in found)
    head = cut(svg.visible(quantity, missing), _LONGEST_QUANTITY)
    body = [svg.text(_EDGE, _EDGE + svg.ascent(), head, bold=True)]
    for k, (bar, name) in enumerate(zip(found, names, strict=True)):
        last = k == len(found) - 1
        y = _EDGE + _ROW * (k + 1) + (_RULE if last else 0.0)
        base = y + _ROW / 2 + 3.6
        body += [svg.text(left - _APART, base, name, last, "end"), svg.text(right, base, bar.value, last, "end")]
        if last:
            body.append(svg.segment(_EDGE, y - _RULE / 2, right, y - _RULE / 2, 0.6))
        body += _bar(bar, found[-1], left, y)
    height = 2 * _EDGE + _ROW * (len(found) + 1) + _RULE
    wide = max(right, _EDGE + svg.width(head)) + _EDGE
    return svg.picture(wide, height, f"{quantity} by source", _in_words(quantity, found), body)


def rows(parts: Sequence[tuple[str, Amount]], unit: str = "") -> list[Bar]:
    """A bar for each part from where the one before it ends, the first from zero; then their sum, from zero."""
    values = [a.value for _, a in parts]
    total = Amount(plainest(sum(values[1:], values[0])), parts[0][1].dimension)
    if any(isinstance(v, complex) for v in values):
        listed = [Bar(name, shown(a, unit, _FIGURES), None, None) for name, a in parts]
        return [*listed, Bar("total", shown(total, unit, _FIGURES), None, None)]
    ends = [float(x) for x in accumulate(v for v in values if not isinstance(v, complex))]
    low, high = min(0.0, *ends), max(0.0, *ends)
    places = [(x - low) / ((high - low) or 1.0) for x in (0.0, *ends)]
    reach = pairwise(places)
    found = [Bar(name, signed(a, unit), a0, a1) for (name, a), (a0, a1) in zip(parts, reach, strict=True)]
    return [*found, Bar("total", shown(total, unit, _FIGURES), places[0], places[-1])]


def signed(a: Amount, unit: str) -> str:
    """A change with its sign."""
    text = shown(a, unit, _FIGURES)
    return text if text.startswith("−") or not a.value else f"+{text}"


def cut(text: str, longest: int) -> str:
    """A text of at most so many characters."""
    return text if len(text) <= longest else text[: longest - 1] + "…"


def _in_words(quantity: str, found: Sequence[Bar]) -> str:
    *each, total = found
    return f"{quantity}: " + ", ".join(f"due to {bar.name} {bar.value}" for bar in each) + f"; total {total.value}"


# --- one row --------------------------------------------------------------------------------------------------------


def _bar(bar: Bar, total: Bar, left: float, y: float) -> list[str]:
    """A bar with its hatching and tip, the scale's zero, and the line down to where the next one begins."""
    if bar.start is None or bar.end is None or total.start is None:
        return []
    zero, a, b = (left + _LENGTH * x for x in (total.start, bar.start, bar.end))
    low, high, top = min(a, b), max(a, b), y + (_ROW - _THICK) / 2
    axis = svg.segment(zero, y, zero, y + _ROW, 0.6)
    if bar is total:
        return [axis, svg.solid(_outline(low, high, top + 2.0, _THICK - 4.0))]
    onward = svg.segment(b, top, b, top + _ROW, 0.6)
    if high - low < 0.5:
        return [axis, onward]
    side = svg.rectangle(low, top, high - low, _THICK, 0.8)
    return [axis, onward, side, *hatching(low, high, top, b > a), _tip(a, b, top)]


def _outline(low: float, high: float, top: float, height: float) -> str:
    x1, x2 = svg.number(low), svg.number(high)
    return f"M{x1} {svg.number(top)}H{x2}V{svg.number(top + height)}H{x1}z"


def hatching(low: float, high: float, top: float, rising: bool) -> list[str]:
    """Slanting lines inside a bar: rising to the right where a part adds, falling where it takes off."""
    lines, x = "", low - _THICK + _HATCH
    while x < high:
        x1, x2 = max(x, low), min(x + _THICK, high)
        y1, y2 = (top + _THICK - (u - x) if rising else top + (u - x) for u in (x1, x2))
        lines += f"M{svg.number(x1)} {svg.number(y1)}L{svg.number(x2)} {svg.number(y2)}"
        x += _HATCH
    return [svg.path(lines, 0.5)] if lines else []


def _tip(a: float, b: float, top: float) -> str:
    """A filled tip where a bar ends: it points the way that the part counts."""
    back = svg.number(b - min(6.0, abs(b - a)) * (1 if b > a else -1))
    foot, middle, head = (svg.number(top + d) for d in (0.0, _THICK / 2, _THICK))
    return svg.solid(f"M{back} {foot}L{svg.number(b)} {middle}L{back} {head}z")
