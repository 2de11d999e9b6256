"""Preferred values of resistors and capacitors, IEC 60063:2015: the series and a value's neighbours in them."""

from __future__ import annotations

from fractions import Fraction

_E24 = (10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91)


def _three_figures(count: int) -> tuple[int, ...]:
    """E48, E96 and E192: powers of the root of ten to three figures; 9.20 for 9.19 is the standard's own exception."""
    values = [round(100 * 10 ** (k / count)) for k in range(count)]
    return tuple(920 if v == 919 else v for v in values)


SERIES: dict[str, tuple[int, ...]] = {
    "E3": _E24[::8], "E6": _E24[::4], "E12": _E24[::2], "E24": _E24,
    "E48": _three_figures(48), "E96": _three_figures(96), "E192": _three_figures(192),
}  # fmt: skip


def between(value: Fraction, series: str) -> tuple[Fraction, Fraction] | None:
    """The values of a series next below and next above one that is not in it; nothing for one that is. For values above zero."""
    digits = SERIES[series]
    decade = _decade(value, len(str(digits[0])))
    found = value / decade
    if found in digits:
        return None
    below = max((d for d in digits if d < found), default=0)
    above = min((d for d in digits if d > found), default=10 * digits[0])
    return below * decade, above * decade


def neighbours(value: Fraction) -> tuple[Fraction, ...]:
    """The next lower and next higher values in E12 and in E24, or else in E96 or E192; nothing for no preferred value."""
    found = [v for name in ("E12", "E24") for v in _beside(value, SERIES[name])]
    return tuple(dict.fromkeys(found or _beside(value, SERIES["E96"]) or _beside(value, SERIES["E192"])))


def _beside(value: Fraction, series: tuple[int, ...]) -> tuple[Fraction, ...]:
    decade = _decade(value, len(str(series[0])))
    digits = value / decade
    if digits.denominator != 1 or int(digits) not in series:
        return ()
    at = series.index(int(digits))
    low = series[at - 1] if at else Fraction(series[-1], 10)
    high = series[at + 1] if at + 1 < len(series) else series[0] * 10
    return low * decade, high * decade


def _decade(value: Fraction, figures: int) -> Fraction:
    """The power of ten in which a value above zero has that many figures before the point."""
    power = Fraction(1)
    while value / power >= 10**figures:
        power *= 10
    while value / power < 10 ** (figures - 1):
        power /= 10
    return power
