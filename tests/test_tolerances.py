"""Claims over tolerances: extremes, tolerances as written, bounds at their worst, alternating current.

Expected numbers are worked by hand beside each sheet.
"""

from __future__ import annotations

import math
import re
from fractions import Fraction
from pathlib import Path

import pytest
from tolerant_sheets import DIVIDER, FILTER, HIGH, LOW, front, judged, verdict

from calccheck import check_text
from calccheck.rules import RULES

# --- extremes -------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("claim", "expected"),
    [
        ("max V_out = 4.111 V", "agrees"),
        ("max V_out = 4.1108 V", "agrees"),
        ("max V_out = 4.12 V", "rounded"),  # outwards by less than its last place
        ("max V_out = 4.112 V", "differs"),
        ("max V_out = 5 V", "differs"),  # one figure says too little to be rounded outwards
        ("max V_out = 4.110 V", "rounded"),  # cut off
        ("max V_out = 4.113 V", "differs"),
        ("min V_out = 3.571 V", "agrees"),
        ("min V_out = 3.570 V", "rounded"),
        ("min V_out = 3.569 V", "differs"),
        ("max V_out = 12.6 V × 4.794 kΩ / (9.9 kΩ + 4.794 kΩ) = 4.111 V", "agrees"),
        ("max V_out = 12.6 V × 4.606 kΩ / (9.9 kΩ + 4.794 kΩ) = 4.111 V", "differs"),
        ("worst V_out = 3.571 V … 4.111 V", "agrees"),
        ("worst V_out = 3.571 V to 4.111 V", "agrees"),
        ("worst V_out = 3.571 … 4.111 V", "agrees"),
        ("worst V_out = 3.57 V … 4.13 V", "differs"),
        ("worst V_out = 3.60 V … 4.11 V", "differs"),
        ("worst V_out = 3.837 V ± 0.274 V", "agrees"),  # the larger of 0.2741 V above and 0.2662 V below
        ("worst V_out = (3.837 ± 0.274) V", "agrees"),
        ("worst V_out = 3.84 V ± 0.27 V", "agrees"),
        ("worst V_out = 3.841 V ± 0.270 V", "agrees"),  # halfway between the ends, and half of what lies between
        ("worst V_out = 3.837 V ± 0.266 V", "differs"),
        ("worst V_out = 3.837 V ± 7.1 %", "agrees"),  # 0.2741/3.8367 = 7.14 %
        ("worst V_out = 3.837 V", "unchecked"),
        ("V_out = 3.837 V ± 0.274 V", "unchecked"),
        ("V_out = 3.571 V … 4.111 V", "unchecked"),
        ("max (V_out / Vb) = 0.3263", "agrees"),  # 4.794/14.694, whatever the source
        ("max (V_out / Vb) = 0.34", "differs"),
        ("max V_out / Vb = 0.3263", "unchecked"),
        ("max V_out − min V_out = 0.540 V", "agrees"),
        ("max |I_Vb| = 868.6 µA", "agrees"),  # 12.6 V / (9.9 + 4.606) kΩ
        ("max R1 = 10.1 kΩ", "agrees"),
        ("max P_R2 = 3.525 mW", "agrees"),  # 4.11082²/4.794 kΩ; at 4.606 kΩ it is 3.517 mW
        ("max Vtyp = 4.2 V", "unchecked"),
        ("max Vmax = 4.242 V", "agrees"),
        ("max V_q = 1 V", "unchecked"),
        ("max V_out = 4.111 mA", "differs"),
        ("rss V_out ≤ 5 V", "unchecked"),
        ("yield (V_out = 4 V) ≥ 99 %", "unchecked"),
    ],
)
def test_claims_over_tolerances(claim, expected):
    assert verdict(claim) == expected, judged(claim).message


def test_the_report_names_method_and_corner():
    told = judged("max V_out = 4.111 V").message
    assert told == "the largest within tolerances, at Vb and R2 high, R1 low; proved by the sign of every slope"
    assert judged("max V_out / Vb = 0.3263").message.endswith("write: max (V_out / Vb)")
    both = judged("worst V_out = 3.571 V … 4.111 V")
    assert "at R1 high, Vb and R2 low" in both.message and "at Vb and R2 high, R1 low" in both.message
    assert float(both.low.value) == pytest.approx(LOW, rel=1e-12)
    assert float(both.high.value) == pytest.approx(HIGH, rel=1e-12)
    assert isinstance(both.high.value, Fraction)  # solved again exactly


def test_columns_of_extremes():
    table = "| quantity | min | nominal | max |\n|---|---|---|---|\n| `V_out` | 3.571 V | 3.837 V | 4.111 V |\n"
    table += "| `V_out / Vb` | 0.3132 | 0.3197 | 0.3263 |\n"
    claims = check_text("sheet.md", DIVIDER + table).claims
    assert [j.verdict for j in claims[2:]] == ["agrees"] * 6
    assert claims[-1].claim.text == "max (V_out / Vb) = 0.3263"


def test_a_name_that_rests_on_tolerances():
    report = check_text(
        "sheet.md", DIVIDER + "`gain = V_out / V_a = 0.3197` `max gain = 0.3263` `gain ≤ 0.33` `gain ≤ 0.325`"
    )
    assert [j.verdict for j in report.claims[2:]] == ["agrees", "agrees", "agrees", "differs"]


def test_a_name_with_a_bracket_is_a_value_of_its_own():
    report = check_text("sheet.md", DIVIDER + "`Vhigh = max V_out = 4.111 V` `Vhigh / 2 = 2.055 V` `Vhigh ≤ 4.2 V`")
    assert [j.verdict for j in report.claims[2:]] == ["agrees", "agrees", "agrees"]


def test_zeroed_sources_have_no_tolerance():
    """Offset alone: 2 mV × (1 + 10/1) = 22 mV, at worst 22 mV × … with Vos ±50 % and the resistors: 3 mV × (1 + 10.1/0.99)."""
    circuit = """```circuit
Vin: 1 V ±10 %,    in to gnd
Vos: 2 mV ±50 %,   in to p
R1:  1 kΩ ±1 %,    m to gnd
R2:  10 kΩ ±1 %,   o to m
U1:  op-amp, plus p, minus m, out o
RL:  1 kΩ, o to gnd
```

"""
    top = 3e-3 * (1 + 10.1 / 0.99)
    assert verdict(f"max |V_o due to Vos| = {top * 1e3:.2f} mV", circuit) == "agrees"
    assert "Vin" not in judged(f"max |V_o due to Vos| = {top * 1e3:.2f} mV", circuit).message


def test_extremes_of_a_bias_circuit():
    """V_e = (V_b − V_BE) at the base divider's no-load point less I_B times its resistance, by hand: see the closed form."""
    circuit = """```circuit
Vcc: 10 V ±5 %,    c to gnd
R1:  220 kΩ ±1 %,  c to b
R2:  39 kΩ ±1 %,   b to gnd
Q1:  npn, base b, collector c, emitter e, V_BE 0.7 V ±0.05 V, beta 150 +100/−50 %
Re:  470 Ω ±1 %,   e to gnd
```

"""

    def v_e(vcc, r1, r2, vbe, beta, re):
        open_circuit, source = vcc * r2 / (r1 + r2), r1 * r2 / (r1 + r2)
        base = (open_circuit - vbe) / (source + (beta + 1) * re)
        return (beta + 1) * base * re

    high = v_e(10.5, 217.8e3, 39.39e3, 0.65, 300, 474.7)
    low = v_e(9.5, 222.2e3, 38.61e3, 0.75, 75, 465.3)
    assert verdict(f"worst V_e = {low:.4f} V … {high:.4f} V", circuit) == "agrees"
    told = judged(f"max V_e = {high:.4f} V", circuit).message
    assert "beta of Q1" in told and "V_BE of Q1 low" in told


def test_a_state_that_fails_in_the_corner_is_unchecked():
    """At beta 400 the collector would fall below the emitter: 10 V − 470 kΩ-fed base current × 400 × 4.7 kΩ < 0."""
    circuit = """```circuit
Vcc: 10 V,        c to gnd
Rb:  470 kΩ,      c to b
Rc:  2.2 kΩ,      c to k
Q1:  npn, base b, collector k, emitter gnd, V_BE 0.7 V, beta 100 +300/−50 %
```

"""
    assert verdict("V_k = 5.65 V", circuit) == "agrees"
    found = judged("min V_k = 1 V", circuit)
    assert found.verdict == "unchecked" and "assumed state" in found.message
    assert judged("V_k ≥ 1 V", circuit).verdict == "unchecked"


# --- tolerances as written ------------------------------------------------------------------------------------------

ONE = "```circuit\nV1: 10 V, a to gnd\nR1: 1 kΩ {}, a to b\nR2: 1 kΩ, b to gnd\n```\n\n"


@pytest.mark.parametrize(
    ("tolerance", "low", "high"),
    [("±5 %", 950, 1050), ("+10/−5 %", 950, 1100), ("±20 Ω", 980, 1020), ("±1000 ppm", 999, 1001)],
)
def test_forms_of_tolerance(tolerance, low, high):
    circuit = ONE.format(tolerance)
    assert verdict(f"worst R1 = {low} Ω … {high} Ω", circuit) == "agrees"


def test_a_tolerance_by_the_kelvin_needs_its_range():
    """±50 ppm/K from −20 °C to 60 °C: 45 K from 25 °C downwards, so ±2250 ppm; beside ±1 % it adds up to ±1.225 %."""
    drift, both = ONE.format("±50 ppm/K"), ONE.format("±1 %, a to b, ±50 ppm/K").replace(", a to b, a to b", ", a to b")
    both = both.replace("±50 ppm/K, a to b", "±50 ppm/K")
    found = judged("max R1 = 1002.25 Ω", drift)
    assert found.verdict == "unchecked" and "temperature: −20 °C to 60 °C" in found.message
    assert judged("I_R1 ≤ 6 mA", drift).verdict == "unchecked"
    warm = {"temperature": "−20 °C to 60 °C"}
    assert verdict("max R1 = 1002.25 Ω", drift, **warm) == "agrees"
    assert verdict("max R1 = 1012.25 Ω", both, **warm) == "agrees"
    assert verdict("max R1 = 1001.75 Ω", drift, temperature="10 … 60 °C") == "agrees"


@pytest.mark.parametrize("text", ["60 °C to −20 °C", "20 °C", "−20 to 60 K", "cold"])
def test_a_temperature_is_a_range(text):
    report = check_text("sheet.md", front(temperature=text) + DIVIDER)
    assert [f.kind for f in report.findings] == ["setting"]


def test_a_percentage_of_zero_is_an_error():
    report = check_text(
        "sheet.md", "```circuit\nVos: 0 V ±5 %, a to gnd\nR1: 1 kΩ, a to gnd\n```\n`given x = 0 V ±1 %`"
    )
    assert "±5 % of zero is nothing" in report.findings[0].message
    assert report.claims[0].verdict == "unchecked" and "of zero is nothing" in report.claims[0].message


def test_an_assumption_moves_the_parts_that_are_worked_from_it():
    """A gauge of 350 Ω·(1 + 2.1·ε), ε = 0.8·10⁻³ ±10 % stated below: the output of its half of the bridge."""
    circuit = """```circuit
Vex: 5 V,                      top to com
R1:  350 Ω ±0.1 %,             top to a
R2:  350 Ω * (1 + GF*strain),  a to com
reference com
```

`given GF = 2.1` and `given strain = 0.0008 ±10 %`

"""
    high = 5 * 350 * (1 + 2.1 * 0.00088) / (349.65 + 350 * (1 + 2.1 * 0.00088))
    assert verdict(f"max V_a = {high:.6f} V", circuit) == "agrees"
    assert "strain high" in judged(f"max V_a = {high:.6f} V", circuit).message


def test_a_conductance_has_the_tolerance_of_a_conductance():
    circuit = "```circuit\nI1: 1 mA, gnd to a\nG1: 1 mS +20/−10 %, a to gnd\n```\n\n"
    assert verdict("worst V_a = 0.8333 V … 1.111 V", circuit) == "agrees"
    assert verdict("max P_G1 = 1.111 mW", circuit) == "agrees"


# --- bounds ---------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("claim", "expected", "told"),
    [
        (
            "V_out ≤ 4.2 V",
            "agrees",
            "at worst 4.11082 V (at Vb and R2 high, R1 low), 89.18 mV (2.12 % of the limit) inside",
        ),
        (
            "V_out ≤ 4.0 V",
            "differs",
            "holds at nominal values only: at Vb and R2 high, R1 low it is 4.11082 V and passes",
        ),
        ("V_out ≤ 3.8 V", "differs", "V_out is 3.83673 V and passes the limit"),
        ("V_out ≥ 3.5 V", "agrees", "at worst 3.57054 V (at R1 high, Vb and R2 low)"),
        ("V_out ≥ 3.6 V", "differs", "holds at nominal values only"),
        ("3.5 V ≤ V_out ≤ 4.2 V", "agrees", "at worst 3.57054 V"),
        ("3.5 V ≤ V_out ≤ 4.0 V", "differs", "holds at nominal values only"),
        ("V_out ≤ Vmax", "agrees", "Vmax and R1 low"),  # 4.158 V above 4.11082 V
        ("V_out ≤ 0.35 × V_a", "agrees", "at worst"),  # a ratio of 0.32626 at the most: Vb moves both sides
        ("V_out ≤ 0.325 × V_a", "differs", "holds at nominal values only"),
        ("V_out = 3.837 V ≤ 4.2 V", "agrees", "at worst 4.11082 V"),
        ("max V_out = 4.111 V ≤ 4.2 V", "agrees", "89.18 mV"),
        ("V_out < 4.2 V", "agrees", "at worst"),
        ("I_Vb ≤ 1 mA", "unchecked", "says nothing of it"),
        ("−I_Vb ≤ 0.9 mA", "agrees", "at worst 868.606 µA"),
        ("P_R2 ≤ 3.5 mW", "differs", "holds at nominal values only"),
    ],
)
def test_bounds_are_judged_at_their_worst(claim, expected, told):
    found = judged(claim)
    assert (found.verdict, told in found.message) == (expected, True), found.message


def test_a_bound_without_tolerances_stays_as_it_is():
    circuit = "```circuit\nV1: 10 V, a to gnd\nR1: 1 kΩ, a to b\nR2: 1 kΩ, b to gnd\n```\n\n"
    assert judged("V_b ≤ 6 V", circuit).message == "V_b is 5 V, 1 V (16.7 % of the limit) inside its limit"


def test_a_pole_within_the_tolerances_leaves_a_bound_unchecked():
    """−1 mS ±1 % beside 1 kΩ ±1 % may cancel."""
    circuit = (
        "```circuit\nI1: 1 mA, gnd to a\nR1: 1 kΩ ±1 %, a to gnd\nG1: -0.995 mS * V_{a,gnd} ±1 %, a to gnd\n```\n\n"
    )
    assert verdict("V_a = 200 V", circuit) == "agrees"
    found = judged("V_a ≤ 1 kV", circuit)
    assert found.verdict == "unchecked" and "determinant changes sign" in found.message


# --- alternating current --------------------------------------------------------------------------------------------


def test_magnitudes_are_searched():
    low, high = (1 / math.hypot(1, 2 * math.pi * 1000 * r * c) for r, c in ((1050, 110e-9), (950, 90e-9)))
    found = judged(f"max |V_b| = {high:.4f} V", FILTER)
    assert found.verdict == "agrees" and "found by a search, not proved" in found.message
    assert verdict(f"worst |V_b| = {low:.4f} V … {high:.4f} V", FILTER) == "agrees"
    assert verdict("|V_b| ≤ 0.9 V", FILTER) == "agrees"
    assert verdict("|V_b| ≤ 0.86 V", FILTER) == "differs"
    assert verdict("max V_b = 1 V", FILTER) == "unchecked"


def test_resonance_inside_the_tolerances():
    """Series resonance where ω²·L·C = 1; C = 100 nF ±20 % about it lets the current reach V/R."""
    inductance = 1 / ((2 * math.pi * 1000) ** 2 * 100e-9)
    circuit = (
        f"```circuit\nV1: 1 V, a to gnd, 1000 Hz\nR1: 100 Ω, a to b\nL1: {inductance * 1e3:.6f} mH, b to c\n"
        "C1: 105 nF ±20 %, c to gnd\n```\n\n"
    )
    assert verdict("max |I_R1| = 10.0 mA", circuit) == "agrees"
    assert "C1 = " in judged("max |I_R1| = 10.0 mA", circuit).message


# --- the page -------------------------------------------------------------------------------------------------------

PAGE = (Path(__file__).parents[1] / "docs" / "tolerances.md").read_text(encoding="utf-8")


def test_the_example_of_the_page():
    example = re.search(r"````markdown\n(.*?)````", PAGE, re.DOTALL)[1]
    report = check_text("example.md", example)
    assert report.clean, [(j.claim.text, j.verdict, j.message) for j in report.claims]
    assert (report.counts["agrees"], report.counts["given"]) == (9, 1)


def test_the_anchors_of_findings_stand_on_the_page():
    heads = {head.lower().replace(" ", "-") for head in re.findall(r"^## (.*)$", PAGE, re.MULTILINE)}
    wanted = {rule.anchor.partition("#")[2] for rule in RULES.values() if rule.anchor.startswith("tolerances.md#")}
    assert wanted == {"ratings", "preferred-values"} and wanted <= heads
