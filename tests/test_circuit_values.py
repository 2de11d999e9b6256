"""Phasors, frequencies, free symbols in circuit blocks: what each value is read as, and what is said where it cannot be read.

Expected values follow from the sheet language (docs/sheet-language.md) by hand; angles by cmath of the standard library.
"""

from __future__ import annotations

import cmath
import math
from fractions import Fraction

import pytest
from circuit_lines import kinds, placed, reading
from hypothesis import given
from hypothesis import strategies as st

from calccheck import check_text
from calccheck.arithmetic import Amount, evaluate
from calccheck.formula import Reference, references
from calccheck.model import UNSTATED, Control, Element
from calccheck.units import AMPERE, FARAD, NONE, OHM, SIEMENS, VOLT, Dimension

HERE = "Rs: 50 Ω, a to gnd\nRt: 10 Ω, b to gnd\n"


def part(line: str, before: str = "", **givens: Amount) -> Element:
    """The part of a line that is read without any finding, in a circuit that has the nodes a, b, gnd and the resistor Rs."""
    _, result = reading(f"{HERE}{before}{line}", givens)
    assert [f.message for f in result.findings] == []
    return result.circuit.elements[-1]


def told(lines: str, hertz: Fraction = Fraction(0), **givens: Amount) -> list[tuple[str, str, str]]:
    """Kind, place and message of every finding in a block."""
    sheet, result = reading(HERE + lines, givens, hertz=hertz)
    assert result.circuit.problems == tuple(f for f in result.findings if f.severity == "error")
    return [(f.kind, placed(sheet, f.span)[2], f.message) for f in result.findings]


# --- phasors and impedances -----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("line", "kind", "phasor", "dimension"),
    [
        ("V1: 10 V ∠ 30°, a to b, 50 Hz", "voltage source", cmath.rect(10, math.radians(30)), VOLT),
        ("V1: 10 ∠ 0.5 rad V, a to b, 50 Hz", "voltage source", cmath.rect(10, 0.5), VOLT),
        ("V1: (3 + j4) V, a to b, 50 Hz", "voltage source", 3 + 4j, VOLT),
        ("V1: 3 + j4 V, a to b, 50 Hz", "voltage source", 3 + 4j, VOLT),
        ("I1: 20 mA ∠ −90°, a to b, 50 Hz", "current source", -0.02j, AMPERE),
        ("V1: −12 V, a to b, 50 Hz", "voltage source", -12, VOLT),
        ("Z1: (30 + j40) Ω, a to b", "impedance", 30 + 40j, OHM),
        ("Z1: −j40.5 kΩ, a to b", "impedance", -40500j, OHM),
        ("Z1: 50 Ω ∠ −30°, a to b", "impedance", cmath.rect(50, math.radians(-30)), OHM),
        ("Z1: (30 + j0) Ω, a to b", "impedance", 30, OHM),
        ("Z1: (3 + j4) mS, a to b", "impedance", 120 - 160j, SIEMENS),  # 1/(3 + j4) = (3 − j4)/25
    ],
)
def test_values_with_an_angle(line: str, kind: str, phasor: complex, dimension: Dimension) -> None:
    element = part(line)
    assert (element.kind, element.value) == (kind, None)
    assert element.phasor == pytest.approx(phasor)
    assert isinstance(element.phasor, complex)
    assert element.stated is not None and element.stated.dimension == dimension
    assert element.frequency == (Fraction(50) if "Hz" in line else None)


def test_a_gain_may_be_complex() -> None:
    element = part("E1: (2 + j3) * V_{a,b}, b to gnd")
    assert (element.kind, element.value, element.phasor, element.control) == (
        "controlled voltage source", None, 2 + 3j, Control("a", "b"),
    )  # fmt: skip


def test_phasors_from_givens() -> None:
    assert part("Z1: Z, a to b", Z=Amount(3 + 4j, OHM)).phasor == 3 + 4j
    assert part("V1: 2*Vs, a to b, 50 Hz", Vs=Amount(1j, VOLT)).phasor == 2j
    assert part("E1: Z / (1 Ω) * V_a, b to gnd", Z=Amount(3 + 4j, OHM)).phasor == 3 + 4j
    assert told("C1: c, a to b", c=Amount(1j, FARAD)) == [
        ("circuit-line", "c", "c is complex; a capacitance is a plain value")
    ]


# --- frequencies ----------------------------------------------------------------------------------------------------


def frequencies(lines: str, hertz: Fraction = Fraction(0)) -> dict[str, Fraction | None]:
    _, result = reading(HERE + lines, hertz=hertz)
    assert result.findings == ()
    return {e.name: e.frequency for e in result.circuit.elements if e.kind.endswith("source")}


@pytest.mark.parametrize(
    ("text", "hertz"),
    [
        ("50 Hz", Fraction(50)),
        ("1 kHz", Fraction(1000)),
        ("2.5MHz", Fraction(2_500_000)),
        ("16.7 Hz", Fraction("16.7")),
    ],
)
def test_a_frequency_behind_the_nodes(text: str, hertz: Fraction) -> None:
    element = part(f"I1: 3 mA, a to b, {text}")
    assert (element.frequency, element.phasor, element.value) == (hertz, 0.003, None)
    assert element.stated == Amount(Fraction(3, 1000), AMPERE)


def test_an_angular_frequency() -> None:
    found = part("V1: 20 V ∠ 60°, a to b, 50 rad/s").frequency
    assert found is not None and float(found) == pytest.approx(50 / (2 * math.pi))


def test_neither_phasor_nor_frequency_is_direct_current() -> None:
    assert part("V1: 12 V, a to b").frequency is None


def test_a_phasor_belongs_to_the_one_frequency() -> None:
    phasor = "V1: 10 V ∠ 30°, a to b\nC1: 1 nF, a to b\n"
    assert frequencies(phasor, Fraction(60)) == {"V1": 60}
    assert frequencies(phasor + "V2: 12 V, a to b, 50 Hz") == {"V1": 50, "V2": 50}
    assert frequencies(phasor + "V2: 12 V, a to b, 50 Hz", Fraction(60)) == {"V1": 60, "V2": 50}
    assert frequencies(phasor + "V2: 12 V, a to b", Fraction(60)) == {"V1": 60, "V2": None}


def test_no_frequency_is_needed_without_reactances() -> None:
    assert frequencies("V1: 10 V ∠ 30°, a to b\nZ1: (3 + j4) Ω, a to b\nV2: 5 V, b to gnd") == {
        "V1": UNSTATED,
        "V2": None,
    }


def test_a_phasor_whose_frequency_nothing_tells() -> None:
    found = told("V1: 10 V ∠ 30°, a to b\nV2: 10 V ∠ 150°, a to b\nL1: 1 mH, a to b")
    assert [(k, place) for k, place, _ in found] == [("circuit-line", "V1: 10 V ∠ 30°, a to b")]
    assert "V1 and V2 have no frequency, on which L1 depends; state frequency:" in found[0][2]
    found = told("V1: 10 V ∠ 30°, a to b\nV2: 1 V, a to b, 50 Hz\nV3: 1 V, a to b, 60 Hz")
    assert [place for _, place, _ in found] == ["V1: 10 V ∠ 30°, a to b"]
    assert "V1 has no frequency, and this circuit has several (50 Hz, 60 Hz)" in found[0][2]


@pytest.mark.parametrize(
    ("line", "place", "says"),
    [
        ("V1: 10 V ∠ 30°, a to b, 0 Hz", "0 Hz", "a source of no frequency is DC"),
        ("V1: 10 V, a to b, 50 1/s", "50 1/s", "a source's frequency (50 Hz)"),
        ("Z1: (3 + j4) Ω, a to b, 50 Hz", "50 Hz", "a frequency belongs to a source"),
        ("E1: 2 * V_a, b to gnd, 50 Hz", "50 Hz", "a frequency belongs to a source"),
        ("V1: 10 V ∠ 30°, a to b, 50 Hz, 60 Hz", "60 Hz", "expected a tolerance, a rating"),
        ("C1: j4 µF, a to b", "j4 µF", "j4 µF is complex; a capacitance is a plain value"),
        ("Z1: (30 + j40) Ω ±2 Ω, a to b", "±2 Ω", "the tolerance of an impedance is written ±5 %"),
        ("Z1: (30 + jX) Ω, a to b", "jX", "jX reads as one name; part the factors: j × X"),
        ("Z1: jωL Ω, a to b", "jωL", "part the factors: jω × L"),
        ("R1: 2 × πfC Ω, a to b", "πfC", "part the factors: π × fC"),
    ],
)
def test_what_is_said_of_phasors(line: str, place: str, says: str) -> None:
    ((kind, under, message),) = told(line)
    assert (kind, under) == ("circuit-line", place)
    assert says in message


# --- free symbols ---------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("before", "line", "kind", "symbols"),
    [
        ("", "R1: R Ω, a to b", "resistor", {"R": OHM}),
        ("", "R1: 2*R Ω, a to b", "resistor", {"R": OHM}),
        ("", "R1: 2 R Ω, a to b", "resistor", {"R": OHM}),
        ("", "R1: (R/2) Ω, a to b", "resistor", {"R": OHM}),
        ("", "R1: (R ∥ (2*R)) Ω, a to b", "resistor", {"R": OHM}),
        ("", "R1: (R + 2) kΩ, a to b", "resistor", {"R": NONE}),  # added to a number: the unit multiplies both
        ("", "R1: 1/G Ω, a to b", "resistor", {"G": SIEMENS}),
        ("", "G1: G S, a to b", "resistor", {"G": SIEMENS}),
        ("", "V1: Vin V, a to b", "voltage source", {"Vin": VOLT}),
        ("", "I1: 3 * I0 A, a to b", "current source", {"I0": AMPERE}),
        ("", "C1: C F, a to b", "capacitor", {"C": FARAD}),
        ("", "R1: 350 Ω * (1 + x), a to b", "resistor", {"x": NONE}),
        ("", "R1: x * 10 kΩ, a to b", "resistor", {"x": NONE}),
        ("", "R1: R + 5 Ω, a to b", "resistor", {"R": OHM}),
        ("", "R: R Ω, a to b", "resistor", {"R": OHM}),  # a part may be called like its value
        ("R: R Ω, a to b\n", "R1: 2*R Ω, a to b", "resistor", {"R": OHM}),
        ("R0: R Ω, a to b\n", "R1: R*(1 + x) Ω, a to b", "resistor", {"R": OHM, "x": NONE}),
        ("R0: R Ω, a to b\n", "R1: R ∥ 5 Ω, a to b", "resistor", {"R": OHM}),
        ("R0: R Ω, a to b\nR9: (R ∥ Q) Ω, a to b\n", "R1: Q Ω, a to b", "resistor", {"R": OHM, "Q": OHM}),
        ("V0: Vin V, a to b\n", "I1: Vin / (2 kΩ), a to b", "current source", {"Vin": VOLT}),
        ("", "Z1: (30 + j*X) Ω, a to b", "impedance", {"X": NONE}),
        ("R0: X Ω, a to b\n", "Z1: j*X Ω, a to b", "impedance", {"X": OHM}),
        ("", "E1: A * V_{a,b}, b to gnd", "controlled voltage source", {"A": NONE}),
        ("", "G1: gm * V_{a,b} A, a to b", "controlled current source", {"gm": SIEMENS}),
        ("", "H1: r * I_Rs V, a to b", "controlled voltage source", {"r": OHM}),
        ("", "G1: k * V_a / 3 kΩ, a to b", "controlled current source", {"k": NONE}),
        ("", "E1: A * (1 + j) * V_{a,b}, b to gnd", "controlled voltage source", {"A": NONE}),
    ],
)  # fmt: skip
def test_the_dimension_of_a_symbol(before: str, line: str, kind: str, symbols: dict[str, Dimension]) -> None:
    _, result = reading(HERE + before + line)
    assert [f for f in result.findings if f.severity == "error"] == []
    element = result.circuit.elements[-1]
    assert (element.kind, element.value, element.phasor, element.stated) == (kind, None, None, None)
    assert dict(result.circuit.symbols) == symbols
    assert element.formula is not None
    assert {r.word for r in references(element.formula)} <= set(symbols)
    assert element.written == line.partition(": ")[2].split(", ")[0]


def test_symbols_stand_in_the_order_of_the_block() -> None:
    _, result = reading("R1: B*A Ω, a to gnd\nR2: A Ω, a to gnd\nV1: V0 V, a to gnd")
    assert [name for name, _ in result.circuit.symbols] == ["B", "A", "V0"]


def test_a_source_with_a_symbol_and_a_frequency() -> None:
    element = part("V1: Vin V, a to b, 50 Hz")
    assert (element.frequency, element.phasor, element.formula is None) == (50, None, False)
    assert part("V1: (Vin ∠ 30°) V, a to b").frequency == UNSTATED


# a value with symbols, and the amounts of these; a given is the same number without the unit that the value states
FORMULAS = [
    ("R Ω", OHM), ("2*R Ω", OHM), ("R*(1 + 0.5) Ω", OHM), ("(R ∥ (2*R)) Ω", OHM), ("(R/3) Ω", OHM), ("−R V", VOLT), ("R V", VOLT),
    ("(R + 2) kΩ", NONE), ("(1 + R) * 350 Ω", NONE), ("R * T * 10 Ω", NONE), ("5 Ω * (1 + (T + 25) * R)", NONE), ("√R * 3 V", NONE),
]  # fmt: skip


@given(st.sampled_from(FORMULAS), st.fractions(Fraction(1, 10), 10, max_denominator=1000))
def test_a_formula_at_a_number_is_the_value_from_a_given(formula: tuple[str, Dimension], x: Fraction) -> None:
    text, dimension = formula
    third = Amount(Fraction(1, 3))
    symbolic = part(f"X1: {text}, a to b", T=third)
    numeric = part(f"X1: {text}, a to b", T=third, R=Amount(x))

    def lookup(r: Reference) -> Amount:
        assert r.word == "R"
        return Amount(x, dimension)

    assert symbolic.formula is not None and numeric.stated is not None
    amount = evaluate(symbolic.formula, lookup)
    assert (symbolic.kind, amount.dimension) == (numeric.kind, numeric.stated.dimension)
    assert complex(amount.value) == pytest.approx(complex(numeric.stated.value), rel=1e-12)


@pytest.mark.parametrize(
    ("value", "x", "volts"),
    [("A * V_{a,b}", 7, 7), ("2 * A * (V_a + V_a)", 7, 28), ("T * A * V_a", 6, 2), ("√A * 3 * V_a", 4, 6)],
)
def test_the_formula_of_a_gain_is_taken_at_one_volt(value: str, x: int, volts: int) -> None:
    element = part(f"E1: {value}, b to gnd", T=Amount(Fraction(1, 3)))
    assert element.formula is not None
    amount = evaluate(element.formula, lambda r: Amount(Fraction(x)))
    assert (amount.dimension, float(amount.value)) == (VOLT, volts)


def test_a_symbolic_admittance_comes_to_ohms() -> None:
    element = part("Z1: (G + j*0.25) S, a to b")
    assert element.formula is not None
    amount = evaluate(element.formula, lambda r: Amount(Fraction(1, 4)))
    assert (element.kind, amount.dimension, amount.value) == ("impedance", OHM, pytest.approx(2 - 2j))


@pytest.mark.parametrize(
    ("lines", "place", "says"),
    [
        ("R1: 2*GG, a to b", "GG", "GG has no value and 2*GG no unit at its end; given GG = … would give its value"),
        ("R1: P1*Q1 Ω, a to b", "P1*Q1 Ω",
         "nothing tells which of P1 and Q1 is a resistance; it stands alone as the value of some part first: P1 Ω"),
        ("R1: R kΩ, a to b", "R kΩ", "a free symbol stands for the whole quantity, prefix and all; write Ω for kΩ"),
        ("R1: R/2 Ω, a to b", "2 Ω", "put brackets around all that the unit belongs to: (…) Ω"),
        ("R1: R/(1 + x) Ω, a to b", "(1 + x) Ω", "put brackets around all that the unit belongs to: (…) Ω"),
        ("R1: R Ω, a to b\nR2: R V, a to b", "R V", "R V comes out as a resistance, not a voltage"),
        ("R1: 5 Ω nominal, a to b", "nominal", "nominal stands behind a value and has none itself"),
        ("R1: 2*R1 Ω, a to b", "R1", "R1 is the part itself; only the symbol alone may be called like its part: R1 Ω"),
        ("R1: 2*Rs Ω, a to b", "Rs", "Rs is a part; a value is worked from givens"),
        ("R: 2 Ω, a to b\nR2: R Ω, a to b", "R", "R is a part; a value is worked from givens"),
        ("R1: a Ω, a to b", "a", "a is a node; a free symbol is called otherwise"),
        ("R1: P_x Ω, a to b", "P_x", "P_x reads as a quantity; a free symbol is called otherwise"),
        ("V1: V_in V, a to b", "V_in", "V_in: this circuit has no node in"),
        ("R1: R_{a,b} Ω, a to b", "R_{a,b}", "R_{a,b} is no name of a value"),
        ("R1: R due to V Ω, a to b", "R due to V", "is no name of a value; a value is worked from givens and free symbols"),
        ("E1: A * V_a + 1 V, b to gnd", "A * V_a + 1 V", "not proportional"),
        ("E1: A * V_a kV, b to gnd", "A * V_a kV", "write V for kV"),
        ("R1: m Ω, a to b\nR2: 3 m * 2 Ω/m, a to b", "3 m", "m is a name here and a unit"),
    ],
)  # fmt: skip
def test_what_is_said_of_symbols(lines: str, place: str, says: str) -> None:
    ((kind, under, message),) = told(lines)
    assert (kind, under) == ("circuit-line", place)
    assert says in message


def test_dimensions_that_do_not_fit_with_symbols() -> None:
    assert [(k, p) for k, p, _ in told("R1: R Ω, a to b\nR2: R + 3 V, a to b")] == [("dimension", "R + 3 V")]
    assert [(k, p) for k, p, _ in told("R1: 5 Ω*(1 + x), a to b\nR2: x Ω, a to b")] == [("dimension", "1 + x")]


def test_a_literal_by_itself_may_be_in_a_unit_that_a_symbol_is_called_like() -> None:
    _, result = reading("E1: A * V_a, b to gnd\nI1: 3 A, a to gnd\nRb: 1 Ω, b to gnd")
    assert result.findings == ()


def test_symbols_that_differ_only_in_case() -> None:
    sheet, result = reading("R1: R Ω, a to gnd\nR2: 2*r Ω, a to gnd")
    assert kinds(result) == ["letter-case"]
    assert placed(sheet, result.findings[0].span) == (2, 7, "r")


def test_tolerances_of_symbols() -> None:
    assert part("R1: R Ω ±5 %, a to b").tolerance is not None
    assert [k for k, _, _ in told("R1: R Ω ±0.1 V, a to b")] == ["dimension"]
    assert "the tolerance of a gain" in told("E1: A * V_a ±1 V, b to gnd")[0][2]


def test_a_symbol_without_a_value_everywhere_leaves_claims_unchecked() -> None:
    report = check_text("x.md", "```circuit\nV1: 10 V, a to gnd\nR1: √(2 − y) * 5 Ω, a to gnd\n```\n\n`V_a = 10 V`\n")
    assert [j.verdict for j in report.claims] == ["unchecked"]
