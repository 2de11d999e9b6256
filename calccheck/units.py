"""Units and digits: what a number with its unit is in SI, and how an engineer prints an SI value.

The table below holds the trade's units as exact factors; ``tests/test_units.py`` holds every row against pint, which is the
authority. Pint itself is imported only for a unit that the table lacks, because its import costs more than all else here.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from decimal import ROUND_HALF_UP, Decimal, localcontext
from fractions import Fraction
from functools import lru_cache
from typing import Any

# Exponents of volt, ampere, second, metre, kelvin. Halves occur under a root.
Dimension = tuple[int | Fraction, ...]

NONE: Dimension = (0, 0, 0, 0, 0)
VOLT: Dimension = (1, 0, 0, 0, 0)
AMPERE: Dimension = (0, 1, 0, 0, 0)
OHM: Dimension = (1, -1, 0, 0, 0)
SIEMENS: Dimension = (-1, 1, 0, 0, 0)
WATT: Dimension = (1, 1, 0, 0, 0)
FARAD: Dimension = (-1, 1, 1, 0, 0)
HENRY: Dimension = (1, -1, 1, 0, 0)
SECOND: Dimension = (0, 0, 1, 0, 0)
HERTZ: Dimension = (0, 0, -1, 0, 0)
METRE: Dimension = (0, 0, 0, 1, 0)
KELVIN: Dimension = (0, 0, 0, 0, 1)

DIMENSION_WORDS: dict[Dimension, str] = {
    NONE: "a plain number",
    VOLT: "a voltage",
    AMPERE: "a current",
    OHM: "a resistance",
    SIEMENS: "a conductance",
    WATT: "a power",
    FARAD: "a capacitance",
    HENRY: "an inductance",
    SECOND: "a time",
    HERTZ: "a frequency",
    METRE: "a length",
    KELVIN: "a temperature difference",
    (0, 1, 1, 0, 0): "a charge",
    (1, 1, 1, 0, 0): "an energy",
    (0, 0, 0, 2, 0): "an area",
}

# SI prefixes (SI Brochure, 9th edition, table 7). u is the trade's ASCII µ.
PREFIXES: dict[str, int] = {
    "T": 12, "G": 9, "M": 6, "k": 3, "": 0, "m": -3, "µ": -6, "u": -6, "n": -9, "p": -12, "f": -15,
}  # fmt: skip
_LENGTH_PREFIXES = {**PREFIXES, "c": -2, "d": -1}
_DEGREE = Fraction(math.pi) / 180

# symbol, factor to coherent SI, dimension, prefixes that the trade puts before it
_ROWS: list[tuple[str, Fraction, Dimension, dict[str, int]]] = [
    ("V", Fraction(1), VOLT, PREFIXES),
    ("A", Fraction(1), AMPERE, PREFIXES),
    ("Ω", Fraction(1), OHM, PREFIXES),
    ("ohm", Fraction(1), OHM, PREFIXES),
    ("S", Fraction(1), SIEMENS, PREFIXES),
    ("W", Fraction(1), WATT, PREFIXES),
    ("VA", Fraction(1), WATT, PREFIXES),
    ("var", Fraction(1), WATT, PREFIXES),
    ("F", Fraction(1), FARAD, PREFIXES),
    ("H", Fraction(1), HENRY, PREFIXES),
    ("Hz", Fraction(1), HERTZ, PREFIXES),
    ("s", Fraction(1), SECOND, PREFIXES),
    ("min", Fraction(60), SECOND, {"": 0}),
    ("h", Fraction(3600), SECOND, {"": 0}),
    ("d", Fraction(86400), SECOND, {"": 0}),
    ("C", Fraction(1), (0, 1, 1, 0, 0), PREFIXES),
    ("Ah", Fraction(3600), (0, 1, 1, 0, 0), PREFIXES),
    ("J", Fraction(1), (1, 1, 1, 0, 0), PREFIXES),
    ("Wh", Fraction(3600), (1, 1, 1, 0, 0), PREFIXES),
    ("m", Fraction(1), METRE, _LENGTH_PREFIXES),
    ("g", Fraction(1, 1000), (1, 1, 3, -2, 0), {"": 0, "k": 3, "m": -3, "µ": -6, "u": -6}),
    ("N", Fraction(1), (1, 1, 1, -1, 0), PREFIXES),
    ("Pa", Fraction(1), (1, 1, 1, -3, 0), PREFIXES),
    ("bar", Fraction(100000), (1, 1, 1, -3, 0), {"": 0, "m": -3}),
    ("K", Fraction(1), KELVIN, {"": 0, "m": -3}),
    ("°C", Fraction(1), KELVIN, {"": 0}),
    ("%", Fraction(1, 100), NONE, {"": 0}),
    ("ppm", Fraction(1, 10**6), NONE, {"": 0}),
    ("°", _DEGREE, NONE, {"": 0}),
    ("rad", Fraction(1), NONE, {"": 0, "m": -3}),
    ("dB", Fraction(1), NONE, {"": 0}),
]


@dataclass(frozen=True, slots=True)
class Unit:
    """A unit as written, its exact factor to coherent SI and its dimension. ``°C`` alone also has a zero point."""

    text: str
    factor: Fraction
    dimension: Dimension
    celsius: bool = False


def _table() -> dict[str, Unit]:
    table: dict[str, Unit] = {}
    for symbol, factor, dimension, prefixes in _ROWS:
        for prefix, power in prefixes.items():
            text = prefix + symbol
            table.setdefault(text, Unit(text, factor * Fraction(10) ** power, dimension, text == "°C"))
    return table


UNITS: dict[str, Unit] = _table()
PLAIN = Unit("", Fraction(1), NONE)

# Characters that look alike and are read alike: ohm sign, the two micro signs, minus signs, masculine ordinal for degree.
LOOKALIKES = str.maketrans({"\u2126": "Ω", "\u03bc": "µ", "\u2212": "-", "\u2010": "-", "\u2011": "-", "\u00ba": "°"})


_RAISED = str.maketrans("0123456789-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻")


def power(unit: Unit, exponent: int) -> Unit:
    """The unit, prefix and all, raised to a whole exponent: ``mm²`` is (mm)²."""
    dimension = tuple(d * exponent for d in unit.dimension)
    mark = "" if exponent == 1 else str(exponent).translate(_RAISED)
    return Unit(unit.text + mark, unit.factor**exponent, dimension)


def times(a: Unit, b: Unit, sign: int = 1) -> Unit:
    """The product ``a·b``, or the quotient ``a/b`` for ``sign`` −1."""
    dimension = tuple(x + sign * y for x, y in zip(a.dimension, b.dimension, strict=True))
    return Unit(f"{a.text}{'·' if sign > 0 else '/'}{b.text}", a.factor * b.factor**sign, dimension)


# Words that pint is asked about. It would read others too, but not as an engineer does: Rs as ronnaseconds, mu as a mass,
# mil as an angle, 20 degF as a multiple of 256 K; and an unknown name is to stay unknown. Units of which there are several
# (hp, gal, acre, cal, Btu) are left out.
BEYOND = {
    "inch", "ft", "yd", "mi", "lb", "oz", "lbf", "kgf", "psi", "atm", "torr", "rpm", "mph", "knot", "eV",
}  # fmt: skip


@lru_cache(maxsize=len(BEYOND))
def beyond_table(word: str) -> Unit | None:
    """A unit that the table lacks, by pint: ``ft``, ``rpm``, ``lbf``. ``None`` for any other word."""
    if word not in BEYOND:
        return None
    quantity = _registry().Quantity(1, word).to_base_units()
    dimension = _from_pint({name: int(exponent) for name, exponent in quantity.dimensionality.items()})
    return Unit(word, Fraction(float(quantity.magnitude)), dimension)


@lru_cache(maxsize=1)
def _registry() -> Any:
    import pint  # late: 0.1 s

    return pint.UnitRegistry()


def _from_pint(powers: dict[str, int]) -> Dimension:
    """Mass, length, time, current, temperature exponents in terms of V, A, s, m, K: kg is V·A·s³/m²."""
    mass, length, time, current, heat = (
        powers.get(k, 0) for k in ("[mass]", "[length]", "[time]", "[current]", "[temperature]")
    )
    return (mass, mass + current, 3 * mass + time, length - 2 * mass, heat)


# --- printing -------------------------------------------------------------------------------------------------------

_NAMED: dict[Dimension, str] = {
    VOLT: "V", AMPERE: "A", OHM: "Ω", SIEMENS: "S", WATT: "W", FARAD: "F", HENRY: "H", SECOND: "s", HERTZ: "Hz",
    (0, 1, 1, 0, 0): "C", (1, 1, 1, 0, 0): "J", METRE: "m", KELVIN: "K", (1, 1, 1, -1, 0): "N", NONE: "",
}  # fmt: skip
_STEPS = {12: "T", 9: "G", 6: "M", 3: "k", 0: "", -3: "m", -6: "µ", -9: "n", -12: "p", -15: "f"}


def unit_of(dimension: Dimension) -> str:
    """The coherent unit of a dimension as the trade writes it: ``V``, ``Ω``, ``V·s/m²``."""
    if dimension in _NAMED:
        return _NAMED[dimension]
    over = [_factor(s, e) for s, e in zip("VAsmK", dimension, strict=True) if e > 0]
    under = [_factor(s, -e) for s, e in zip("VAsmK", dimension, strict=True) if e < 0]
    return ("·".join(over) or "1") + ("/" + "·".join(under) if under else "")


def _factor(symbol: str, exponent: int | Fraction) -> str:
    if exponent == int(exponent):
        return symbol + ("" if exponent == 1 else str(exponent).translate(_RAISED))
    return f"{symbol}^({exponent})"


def words(dimension: Dimension) -> str:
    """What a dimension is in the trade's words: ``a voltage``, ``a quantity in V·s``."""
    return DIMENSION_WORDS.get(dimension) or f"a quantity in {unit_of(dimension)}"


def digits(value: float | Fraction, figures: int) -> str:
    """A number rounded to significant figures, half away from zero, without exponent where it stays readable."""
    if value == 0:
        return "0"
    with localcontext(prec=figures + 40, rounding=ROUND_HALF_UP):
        exact = Decimal(value) if isinstance(value, float) else Decimal(value.numerator) / Decimal(value.denominator)
        if not exact.is_finite():
            return str(float(value))
        place = exact.adjusted() - figures + 1
        rounded = exact.quantize(Decimal(1).scaleb(place)) if abs(exact.adjusted()) < 25 else +exact
        if rounded == exact and place < 0:
            rounded = rounded.normalize()  # an exact value needs no zeros at its end
    if -5 <= exact.adjusted() < 7:
        return f"{rounded:f}"
    return f"{float(exact):.{figures - 1}e}"


def printed(value: float | Fraction, dimension: Dimension, figures: int = 6, like: Unit | str = PLAIN) -> str:
    """A value the way engineers print it: ``2.66463 A``, ``594.1 mΩ``; in the unit ``like`` where that fits."""
    like = UNITS.get(like, PLAIN) if isinstance(like, str) else like
    if like.dimension == dimension and not like.celsius and like.text:
        gap = "" if like.text == "°" else " "  # SI Brochure, 9th edition, 5.4.3
        return f"{digits(Fraction(value) / like.factor, figures)}{gap}{like.text}".replace("-", "−")
    symbol = unit_of(dimension)
    if symbol not in UNITS or value == 0 or not math.isfinite(float(value)):
        return f"{digits(value, figures)} {symbol}".strip().replace("-", "−")
    step = min(12, max(-15, 3 * math.floor(math.log10(abs(float(value))) / 3))) if symbol not in ("K", "") else 0
    return f"{digits(Fraction(value) / Fraction(10) ** step, figures)} {_STEPS[step]}{symbol}".replace("-", "−")
