"""Circuit blocks: what each line is read as, and what is said, where, of a line that cannot be read.

Expected values follow from the sheet language (docs/sheet-language.md) by hand; value codes are examples of IEC 60062:2016,
from memory; directions are those of the passive sign convention, IEC 60375.
"""

from __future__ import annotations

import math
import sys
from dataclasses import replace
from fractions import Fraction

import pytest
from circuit_lines import kinds, made_reading, placed, reading
from hypothesis import given, settings
from hypothesis import strategies as st

from calccheck.arithmetic import Amount
from calccheck.component_code import component_code
from calccheck.document import blocks
from calccheck.model import Control, Element
from calccheck.read.circuit_block import given_lines, read_circuit
from calccheck.read.markdown import read_page
from calccheck.read.mending import mended
from calccheck.source import Sheet, Span, whole
from calccheck.units import AMPERE, FARAD, OHM, SIEMENS, VOLT, WATT, Dimension

BUS = """reference com
Vb: 12.6 V,          bat to com
Rb: 0.22 Ω ±5 %,     bat to bus
Vp: 14.1 V,          pan to com   # the panel
Rp: 0.68 Ω ±5 %,     pan to bus,   max 5 W

RL: 4.7 Ω,           bus to com"""


def part(line: str, **givens: Amount) -> Element:
    """The part of a line that is read without any finding, in a circuit that has the nodes a, b, gnd and the resistor Rs."""
    _, result = reading(f"Rs: 50 Ω, a to gnd\nRt: 10 Ω, b to gnd\n{line}", givens)
    assert [f.message for f in result.findings] == []
    return result.circuit.elements[-1]


# --- the block as a whole -------------------------------------------------------------------------------------------


def test_the_circuit_of_the_first_page() -> None:
    sheet, result = reading(BUS)
    circuit = result.circuit
    assert result.findings == ()
    assert [(e.name, e.kind, e.plus, e.minus, e.value) for e in circuit.elements] == [
        ("Vb", "voltage source", "bat", "com", Fraction("12.6")),
        ("Rb", "resistor", "bat", "bus", Fraction("0.22")),
        ("Vp", "voltage source", "pan", "com", Fraction("14.1")),
        ("Rp", "resistor", "pan", "bus", Fraction("0.68")),
        ("RL", "resistor", "bus", "com", Fraction("4.7")),
    ]
    assert circuit.reference == "com"
    assert circuit.nodes() == ("bat", "com", "bus", "pan")
    assert sheet.text[circuit.span.start : circuit.span.end] == BUS
    rp = circuit.elements[3]
    assert rp.tolerance is not None
    assert (rp.tolerance.plus, rp.tolerance.minus, rp.tolerance.relative) == (Fraction("0.05"), Fraction("0.05"), True)
    assert placed(sheet, rp.tolerance.span) == (5, 12, "±5 %")
    assert [(r.value, r.dimension, r.text) for r in rp.ratings] == [(5, WATT, "max 5 W")]
    assert placed(sheet, rp.ratings[0].span) == (5, 36, "max 5 W")
    assert placed(sheet, circuit.elements[2].span) == (4, 1, "Vp: 14.1 V,          pan to com")


def test_the_name_and_the_other_statements() -> None:
    _, result = reading("given Tc = 0.0039 /K\nR1: 5 Ω, a to gnd\ncase hot day: R1 open", info="circuit bridge")
    assert result.circuit.name == "bridge"
    assert [g.text for g in result.givens] == ["given Tc = 0.0039 /K"]
    assert [(c.name, [(x.part, x.what) for x in c.changes]) for c in result.circuit.cases] == [
        ("hot day", [("R1", "open")])
    ]
    assert result.findings == ()


def test_given_lines_stand_without_their_comments() -> None:
    text = "  given x = 3 V  # assumed\n# given y = 4 V"
    fence = read_page(f"```circuit\n{text}\n```\n")[0]
    assert [g.text for g in given_lines(fence)] == ["given x = 3 V"]


def test_places_hold_inside_a_list_and_behind_a_quote_mark() -> None:
    text = "- > ```circuit\n  > R1: 4.7 kOhm, a to gnd\n  > ```\n"
    sheet = Sheet("sheet.md", text)
    fence = next(b for b in blocks(read_page(text)) if b.kind == "fence")
    finding = read_circuit(fence, {}, sheet).findings[0]
    assert (sheet.line_column(finding.span.start), text[finding.span.start : finding.span.end]) == ((2, 9), "4.7 kOhm")
    assert finding.suggestion == "R1: 4.7 kΩ, a to gnd"


# --- what the unit tells --------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("line", "kind", "value", "stated"),
    [
        ("R1: 4.7 kΩ, a to b", "resistor", "4700", (4700, OHM)),
        ("R1: 4.7 k\u2126, a to b", "resistor", "4700", (4700, OHM)),
        ("R1: 4.7kohm, a to b", "resistor", "4700", (4700, OHM)),
        ("R1: 2.2 mS, a to b", "resistor", "5000/11", (Fraction(22, 10000), SIEMENS)),
        ("R1: 4k7, a to b", "resistor", "4700", (4700, OHM)),
        ("R1: 4K7 ±1 %, a to b", "resistor", "4700", (4700, OHM)),
        ("R1: R47, a to b", "resistor", "0.47", (Fraction("0.47"), OHM)),
        ("R1: 0 Ω, a to b", "resistor", "0", (0, OHM)),
        ("R1: 1\u202f000 Ω, a to b", "resistor", "1000", (1000, OHM)),
        ("R1: 1/3 kΩ * 2, a to b", "resistor", "1500", (Fraction(2, 3000), SIEMENS)),  # 1/(3 kΩ): the literal binds tightest
        ("V1: −12.6 V, a to b", "voltage source", "-12.6", (Fraction("-12.6"), VOLT)),
        ("I1: 3.2 mA, a to b", "current source", "0.0032", (Fraction("0.0032"), AMPERE)),
        ("C1: 100 nF, a to b", "capacitor", "1e-7", (Fraction("1e-7"), FARAD)),
        ("C1: 4n7, a to b", "capacitor", "4.7e-9", (Fraction("4.7e-9"), FARAD)),
        ("C1: 10 µF, a to b", "capacitor", "1e-5", (Fraction("1e-5"), FARAD)),
        ("C1: 10 μF, a to b", "capacitor", "1e-5", (Fraction("1e-5"), FARAD)),
        ("L1: 4.7 mH, a to b", "inductor", "0.0047", (Fraction("0.0047"), (1, -1, 1, 0, 0))),
        ("W1: 0.5 Ω/km * 3 km, a to b", "resistor", "1.5", (Fraction("1.5"), OHM)),
        ("W1: 0.0178 Ω·mm²/m * 20 m / (2.5 mm²), a to b", "resistor", "0.1424", (Fraction("0.1424"), OHM)),
        ("R1: (3/16) kΩ, a to b", "resistor", "187.5", (Fraction("187.5"), OHM)),
    ],
)  # fmt: skip
def test_kind_and_value(line: str, kind: str, value: str, stated: tuple[Fraction, Dimension]) -> None:
    element = part(line)
    assert (element.kind, element.value) == (kind, Fraction(value))
    assert element.stated == Amount(*stated)


@pytest.mark.parametrize(("word", "kind"), [("short", "short"), ("open", "open")])
def test_links_and_gaps(word: str, kind: str) -> None:
    element = part(f"X1: {word}, a to b")
    assert (element.kind, element.value, element.plus, element.minus) == (kind, None, "a", "b")


def test_a_conductance_of_zero_is_a_gap() -> None:
    assert (part("G1: 0 S, a to b").kind, part("G1: 0 S, a to b").stated) == ("open", Amount(Fraction(0), SIEMENS))


def test_values_from_givens() -> None:
    strain = part("Rg: 350 Ω * (1 + GF*strain), a to b", GF=Amount(Fraction(2)), strain=Amount(Fraction("0.001")))
    assert (strain.value, strain.written) == (Fraction("350.7"), "350 Ω * (1 + GF*strain)")
    assert part("R1: R Ω, a to b", R=Amount(Fraction(10))).value == 10
    assert part("R1: 2*R, a to b", R=Amount(Fraction(10), OHM)).value == 20
    assert part("R1: π * 2 Ω, a to b").value == Fraction(math.pi) * 2
    _, result = reading("R1: R Ω, a to gnd", {"R": Amount(Fraction(10), OHM)})
    assert ["the value has a unit already; leave out Ω" in f.message for f in result.findings] == [True]
    assert part("V1: V_ref, a to b", V_ref=Amount(Fraction(5), VOLT)).value == 5


@pytest.mark.parametrize(
    ("line", "kind", "gain", "control"),
    [
        ("E1: 4.7 * V_{a,b}, b to gnd", "controlled voltage source", "4.7", Control("a", "b")),
        ("E1: V_a * 3, b to gnd", "controlled voltage source", "3", Control("a", "gnd")),
        ("E1: −V_Rs, b to gnd", "controlled voltage source", "-1", Control("a", "gnd")),
        ("H1: 50 Ω * I_Rs, b to gnd", "controlled voltage source", "50", Control(part="Rs")),
        ("H1: 2 kΩ × (I_Rs + 2 × I_Rs), b to gnd", "controlled voltage source", "6000", Control(part="Rs")),
        ("G1: 2 mS * V_{a,gnd}, a to b", "controlled current source", "0.002", Control("a", "gnd")),
        ("G1: V_a / 3 kΩ, a to b", "controlled current source", "1/3000", Control("a", "gnd")),
        ("F1: 120 * I_Rs, a to b", "controlled current source", "120", Control(part="Rs")),
        ("F1: beta * I_Rs, a to b", "controlled current source", "80", Control(part="Rs")),
    ],
)
def test_controlled_sources(line: str, kind: str, gain: str, control: Control) -> None:
    element = part(line, beta=Amount(Fraction(80)))
    assert (element.kind, element.value, element.control) == (kind, Fraction(gain), control)
    assert element.stated is None


def test_a_control_may_stand_below() -> None:
    _, result = reading("F1: 2 * I_R1, a to gnd\nE1: 3 * V_{+5V}, b to gnd\nR1: 5 Ω, a to b\nR2: 1 Ω, +5V to gnd")
    assert result.findings == ()
    assert [e.control for e in result.circuit.elements[:2]] == [Control(part="R1"), Control("+5V", "gnd")]


# --- attributes -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "plus", "minus", "relative", "per_kelvin"),
    [
        ("±5 %", "0.05", "0.05", True, False),
        ("±0.1 Ω", "0.1", "0.1", False, False),
        ("±200 ppm", "0.0002", "0.0002", True, False),
        ("+10/−5 %", "0.1", "0.05", True, False),
        ("-5/+10 %", "0.1", "0.05", True, False),
        ("+10 %/−5 %", "0.1", "0.05", True, False),
        ("+0.2/-0.1 Ω", "0.2", "0.1", False, False),
        ("±50 ppm/K", "0.00005", "0.00005", True, True),
        ("±50 ppm/°C", "0.00005", "0.00005", True, True),
        ("±0.1 mΩ/K", "0.0001", "0.0001", False, True),
        ("+/- 5 %", "0.05", "0.05", True, False),
    ],
)
def test_tolerances(text: str, plus: str, minus: str, relative: bool, per_kelvin: bool) -> None:
    for line in (f"R1: 10 Ω {text}, a to b", f"R1: 10 Ω, a to b, {text}"):
        tolerance = part(line).tolerance
        assert tolerance is not None
        found = (tolerance.plus, tolerance.minus, tolerance.relative, tolerance.per_kelvin, tolerance.text)
        assert found == (Fraction(plus), Fraction(minus), relative, per_kelvin, text)


def test_ratings() -> None:
    ratings = part("R1: 10 Ω, a to b, max 0.25 W, max 50 V, max 20 mA").ratings
    assert [(r.value, r.dimension) for r in ratings] == [
        (Fraction("0.25"), WATT), (50, VOLT), (Fraction("0.02"), AMPERE),
    ]  # fmt: skip


# --- lines that cannot be read --------------------------------------------------------------------------------------


# line, column, text under the span, a part of the message, the corrected line
SLIPS = [
    ("Rb 4.7 kΩ, a to b", 1, "Rb", "no colon behind the name", "Rb: 4.7 kΩ, a to b"),
    ("Rb = 4.7 kΩ, a to b", 1, "Rb =", "followed by a colon", "Rb: 4.7 kΩ, a to b"),
    ("R1: 4.7 kΩ a to b", 12, "a to b", "no comma before the nodes", "R1: 4.7 kΩ, a to b"),
    ("R1: 4.7 kΩ ±5 % a to b", 17, "a to b", "no comma before the nodes", "R1: 4.7 kΩ ±5 %, a to b"),
    ("R1: 4,7 kΩ, a to b", 5, "4,7", "4,7 has a decimal comma", "R1: 4.7 kΩ, a to b"),
    ("R1: 4,7 k, a to b", 5, "4,7", "4,7 has a decimal comma", "R1: 4.7 kΩ, a to b"),
    ("R1: 10 000 Ω, a to b", 5, "10 000", "grouped by plain blanks", "R1: 10000 Ω, a to b"),
    ("R1: 5 Ω ±0,5 %, a to b", 10, "0,5", "decimal comma", "R1: 5 Ω ±0.5 %, a to b"),
    ("R1: 5 Ω, a to b, max 0,25 W", 22, "0,25", "decimal comma", "R1: 5 Ω, a to b, max 0.25 W"),
    ("R1: 4.7 kΩ, a - b", 13, "a - b", "joined by to", "R1: 4.7 kΩ, a to b"),
    ("R1: 4.7 kΩ, a – b", 13, "a – b", "joined by to", "R1: 4.7 kΩ, a to b"),
    ("R1: 4.7 kΩ, a -> b", 13, "a -> b", "joined by to", "R1: 4.7 kΩ, a to b"),
    ("R1: 4.7 kΩ, a → b", 13, "a → b", "joined by to", "R1: 4.7 kΩ, a to b"),
    ("R1: 4.7 kΩ, a b", 13, "a b", "joined by to", "R1: 4.7 kΩ, a to b"),
    ("R1: 4.7 kΩ, a, b", 13, "a, b", "joined by to", "R1: 4.7 kΩ, a to b"),
    ("E1: 2 * V_{1,2}, 1, 2", 18, "1, 2", "joined by to", "E1: 2 * V_{1,2}, 1 to 2"),
    ("R1: 4.7, a to b", 5, "4.7", "no unit", "R1: 4.7 Ω, a to b"),
    ("V1: 12, a to b", 5, "12", "no unit", "V1: 12 V, a to b"),
    ("C1: 100 n, a to b", 5, "100", "no unit", "C1: 100 nF, a to b"),
    ("X1: 4.7 k, a to b", 5, "4.7", "no unit", "X1: 4.7 kΩ, a to b"),
    ("R1: 4.7 KΩ, a to b", 5, "4.7 KΩ", "is written 4.7 kΩ", "R1: 4.7 kΩ, a to b"),
    ("R1: 4.7 K, a to b", 5, "4.7", "no unit", "R1: 4.7 kΩ, a to b"),
    ("R1: 4.7 kOhm, a to b  # as measured", 5, "4.7 kOhm", "is written 4.7 kΩ", "R1: 4.7 kΩ, a to b  # as measured"),
    ("R1: 47 Ohms, a to b", 5, "47 Ohms", "is written 47 Ω", "R1: 47 Ω, a to b"),
    ("R1: 47 R, a to b", 5, "47 R", "is written 47 Ω", "R1: 47 Ω, a to b"),
    ("R1: 4.7 k Ω, a to b", 5, "4.7 k Ω", "one word", "R1: 4.7 kΩ, a to b"),
    ("V1: 5 volts, a to b", 5, "5 volts", "is written 5 V", "V1: 5 V, a to b"),
    ("V1: 5 mv, a to b", 5, "5 mv", "is written 5 mV", "V1: 5 mV, a to b"),
    ("V1: 24 VDC, a to b", 5, "24 VDC", "without a frequency is DC", "V1: 24 V, a to b"),
    ("C1: 10 uf, a to b", 5, "10 uf", "is written 10 µF", "C1: 10 µF, a to b"),
    ("R1: 4.7 kΩ 5 %, a to b", 12, "5 %", "written ±5 %", "R1: 4.7 kΩ ±5 %, a to b"),
    ("R1: 4.7 kΩ, a to b, 5 %", 21, "5 %", "written ±5 %", "R1: 4.7 kΩ, a to b, ±5 %"),
    ("R1: 4.7 kΩ, a to b, 5 W", 21, "5 W", "written max 5 W", "R1: 4.7 kΩ, a to b, max 5 W"),
    ("R1: 4.7 kΩ, a to b, max 1/4 W", 21, "max 1/4 W", "one number", "R1: 4.7 kΩ, a to b, max 0.25 W"),
    ("R1: a to b, 4.7 kΩ", 5, "a to b, 4.7 kΩ", "value stands before", "R1: 4.7 kΩ, a to b"),
    ("R1: 4.7 kΩ; a to b", 11, ";", "parted by commas", "R1: 4.7 kΩ, a to b"),
    ("R 1: 4.7 kΩ, a to b", 1, "R 1", "R 1 is no name", "R1: 4.7 kΩ, a to b"),
    ("R1: 4.7 kΩ, 3.3V to b", 13, "3.3V to b", "node's name", "R1: 4.7 kΩ, 3V3 to b"),
    ("R1: 4.7 kΩ, bat pos to b", 13, "bat pos to b", "node's name", "R1: 4.7 kΩ, bat_pos to b"),
    ("U1: opamp, plus a, minus b, out c", 5, "opamp", "the word is op-amp", "U1: op-amp, plus a, minus b, out c"),
    ("X1: Short, a to b", 5, "Short", "Short is written short", "X1: short, a to b"),
    ("reference: a", 1, "reference: a", "stated as reference a", "reference a"),
]  # fmt: skip


@pytest.mark.parametrize(("line", "column", "under", "says", "suggestion"), SLIPS, ids=[s[0] for s in SLIPS])
def test_slips_of_the_pen(line: str, column: int, under: str, says: str, suggestion: str) -> None:
    sheet, result = reading(f"R0: 1 Ω, a to gnd\nR00: 1 Ω, 1 to 2\n{line}")
    (finding,) = result.findings
    assert finding.kind == "circuit-line"
    assert placed(sheet, finding.span) == (3, column, under)
    assert says in finding.message
    assert finding.suggestion == suggestion
    assert result.circuit.problems == (finding,)
    assert [e.name for e in result.circuit.elements] == ["R0", "R00"]
    _, again = reading(f"R0: 1 Ω, a to gnd\nR00: 1 Ω, 1 to 2\n{suggestion}")
    assert again.findings == ()


# line, column, text under the span, a part of the message; no corrected line can be offered
@pytest.mark.parametrize(
    ("line", "column", "under", "says"),
    [
        ("R1: 1,000 Ω, a to b", 7, "000 Ω", "a comma between digits"),
        ("R1: 4.7 W, a to b", 5, "4.7 W", "4.7 W is a power"),
        ("R1: 40 °C, a to b", 5, "40 °C", "40 °C is a temperature"),
        ("R1: 4m7, a to b", 5, "4m7", "the code of 4.7 mF, but R1 is called like a resistance"),
        ("L1: 4u7, a to b", 5, "4u7", "the code of 4.7 µF, but L1 is called like an inductance"),
        ("R1: R0, a to b", 5, "R0", "R0 is a name here and the code of 0 Ω"),
        ("R1: 2*R0, a to b", 7, "R0", "R0 is a part; a value is worked from givens"),
        ("R1: 2*GG, a to b", 7, "GG", "GG has no value"),
        ("R1: 4.7 kΩ", 1, "R1: 4.7 kΩ", "lacks NODE to NODE"),
        ("R1: , a to b", 1, "R1: , a to b", "R1 has no value"),
        ("R1: 5 Ω, a to b, c to d", 18, "c to d", "expected a tolerance, a rating"),
        ("R1: 5 Ω, a to b, banana", 18, "banana", "expected a tolerance, a rating"),
        ("R1: 5 Ω, a to a", 10, "a to a", "both ends of R1 lie at a"),
        ("R1: 5 Ω, a to to", 10, "a to to", "expected NODE to NODE"),
        ("R1: 5 Ω ((, a to b", 9, "(", "nothing closes this ("),
        ("R1: 5 Ω), a to b", 8, ")", "nothing opens this )"),
        ("R1: 5 Ω ±5, a to b", 9, "±5", "a tolerance without a unit"),
        ("R1: 5 Ω ±5°, a to b", 10, "5°", "a tolerance is written"),
        ("R1: 5 Ω ±1 %, a to b, ±5 %", 23, "±5 %", "two tolerances"),
        ("R1: 5 Ω, a to b, max 5 W, max 3 W", 27, "max 3 W", "two ratings for a power"),
        ("R1: 5 Ω, a to b, max 5 s", 22, "5 s", "no power, voltage or current"),
        ("R1: 5 Ω, a to b, max 0 W", 22, "0 W", "a rating of zero"),
        ("R1: 5 Ω, a to b, 50 Hz", 18, "50 Hz", "a frequency belongs to a source"),
        ("X1: short ±5 %, a to b", 11, "±5 %", "a tolerance belongs behind a value"),
        ("X1: short, a to b, ±5 %", 20, "±5 %", "expected NAME: short, NODE to NODE"),
        ("V1: 10 V ∠ 30, a to b", 12, "30", "an angle is written with ° or rad"),
        ("E1: V_a * V_a / (1 V), a to b", 5, "V_a * V_a / (1 V)", "not proportional"),
        ("E1: 2 * V_a + 1 V, a to b", 5, "2 * V_a + 1 V", "not proportional"),
        ("E1: |V_a|, a to b", 5, "|V_a|", "not proportional"),
        ("E1: 1 V * 1 V / V_a, a to b", 5, "1 V * 1 V / V_a", "not proportional"),
        ("E1: V_a * (V_a − 1 V) * (V_a − 2 V) / (1 V) / (1 V) + V_a, a to b", 5,
         "V_a * (V_a − 1 V) * (V_a − 2 V) / (1 V) / (1 V) + V_a", "not proportional"),
        ("E1: 2 * V_a + 3 * V_b, a to b", 5, "2 * V_a + 3 * V_b", "one quantity steers a source"),
        ("E1: 2 W * V_a, a to b", 5, "2 W * V_a", "comes out in volts or amperes"),
        ("E1: 2 * V_x, a to b", 9, "V_x", "this circuit has no node x"),
        ("F1: 2 * I_Rx, a to b", 9, "I_Rx", "this circuit has no part Rx"),
        ("E1: 2 * V_a due to R0, a to b", 9, "V_a due to R0", "steered by a plain voltage or current"),
        ("R1: 1 Ω / 0, a to b", 11, "0", "division by zero"),
        ("R1: 1e300 Ω * 1e300, a to b", 5, "1e300 Ω * 1e300", "does not fit"),
        ("Q1: npn, base a, collector b, V_BE 0.7 V, beta 100", 1, "Q1: npn, base a, collector b, V_BE 0.7 V, beta 100",
         "Q1 lacks emitter"),
        ("Q1: npn, base a, collector b, emitter c, V_BE 0.7 A, beta 9", 42, "V_BE 0.7 A", "expected a voltage behind V_BE"),
        ("Q1: npn, base a, base b, collector c, emitter d", 18, "base b", "base stands twice"),
        ("Q1: npn, base a, collector b, emitter c, V_BE 1 V, beta 9, saturated", 1,
         "Q1: npn, base a, collector b, emitter c, V_BE 1 V, beta 9, saturated", "saturated and V_CE together"),
        ("U1: op-amp, plus a, minus b, out c, swing 3 V", 37, "swing 3 V", "expected swing 0.2 V to 4.8 V"),
        ("T1: transformer, a to b, c to d", 5, "transformer", "expected transformer 10:1"),
        ("D1: diode, a to k", 1, "D1: diode, a to k", "D1 lacks drop"),
        ("case R0 = 3 Ω", 1, "case R0 = 3 Ω", "expected case NAME"),
        ("case hot: Rz = 3 Ω", 11, "Rz", "no part Rz"),
        ("case hot: R0 cold", 11, "R0 cold", "expected a change such as"),
        ("reference", 1, "reference", "expected reference NODE"),
        ("reference nowhere", 11, "nowhere", "is no node of this circuit"),
        ("case of: R0 open", 6, "of", "a word of the language"),
        ("case hot: R0 = 3 +", 18, "+", "expected a value"),
        ("R1: 5 Ω ±2*3 %, a to b", 10, "2*3 %", "a tolerance is written"),
        ("R1: 5 Ω, a to b, +5 %/+3 %", 18, "+5 %/+3 %", "a tolerance is written"),
        ("R1: 5 Ω, a to b, max", 18, "max", "a rating is written"),
        ("X1: short circuit, a to b", 11, "circuit", "expected a comma behind short"),
        ("U1: op-amp, plus a b, minus b, out c", 13, "plus a b", "expected a node behind plus"),
        ("R1: 1e300 Ω / 1e-300 / 1e-300, a to b", 5, "1e300 Ω / 1e-300 / 1e-300", "does not fit"),
        ("E1: 2 * V_a V, a to b", 5, "2 * V_a V", "leave out V"),
        ("E1: 2 * V_a ±1 V, a to b", 13, "±1 V", "the tolerance of a gain is written ±5 %"),
        ("F1: 2 * I_{R0,a}, a to b", 9, "I_{R0,a}", "R0 has two terminals; write I_R0"),
        ("R1: " + "1 Ω + " * 400 + "1 Ω, a to b", 1, ("R1: " + "1 Ω + " * 400)[:40], "longer than 2000 characters"),
        ("Resistor of five ohms", 1, "Resistor of five ohms", "found no colon behind a name"),
    ],
)  # fmt: skip
def test_lines_without_a_corrected_form(line: str, column: int, under: str, says: str) -> None:
    sheet, result = reading(f"R0: 1 Ω, a to gnd\nR00: 1 Ω, b to gnd\n{line}")
    (finding,) = result.findings
    assert (finding.kind, placed(sheet, finding.span)) == ("circuit-line", (3, column, under))
    assert says in finding.message
    assert finding.suggestion == ""
    assert result.circuit.problems == (finding,)


@pytest.mark.parametrize(
    ("line", "column", "under", "says"),
    [
        ("R1: 5 Ω ±0.1 V, a to b", 9, "±0.1 V", "the tolerance is a voltage, the value a resistance"),
        ("R1: 5 Ω +10 %/−1 Ω, a to b", 9, "+10 %/−1 Ω", "two sides of a tolerance"),
        ("R1: 5 Ω + 3 V, a to b", 5, "5 Ω + 3 V", "cannot be added"),
    ],
)
def test_dimensions_that_do_not_fit(line: str, column: int, under: str, says: str) -> None:
    sheet, result = reading(f"R0: 1 Ω, a to gnd\n{line}")
    (finding,) = result.findings
    assert (finding.kind, placed(sheet, finding.span)) == ("dimension", (2, column, under))
    assert says in finding.message
    assert result.circuit.problems == (finding,)


def test_a_name_on_a_line_that_cannot_be_read_is_not_told_twice() -> None:
    _, result = reading("R1: banana, a to gnd, split\nF1: 2 * I_R1, a to gnd\nE1: V_c, a to gnd")
    assert [f.message.split(",")[0] for f in result.findings] == ["expected a tolerance"]


def test_a_slip_and_an_unknown_name_are_told_one_after_the_other() -> None:
    sheet, result = reading("R0: 1 Ω, a to gnd\nE1: 2 * V_zz a to b")
    (finding,) = result.findings
    assert (placed(sheet, finding.span), finding.suggestion) == ((2, 14, "a to b"), "E1: 2 * V_zz, a to b")
    sheet, result = reading("R0: 1 Ω, a to gnd\nE1: 2 * V_zz, a to b")
    assert [(f.message, placed(sheet, f.span)) for f in result.findings] == [
        ("V_zz: this circuit has no node zz", (2, 9, "V_zz"))
    ]


def test_givens_and_units_that_share_a_name() -> None:
    _, result = reading("R1: 2 m * 3 Ω/m, a to gnd", {"m": Amount(Fraction(3))})
    assert [f.message for f in result.findings] == ["m is a name here and a unit; write × between number and name"]
    _, result = reading("E1: 2 * V_a, a to gnd", {"V_a": Amount(Fraction(3), VOLT)})
    assert "V_a is a given and a quantity of this circuit" in result.findings[0].message


# --- names ----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("line", "says", "suggestion"),
    [
        ("V_x: 5 V, a to b", "V_x reads as a quantity", "Vx: 5 V, a to b"),
        ("I_1: 5 V, a to b", "I_1 reads as a quantity", "I1: 5 V, a to b"),
        ("P_: 5 V, a to b", "P_ reads as a quantity", "P: 5 V, a to b"),
        ("e: 5 V, a to b", "e is a word of the language", "e1: 5 V, a to b"),
        ("min: 5 V, a to b", "min is a word of the language", "min1: 5 V, a to b"),
        ("sqrt: 5 V, a to b", "sqrt is a word of the language", "sqrt1: 5 V, a to b"),
        ("R1: 5 Ω, a to b", "R1 names two parts, on lines 2 and 4", "R2: 5 Ω, a to b"),
        ("gnd: 5 Ω, a to b", "gnd names a part (line 4) and a node (line 2)", "gnd1: 5 Ω, a to b"),
    ],
)
def test_names_that_are_not_allowed(line: str, says: str, suggestion: str) -> None:
    sheet, result = reading(f"R1: 1 Ω, a to gnd\n\n{line}")
    finding = next(f for f in result.findings if f.kind == "circuit-name")
    name = line.split(":")[0]
    assert placed(sheet, finding.span) == (3, 1, name)
    assert says in finding.message
    assert finding.suggestion == suggestion
    assert finding in result.circuit.problems


@pytest.mark.parametrize("name", ["C", "A", "G", "T", "m", "L", "R_L", "Rth", "R1′", "Müller", "E", "V", "Isc", "T_1"])
def test_good_names(name: str) -> None:
    _, result = reading(f"{name}: 1 Ω, n to gnd")
    assert [k for k in kinds(result) if k != "letter"] == []


@pytest.mark.parametrize("node", ["+5V", "-12V", "−12V", "1", "in", "e", "V_bat", "a′", "0V", "out2", "due"])
def test_good_nodes(node: str) -> None:
    _, result = reading(f"R1: 1 Ω, {node} to gnd")
    assert kinds(result) == []
    assert result.circuit.nodes() == (node.replace("−", "-"), "gnd")


def test_names_that_differ_only_in_case() -> None:
    sheet, result = reading("Rb: 1 Ω, bus to gnd\nRB: 1 Ω, Bus to gnd\nbUS: 2 Ω, bus to gnd")
    assert kinds(result) == ["letter-case"] * 3
    assert [placed(sheet, f.span) for f in result.findings] == [(1, 10, "bus"), (2, 1, "RB"), (2, 10, "Bus")]
    assert "Rb (line 2) and RB differ only" in result.findings[1].message
    assert result.circuit.problems == ()


@pytest.mark.parametrize(
    ("line", "cautioned"),
    [
        ("R4: 4.7 kV, a to gnd", True), ("C1: 5 Ω, a to gnd", True), ("L2: 5 V, a to gnd", True), ("V1: 5 Ω, a to gnd", True),
        ("V1: 5 mA, a to gnd", True), ("I1: 5 V, a to gnd", True), ("Vb: 2 Ω * I_V1, a to gnd", False),
        ("R1: 2 mS, a to gnd", False), ("Lamp: 24 Ω, a to gnd", False), ("Cable: 0.2 Ω, a to gnd", False),
        ("B1: 5 V, a to gnd", False), ("R1: short, a to gnd", False), ("RL: 5 Ω, a to gnd", False),
    ],
)  # fmt: skip
def test_first_letters_by_custom(line: str, cautioned: bool) -> None:
    extra = "\nV1: 5 V, a to gnd" if "I_V1" in line else ""
    sheet, result = reading(line + extra)
    assert kinds(result) == ["letter"] * cautioned
    assert result.circuit.problems == ()
    if cautioned:
        assert placed(sheet, result.findings[0].span) == (1, 1, line.split(":")[0])


def test_a_negative_resistance_is_a_caution() -> None:
    sheet, result = reading("R1: −5 Ω, a to gnd\nR2: −2 mS, a to gnd\nV1: −5 V, a to gnd")
    assert kinds(result) == ["negative-resistance"] * 2
    assert placed(sheet, result.findings[0].span) == (1, 5, "−5 Ω")
    assert [e.value for e in result.circuit.elements] == [-5, -500, -5]


def test_circuit_names() -> None:
    sheet, result = reading("R1: 1 Ω, a to gnd", info="circuit left-hand")
    assert kinds(result) == ["circuit-name"]
    assert placed(sheet, result.findings[0].span) == (0, 12, "left-hand")


# --- the reference --------------------------------------------------------------------------------------------------


def test_gnd_needs_no_statement() -> None:
    assert reading("R1: 1 Ω, a to gnd")[1].circuit.reference == "gnd"


def test_a_reference_is_needed() -> None:
    sheet, result = reading("R1: 1 Ω, a to GND\nV1: 1 V, a to GND\nR2: 1 Ω, a to b")
    (finding,) = result.findings
    assert (finding.kind, finding.suggestion) == ("circuit-line", "reference GND")
    assert placed(sheet, finding.span)[0] == 1
    assert result.circuit.problems == (finding,)


def test_one_reference_only_and_a_near_name() -> None:
    assert ["second" in f.message for f in reading("reference a\nreference gnd\nR1: 1 Ω, a to gnd")[1].findings] == [
        True
    ]
    _, result = reading("  reference eart # e\nR1: 1 Ω, a to earth")
    assert (result.findings[0].suggestion, kinds(result)) == ("  reference earth # e", ["circuit-line"])


def test_a_block_without_parts() -> None:
    for text in ("", "# nothing yet", "reference com", "given x = 3"):
        assert "circuit-line" in kinds(reading(text)[1]), text


# --- value codes ----------------------------------------------------------------------------------------------------


# examples of the tables of IEC 60062:2016, from memory; k and u are common practice
@pytest.mark.parametrize(
    ("code", "value"),
    [("R10", "0.1"), ("R332", "0.332"), ("1R0", "1"), ("3R32", "3.32"), ("10R", "10"), ("59R04", "59.04"), ("K10", "100"),
     ("1K0", "1000"), ("3K32", "3320"), ("10K", "10000"), ("M10", "100000"), ("1M5", "1500000"), ("G10", "1e8"),
     ("1G0", "1e9"), ("1T0", "1e12"), ("4k7", "4700"), ("1k", "1000")],
)  # fmt: skip
def test_codes_of_resistances(code: str, value: str) -> None:
    assert component_code(code) == (Fraction(value), OHM)


@pytest.mark.parametrize(
    ("code", "value"),
    [("p10", "1e-13"), ("3p32", "3.32e-12"), ("10p", "1e-11"), ("n10", "1e-10"), ("1n0", "1e-9"), ("33n2", "33.2e-9"),
     ("µ10", "1e-7"), ("1µ0", "1e-6"), ("1μ0", "1e-6"), ("m10", "1e-4"), ("1m5", "1.5e-3"), ("F10", "0.1"), ("4u7", "4.7e-6")],
)  # fmt: skip
def test_codes_of_capacitances(code: str, value: str) -> None:
    assert component_code(code) == (Fraction(value), FARAD)


@pytest.mark.parametrize(
    "text", ["", "R", "47", "4.7k", "4k7 ", "4kk7", "4r7", "4V7", "k4k", "4k7Ω", "123456R", "R−1", "٤k٧"]
)
def test_no_codes(text: str) -> None:
    assert component_code(text) is None


# --- laws -----------------------------------------------------------------------------------------------------------

WORDS = st.sampled_from(
    ["R1", "Vb", "a", "b", "gnd", "to", ":", ",", " ", " ", "\n", "4.7", "kΩ", "V", "mA", "±5 %", "4k7", "0,5", "max", "W", "#",
     "(", ")", "{", "}", "V_{a,b}", "I_R1", "*", "/", "∠", "30°", "j40", "short", "op-amp", "npn", "diode", "plus", "case",
     "reference", "given", "=", ";", "−", "K", "Ohm", "\t", "²", "e", "1e300", "^", "√", "50 Hz", "drop", "-", "→", "\u00a0",
     "Vin", "R", "x", "case hot:", "Q1", "beta", "open", "V_BE", "∥", "π", "swing", "transformer 2:1", "saturated", "base"],
)  # fmt: skip
TEXTS = st.one_of(st.text(max_size=80), st.lists(WORDS, max_size=25).map("".join))


@given(TEXTS)
@settings(max_examples=300, deadline=None)
def test_any_text_is_read_or_told(text: str) -> None:
    """No text stops the reader, every finding stands in the text, and a line that makes no part is told."""
    text = text.replace("\r", " ")
    sheet, result = made_reading(text)
    for finding in result.findings:
        assert 0 <= finding.span.start <= finding.span.end <= len(text)
    assert result.circuit.problems == tuple(f for f in result.findings if f.severity == "error")
    if not result.circuit.problems:
        lines = [line.partition("#")[0].strip() for line in sheet.text.split("\n")]
        told = len(result.circuit.elements) + len(result.givens) + len(result.circuit.cases)
        assert told == sum(bool(line) and not line.startswith("reference") for line in lines)


@given(TEXTS)
@settings(max_examples=150, deadline=None)
def test_a_corrected_line_is_free_of_what_was_wrong(text: str) -> None:
    """Every offered line, put in place of its own, reads without a fault of the line."""
    line = "".join(text.split("\n")).replace("\r", " ")
    _, result = made_reading(f"R0: 1 Ω, a to gnd\n{line}")
    for finding in result.findings:
        if finding.kind == "circuit-line" and finding.suggestion and finding.span.start >= 18:
            _, again = made_reading(f"R0: 1 Ω, a to gnd\n{finding.suggestion}")
            faults = [f.message for f in again.findings if f.kind == "circuit-line" and f.span.start >= 18]
            assert [m for m in faults if "this circuit has no" not in m] == [], (line, finding.suggestion)


PARTS = [
    *BUS.split("\n")[1:],
    "G1: 2 mS * V_{bus,com}, pan to com",
    "H1: 5 Ω * I_RL, x to com",
    "C1: 4n7, x to bus, max 50 V",
]
NOWHERE = Span(0, 0)


def bare(element: Element) -> Element:
    """A part without its places."""
    tolerance = replace(element.tolerance, span=NOWHERE) if element.tolerance else None
    ratings = tuple(replace(r, span=NOWHERE) for r in element.ratings)
    return replace(element, span=NOWHERE, tolerance=tolerance, ratings=ratings)


@given(st.permutations(["reference com", *PARTS]))
@settings(max_examples=40, deadline=None)
def test_the_order_of_lines_changes_nothing(lines: list[str]) -> None:
    _, first = reading("\n".join(["reference com", *PARTS]))
    _, other = reading("\n".join(lines))
    assert other.findings == first.findings == ()
    assert other.circuit.reference == first.circuit.reference
    in_order = [sorted((bare(e) for e in r.circuit.elements), key=lambda e: e.name) for r in (first, other)]
    assert in_order[0] == in_order[1]


def test_lines_that_read_are_not_mended() -> None:
    """The table of slips changes nothing on a line that is right, or it would blame the wrong thing on a wrong one."""
    right = [
        *PARTS, *(s[4] for s in SLIPS), "Q1: npn, base b, collector c, emitter e, V_BE 0.65 V, beta 150, saturated, V_CE 0.2 V",
        "T1: transformer 10:1, a to b, c to d", "U1: op-amp, plus ref, minus fb, out vo, swing 0.2 V to 4.8 V, max 20 mA",
        "D1: diode, a to k, drop 0.6 V, blocking", "Vs: 10 V ∠ 30°, a to b, 50 Hz", "R1: 5 Ω +10/−5 %, +5V to -12V, max 5 W",
        "Z1: (30 + j40) Ω, 1 to 2", "E1: 2 * V_{1,2}, 1 to 2", "R1: 2*R Ω, in to e", "R1: R47, in to e", "X1: 10 Ω, 1 to 2",
    ]  # fmt: skip
    assert [line for line in right if mended(whole(line), lambda _: True)] == []


def calls(text: str) -> int:
    """How many functions are called, Python's and built-in, to read a block: work that no busy machine changes."""
    count = 0

    def counted(_frame: object, event: str, _argument: object) -> None:
        nonlocal count
        count += event in ("call", "c_call")

    sys.setprofile(counted)
    try:
        made_reading(text)
    finally:
        sys.setprofile(None)
    return count


@pytest.mark.parametrize(
    "line",
    [
        "R{i}: {i}.5 kΩ ±5 %, n{i} to n{j}", "G{i}: 2 mS * V_{{n{i},n{j}}}, n{i} to n{j}", "R{i}: 5 Ω * V_x{i}, n{i} to n{j}",
        "R{i}: 4,7 kOhm, n{i} - n{j}", "R{i}: banana split, n{i} to n{j}", "R1: 5 Ω, n{i} to n{j}", "R{i}: Q{i} Ω, n{i} to n{j}",
    ],
)  # fmt: skip
def test_twice_the_lines_are_twice_the_work(line: str) -> None:
    """Parts, broken lines, unknown names and repeated names alike, on as many nodes as lines."""

    def block(count: int) -> str:
        return "reference n0\n" + "\n".join(line.format(i=1000 + i, j=1000 + i * 7 % count) for i in range(count))

    calls(block(100))  # what is loaded and cached once
    assert calls(block(600)) < 2.2 * calls(block(300))
