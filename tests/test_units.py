"""The table of units against pint, which is the authority; printed digits against decimal arithmetic; characters that look alike."""

from __future__ import annotations

import math
from decimal import ROUND_HALF_UP, Context, Decimal
from fractions import Fraction

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from calccheck import check_text
from calccheck.formula import Number
from calccheck.read.expression import parse
from calccheck.source import whole
from calccheck.units import (
    AMPERE,
    BEYOND,
    KELVIN,
    NONE,
    OHM,
    UNITS,
    VOLT,
    WATT,
    beyond_table,
    digits,
    power,
    printed,
    times,
    unit_of,
    words,
)

REGISTRY = pint.UnitRegistry(non_int_type=Fraction)

# SI Brochure, 9th edition, table 7 (from memory), by pint's long names
PREFIXES = {
    "T": "tera", "G": "giga", "M": "mega", "k": "kilo", "": "", "m": "milli", "µ": "micro", "u": "micro", "n": "nano",
    "p": "pico", "f": "femto",
}  # fmt: skip
ALL = list(PREFIXES)
LENGTHS = [*ALL, "c", "d"]
PREFIXES |= {"c": "centi", "d": "deci"}

# symbol: pint's name for it, and the prefixes that the table offers
SYMBOLS = {
    "V": ("volt", ALL), "A": ("ampere", ALL), "Ω": ("ohm", ALL), "ohm": ("ohm", ALL), "S": ("siemens", ALL),
    "W": ("watt", ALL), "VA": ("volt*ampere", ALL), "var": ("volt*ampere", ALL), "F": ("farad", ALL), "H": ("henry", ALL),
    "Hz": ("hertz", ALL), "s": ("second", ALL), "min": ("minute", [""]), "h": ("hour", [""]), "d": ("day", [""]),
    "C": ("coulomb", ALL), "Ah": ("ampere*hour", ALL), "J": ("joule", ALL), "Wh": ("watt*hour", ALL),
    "m": ("meter", LENGTHS), "g": ("gram", ["", "k", "m", "µ", "u"]), "N": ("newton", ALL), "Pa": ("pascal", ALL),
    "bar": ("bar", ["", "m"]), "K": ("kelvin", ["", "m"]), "°C": ("delta_degree_Celsius", [""]), "%": ("percent", [""]),
    "ppm": ("ppm", [""]), "dB": ("dimensionless", [""]), "°": ("degree", [""]), "rad": ("radian", ["", "m"]),
}  # fmt: skip
EXPECTED = {prefix + symbol: (prefix, name) for symbol, (name, prefixes) in SYMBOLS.items() for prefix in prefixes}


# dB stands in the table as a mark on a number; what it comes to is arithmetic's, not a factor's.


def in_pint(prefix: str, name: str) -> pint.Quantity:
    """One such unit in SI base units; the prefix multiplies the first factor."""
    return REGISTRY.Quantity(Fraction(1), PREFIXES[prefix] + name).to_base_units()


def dimensionality(dimension: tuple) -> dict:
    """A dimension in volts, amperes, seconds, metres and kelvins, as pint counts it."""
    unit = REGISTRY.Quantity(Fraction(1), "")
    for name, exponent in zip(("volt", "ampere", "second", "meter", "kelvin"), dimension, strict=True):
        unit = unit * REGISTRY.Quantity(Fraction(1), name) ** exponent
    return dict(unit.dimensionality)


def test_the_table_holds_these_units_and_no_others() -> None:
    assert set(UNITS) == set(EXPECTED)


@pytest.mark.parametrize("text", sorted(EXPECTED))
def test_a_unit_is_what_pint_says(text: str) -> None:
    expected, unit = in_pint(*EXPECTED[text]), UNITS[text]
    assert unit.text == text
    assert dict(expected.dimensionality) == dimensionality(unit.dimension)
    if text == "°":  # π is a float either way
        assert float(unit.factor) == pytest.approx(float(expected.magnitude), rel=1e-15)
    else:
        assert unit.factor == Fraction(expected.magnitude), "exact, not to the precision of a float"
    assert unit.celsius is (text == "°C")


# --- what pint alone would read wrongly -----------------------------------------------------------------------------


def test_traps_of_pint_are_real() -> None:
    """Should one of these fail, pint has changed, and a reason for our own table is gone."""
    plain = pint.UnitRegistry()
    assert plain.Quantity("1k").to_base_units().magnitude < 1e-20  # the Boltzmann constant
    assert plain.Quantity(1, "Rs").to_base_units().magnitude == pytest.approx(1e27)  # ronnaseconds
    assert plain.Quantity(0, "degF").to_base_units().magnitude > 255  # a zero point, not a size
    assert plain.Quantity(3, "dB").to_base_units().magnitude == pytest.approx(10**0.3)
    assert plain.Quantity(1, "mil").dimensionality == {}  # an angle, not a thousandth of an inch


@pytest.mark.parametrize("word", ["k", "M", "Rs", "RL", "Rt", "Rb", "mu", "pi", "tau", "degF", "celsius", "in", "foo"])
def test_a_word_that_an_engineer_does_not_read_as_a_unit_is_none(word: str) -> None:
    assert word not in UNITS
    assert beyond_table(word) is None


def test_an_unknown_name_behind_a_number_stays_unknown() -> None:
    """Rs is no part of this circuit: the claim is in doubt, it is not wrong by 27 powers of ten."""
    report = check_text(
        "a.md", "```circuit\nreference com\nV1: 1 V, a to com\nR1: 2 Ω, a to com\n```\n`V_a = 2 Rs × 1 A = 1 V`\n"
    )
    assert [j.verdict for j in report.claims] == ["unchecked"]
    assert "Rs is no name" in report.claims[0].message


# Exact by definition: the international yard and pound (1959), CODATA 2022 for eV, CGPM 1954 for atm; from memory.
HANDBOOK = {
    "inch": "0.0254", "ft": "0.3048", "yd": "0.9144", "mi": "1609.344",
    "lb": "0.45359237", "oz": "0.028349523125", "lbf": "4.4482216152605", "kgf": "9.80665", "psi": "6894.757293168",
    "atm": "101325", "torr": "133.32236842", "rpm": "0.10471975511966", "mph": "0.44704", "knot": "0.51444444444",
    "eV": "1.602176634e-19",
}  # fmt: skip


@pytest.mark.parametrize("word", sorted(HANDBOOK))
def test_units_beyond_the_table(word: str) -> None:
    unit = beyond_table(word)
    assert unit is not None
    assert float(unit.factor) == pytest.approx(float(HANDBOOK[word]), rel=1e-9)
    assert dimensionality(unit.dimension) == dict(REGISTRY.Quantity(Fraction(1), word).dimensionality)


def test_every_unit_beyond_the_table_is_held_here() -> None:
    assert set(BEYOND) == set(HANDBOOK)


# --- units put together ---------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "name"),
    [("mm²", "millimeter**2"), ("V/ms", "volt/millisecond"), ("Ω·mm²/m", "ohm*millimeter**2/meter"), ("J/(kg·K)", "joule/kilogram/kelvin"),
     ("nV/Hz", "nanovolt/hertz"), ("mA²", "milliampere**2"), ("kΩ^2", "kiloohm**2"), ("s⁻¹", "1/second"), ("%/K", "percent/kelvin"),
     ("ppm/K", "ppm/kelvin"), ("W/m²", "watt/meter**2"), ("mΩ·m", "milliohm*meter")],
)  # fmt: skip
def test_compound_units_by_pint(text: str, name: str) -> None:
    node = parse(whole(f"1 {text}"))
    expected = REGISTRY.Quantity(Fraction(1), name).to_base_units()
    assert isinstance(node, Number)
    assert node.unit.factor == Fraction(expected.magnitude)
    assert dimensionality(node.unit.dimension) == dict(expected.dimensionality)


@given(st.sampled_from(sorted(UNITS)), st.sampled_from(sorted(UNITS)), st.integers(-3, 3).filter(bool))
def test_products_quotients_and_powers_multiply_factors_and_add_exponents(a: str, b: str, n: int) -> None:
    first, second = UNITS[a], UNITS[b]
    product, quotient, raised = times(first, second), times(first, second, -1), power(first, n)
    assert product.factor == first.factor * second.factor
    assert quotient.factor == first.factor / second.factor
    assert raised.factor == first.factor**n
    for k in range(5):
        assert product.dimension[k] == first.dimension[k] + second.dimension[k]
        assert quotient.dimension[k] == first.dimension[k] - second.dimension[k]
        assert raised.dimension[k] == n * first.dimension[k]


# --- characters that look alike (Unicode 15, names as in the code charts) --------------------------------------------


@pytest.mark.parametrize(
    ("written", "same"),
    [("4.7 \u2126", "4.7 Ω"), ("3 \u00b5A", "3 uA"), ("3 \u03bcA", "3 µA"), ("\u22122 V", "-2 V"), ("\u20102 V", "-2 V"),
     ("90\u00ba", "90°"), ("1\u2009000 V", "1000 V"), ("1\u202f000\u202f000 V", "1000000 V"), ("12\u00a0500 V", "12500 V")],
)  # fmt: skip
def test_look_alike_characters_are_read_as_what_they_look_like(written: str, same: str) -> None:
    one, other = (check_text("a.md", f"```working\ngiven x = {text}\n```\n").claims[0] for text in (written, same))
    assert one.verdict == other.verdict == "given"
    assert one.claimed == other.claimed


# --- printing -------------------------------------------------------------------------------------------------------


def rounded(value: Fraction, figures: int) -> Decimal:
    """To significant figures, half away from zero, by decimal arithmetic with places to spare."""
    exact = Context(prec=80).divide(Decimal(value.numerator), Decimal(value.denominator))
    return Context(prec=figures, rounding=ROUND_HALF_UP).plus(exact)


VALUES = st.fractions(Fraction(-(10**9)), Fraction(10**9), max_denominator=10**7).filter(bool)


@given(VALUES, st.integers(1, 12))
def test_digits_by_decimal_arithmetic(value: Fraction, figures: int) -> None:
    text = digits(value, figures)
    shown = Decimal(text)
    if "e" in text:  # worked by floating point, for values that are far from one
        assert abs(shown - rounded(value, figures)) <= abs(shown) * Decimal(10) ** (1 - figures)
    else:
        assert shown == rounded(value, figures)


@pytest.mark.parametrize(
    ("value", "figures", "text"),
    [("0", 4, "0"), ("0.025", 1, "0.03"), ("0.035", 1, "0.04"), ("-0.025", 1, "-0.03"), ("2.664634", 6, "2.66463"),
     ("12.5", 6, "12.5"), ("12.500001", 4, "12.50"), ("1195", 3, "1200"), ("99.996", 4, "100.00"), ("8", 3, "8"),
     ("0.00001234", 3, "0.0000123"), ("0.000001234", 3, "1.23e-06"), ("12345678", 3, "1.23e+07")],
)  # fmt: skip
def test_digits_by_hand(value: str, figures: int, text: str) -> None:
    assert digits(Fraction(value), figures) == text


def test_digits_of_what_is_no_number_and_of_more_figures_than_any_context_holds() -> None:
    assert digits(math.inf, 4) == "inf"
    assert digits(math.nan, 4) == "nan"
    assert digits(Fraction(1, 3), 5000) == "0." + "3" * 5000
    assert digits(Fraction(2, 3), 60) == "0." + "6" * 59 + "7"


@pytest.mark.parametrize(
    ("value", "dimension", "like", "text"),
    [("2.664634", AMPERE, "", "2.66463 A"), ("0.5941", OHM, "", "594.1 mΩ"), ("0.5941", OHM, "Ω", "0.5941 Ω"),
     ("-0.00437", WATT, "", "−4.37 mW"), ("4700", OHM, "", "4.7 kΩ"), ("0", VOLT, "", "0 V"), ("0", VOLT, "mV", "0 mV"),
     ("0.0141", NONE, "%", "1.41 %"), ("1e-15", VOLT, "", "1 fV"), ("1e-18", VOLT, "", "0.001 fV"), ("0.03", KELVIN, "", "0.03 K"),
     ("2.5e13", OHM, "", "25 TΩ"), ("3", VOLT, "A", "3 V")],
)  # fmt: skip
def test_printed_as_engineers_do(value: str, dimension: tuple, like: str, text: str) -> None:
    assert printed(Fraction(value), dimension, like=like) == text


@given(VALUES, st.sampled_from(["V", "A", "Ω", "W", "F", "H", "s", "Hz", "S"]), st.integers(2, 9))
def test_a_printed_value_read_back_is_the_value_rounded(value: Fraction, symbol: str, figures: int) -> None:
    dimension = UNITS[symbol].dimension
    number, _, unit = printed(value, dimension, figures).replace("−", "-").partition(" ")
    assert unit in UNITS and UNITS[unit].dimension == dimension
    read = Fraction(number) * UNITS[unit].factor
    assert abs(read - value) <= abs(value) / Fraction(10) ** (figures - 1) / 2 * (1 + Fraction(1, 10**9))


def test_dimensions_in_words() -> None:
    assert [words(UNITS[u].dimension) for u in ("V", "kΩ", "Wh", "mm", "%")] == [
        "a voltage", "a resistance", "an energy", "a length", "a plain number",
    ]  # fmt: skip
    assert words(times(UNITS["V"], UNITS["s"]).dimension) == "a quantity in V·s"
    assert unit_of((0, 0, -2, 1, 0)) == "m/s²"
    assert unit_of((Fraction(1, 2), 0, 0, 0, 0)) == "V^(1/2)"
