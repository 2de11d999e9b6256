"""Claims over tolerances: extremes, root-sum-square, random values, bounds at their worst; ratings and preferred values.

Expected numbers are worked by hand beside each sheet, by the ``uncertainties`` package (linear propagation, JCGM 100), or by
mpmath's quadrature.
"""

from __future__ import annotations

import math
import re
from fractions import Fraction
from pathlib import Path

import mpmath
import pytest
from uncertainties import ufloat, umath

from calccheck import check_text
from calccheck.model import Settings
from calccheck.pipeline import work_out
from calccheck.preferred_values import between
from calccheck.rules import RULES
from calccheck.source import Sheet

DIVIDER = """```circuit
reference com
Vb: 12 V ±5 %,      a to com
R1: 10 kΩ ±1 %,     a to out
R2: 4.7 kΩ ±2 %,    out to com
given Vmax = 4.2 V ±1 %
given Vtyp = 4.2 V
```

"""
HIGH = 12.6 * 4.794 / (9.9 + 4.794)  # 4.11082 V
LOW = 11.4 * 4.606 / (10.1 + 4.606)  # 3.57054 V
NOMINAL = 12 * 4.7 / 14.7  # 3.83673 V


def front(**settings):
    lines = "\n".join(f"  {key}: {value}" for key, value in settings.items())
    return f"---\nsheet: TS-199\ncheck:\n{lines}\n---\n" if settings else ""


def judged(claim, circuit=DIVIDER, **settings):
    return check_text("sheet.md", f"{front(**settings)}{circuit}`{claim}`\n").claims[-1]


def verdict(claim, circuit=DIVIDER, **settings):
    return judged(claim, circuit, **settings).verdict


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


# --- root-sum-square ------------------------------------------------------------------------------------------------


def test_root_sum_square_by_linear_propagation():
    """Deviations as standard uncertainties: what comes out is in the same measure (JCGM 100:2008, 5.1.2)."""
    vb, r1, r2 = ufloat(12, 0.6), ufloat(10e3, 100), ufloat(4.7e3, 94)
    out = vb * r2 / (r1 + r2)
    found = judged(f"rss V_out = {out.n:.3f} V ± {out.s:.4f} V")
    assert found.verdict == "agrees"
    assert float(found.high.value) - NOMINAL == pytest.approx(out.s, rel=1e-7)
    for word in ("root-sum-square", "JCGM 100, 5.1.2", "independent"):
        assert word in found.message
    assert verdict(f"rss V_out = {out.n - out.s:.3f} V … {out.n + out.s:.3f} V") == "agrees"
    assert verdict("rss V_out = 3.837 V ± 0.274 V") == "differs"  # that is the extreme


@pytest.mark.parametrize("seed", range(3))
def test_root_sum_square_of_nonlinear_formulas(seed):
    ohms = 3300 * (1 + seed)
    circuit = f"```circuit\nV1: 5 V ±2 %, a to gnd\nR1: 1 kΩ ±1 %, a to b\nR2: {ohms} Ω ±3 %, b to gnd\n```\n\n"
    v1, r1, r2 = ufloat(5, 0.1), ufloat(1e3, 10), ufloat(ohms, 0.03 * ohms)
    i = v1 / (r1 + r2)
    for text, expected, unit in (
        ("P_R2", i**2 * r2, "W"),
        ("(P_R1 / P_R2)", r1 / r2, ""),
        ("sqrt(P_R2 × R1)", umath.sqrt(i**2 * r2 * r1), "V"),
    ):
        behind = text if text[0] == "(" else f"({text})"
        claim = f"rss {behind} = {expected.n:.6g} {unit} ± {expected.s:.4g} {unit}".replace("e-05", "×10⁻⁵").replace(
            "e-06", "×10⁻⁶"
        )
        assert verdict(claim, circuit) == "agrees", judged(claim, circuit).message


def test_ten_resistors_of_the_guide():
    """JCGM 100:2008, 5.2.2: ten resistors of 1 kΩ with 100 mΩ each, 0.32 Ω together where they are independent, 1 Ω where not."""
    lines = "".join(f"R{k}: 1 kΩ ±100 mΩ, n{k} to n{k + 1}\n" for k in range(10))
    circuit = f"```circuit\nreference n0\n{lines}```\n\n"
    assert verdict("rss R_{n10,n0} = 10 kΩ ± 0.32 Ω", circuit) == "agrees"
    assert verdict("worst R_{n10,n0} = 10 kΩ ± 1.0 Ω", circuit) == "agrees"


def test_worst_rejection_of_a_difference_amplifier():
    """Texas Instruments, RES11A (SLPS785), CMRR section: 62 dB for a gain of four from resistors of 0.1 %, (1 + G)/(4·t)."""
    circuit = """```circuit
V1: 1 V,             s to gnd
R1: 1 kΩ ±0.1 %,     s to n
R2: 4 kΩ ±0.1 %,     n to o
R3: 1 kΩ ±0.1 %,     s to p
R4: 4 kΩ ±0.1 %,     p to gnd
U1: op-amp, plus p, minus n, out o
RL: 10 kΩ,           o to gnd
```

"""
    found = judged("max |V_o| = 3.205 mV", circuit)
    assert found.verdict == "agrees", found.message
    assert 20 * math.log10(4 / float(found.computed.value)) == pytest.approx(62, abs=0.5)


# --- random values --------------------------------------------------------------------------------------------------


def ratio_moments(low1, high1, low2, high2):
    """Mean and standard deviation of y/(x + y), x and y uniform and independent, by quadrature."""
    area = (high1 - low1) * (high2 - low2)
    first, second = (
        mpmath.quad(lambda x, y, n=n: (y / (x + y)) ** n, [low1, high1], [low2, high2]) / area for n in (1, 2)
    )
    return float(first), float(mpmath.sqrt(second - first**2))


PAIR = "```circuit\nV1: 10 V, a to gnd\nR1: 1 kΩ ±10 %, a to b\nR2: 2 kΩ ±20 %, b to gnd\n```\n\n"


def test_standard_deviation_of_a_divider():
    _, sigma = ratio_moments(900, 1100, 1600, 2400)
    found = judged(f"sigma V_b = {10 * sigma * 1e3:.0f} mV", PAIR)
    assert found.verdict == "agrees"
    assert float(found.computed.value) == pytest.approx(10 * sigma, rel=0.01)
    assert "100000 random values, independent, uniform within the tolerances, seed 1" in found.message
    assert verdict(f"sigma V_b = {10.6 * sigma * 1e3:.0f} mV", PAIR) == "differs"


def test_normal_spread_has_the_tolerance_at_three_sigma():
    """To first order: slopes of y/(x + y) times 33.3 Ω and 133.3 Ω."""
    slope = math.hypot(2 / 9e3 * 1e3 / 30, 1 / 9e3 * 2e3 * 0.2 / 3) * 10
    found = judged(f"sigma V_b = {slope * 1e3:.0f} mV", PAIR, spread="normal", samples=200000, seed=7)
    assert float(found.computed.value) == pytest.approx(slope, rel=0.02)
    assert "200000 random values, independent, normal with the tolerances at three sigma, seed 7" in found.message


def test_yield_against_the_area():
    """y/(x + y) ≤ 0.68 where y ≤ 2.125·x: of the box 900…1100 by 1600…2400 a part that is worked by hand.

    y reaches 2.125·x between 1912.5 and 2337.5, so the share is (2125 − 1600)/800.
    """
    share = (2125 - 1600) / 800
    assert verdict(f"yield (V_b ≤ 6.8 V) = {100 * share:.1f} %", PAIR) == "agrees"
    assert verdict("yield (V_b ≤ 6.8 V) ≥ 65 %", PAIR) == "agrees"
    assert verdict("yield (V_b ≤ 6.8 V) ≥ 65.7 %", PAIR) == "agrees"  # within three standard errors of the sample
    assert verdict("yield (V_b ≤ 6.8 V) ≥ 67 %", PAIR) == "differs"
    assert verdict("yield (V_b ≤ 6.8 V) ≤ 65 %", PAIR) == "differs"
    corner = 0.75 * (1100 - 1600 / 1.5) ** 2 / (200 * 800)  # where y < 1.5·x, a triangle
    both = judged(f"yield (6 V ≤ V_b ≤ 6.8 V) = {100 * (share - corner):.1f} %", PAIR)
    assert both.verdict == "agrees", both.message


def test_a_yield_says_what_it_was_drawn_from():
    told = judged("yield (V_b ≤ 6.8 V) ≥ 60 %", PAIR, samples=5000, seed=3).message
    assert ("5000 random values" in told and "seed 3" in told and "three" not in told) or "3 standard errors" in told
    assert judged("yield (V_b ≤ 6.8 V) ≥ 60 %", PAIR).message == judged("yield (V_b ≤ 6.8 V) ≥ 60 %", PAIR).message


@pytest.mark.parametrize(
    ("key", "value"), [("samples", "10"), ("samples", "many"), ("seed", "-1"), ("spread", "triangular")]
)
def test_settings_of_sampling(key, value):
    report = check_text("sheet.md", front(**{key: value}) + DIVIDER)
    assert [f.kind for f in report.findings] == ["setting"]


# --- alternating current --------------------------------------------------------------------------------------------

FILTER = "```circuit\nV1: 1 V, a to gnd, 1000 Hz\nR1: 1 kΩ ±5 %, a to b\nC1: 100 nF ±10 %, b to gnd\n```\n\n"


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


# --- ratings --------------------------------------------------------------------------------------------------------

RATED = """```circuit
reference com
Vb: 12 V ±5 %,      a to com,    max 10 mA
R1: 1 kΩ ±1 %,      a to out,    max 125 mW, max 10 V
R2: 470 Ω ±2 %,     out to com,  max 50 mW
case hot: Vb = 24 V
```

"""


def ratings(text, **settings):
    report = check_text("sheet.md", front(**settings) + text)
    return report, [f for f in report.findings if f.kind == "rating"]


def test_ratings_at_the_worst_and_in_the_worst_case():
    """In case hot, without the tolerance of Vb: 24 V / (990 + 460.6) Ω = 16.5 mA at the most."""
    report, found = ratings(RATED)
    amps = 24 / (990 + 460.6)
    by_part = {(h.part, h.rating.text): h for h in report.ratings}
    assert float(by_part["Vb", "max 10 mA"].worst.value) == pytest.approx(amps, rel=1e-9)
    assert by_part["Vb", "max 10 mA"].case == "hot"
    assert float(by_part["R1", "max 10 V"].worst.value) == pytest.approx(24 * 1010 / (1010 + 460.6), rel=1e-9)
    assert float(by_part["R1", "max 125 mW"].worst.value) == pytest.approx(
        990 * amps**2 if False else max(r * (24 / (r + 460.6)) ** 2 for r in (990, 1010)), rel=1e-9
    )
    assert [h.share for h in report.ratings] == sorted((h.share for h in report.ratings), reverse=True)
    assert len(found) == 4 and not report.clean
    assert "R1: its power comes to" in found[1].message and "in case hot" in found[1].message


def test_ratings_that_hold_are_kept_with_the_nearest_first():
    report, found = ratings(RATED.replace("case hot: Vb = 24 V\n", ""))
    assert found == [] and report.clean
    near = report.ratings[0]
    assert (near.part, near.rating.text) == ("Vb", "max 10 mA")
    assert float(near.worst.value) == pytest.approx(12.6 / (990 + 460.6), rel=1e-9)
    assert near.share == pytest.approx(100 * 12.6 / (990 + 460.6), rel=1e-9)
    assert near.where == "at Vb high, R1 and R2 low" and near.proved


def test_derating():
    _, found = ratings(RATED.replace("case hot: Vb = 24 V\n", ""), derate=0.8)
    assert len(found) == 2  # 8.69 mA of 8 mA; 8.59 V of 8 V
    assert "passes the rating of 10 mA, derated to 8 mA, by" in found[0].message


def test_a_rating_holds_the_size():
    _, found = ratings("```circuit\nI1: 30 mA, a to gnd, max 20 mA\nR1: 1 kΩ, a to gnd, max 20 V\n```\n")
    assert len(found) == 2  # −30 V across R1


def test_a_voltage_rating_in_ac_is_dc_and_all_peaks():
    """5 V and 3 V rms and 1 V rms: 5 + √2·(3 + 1) = 10.66 V; the current's rms √(25 + 9 + 1) V over 1 kΩ is 5.916 mA."""
    circuit = """```circuit
reference com
V0: 5 V,            a to com
V1: 3 V,            b to a,    50 Hz
V2: 1 V,            c to b,    400 Hz
R1: 1 kΩ,           c to com,  max 10.6 V, max 5.91 mA, max 34.9 mW
```
"""
    report, found = ratings(circuit)
    assert len(found) == 3
    worst = {h.rating.text: float(h.worst.value) for h in report.ratings}
    assert worst["max 10.6 V"] == pytest.approx(5 + math.sqrt(2) * 4, rel=1e-9)
    assert worst["max 5.91 mA"] == pytest.approx(math.sqrt(35) * 1e-3, rel=1e-9)
    assert worst["max 34.9 mW"] == pytest.approx(35e-3, rel=1e-9)
    report, _ = ratings(circuit, phasors="peak")
    worst = {h.rating.text: float(h.worst.value) for h in report.ratings}
    assert worst["max 10.6 V"] == pytest.approx(9, rel=1e-9)
    assert worst["max 5.91 mA"] == pytest.approx(math.sqrt(25 + 4.5 + 0.5) * 1e-3, rel=1e-9)


def test_a_matched_load_is_found_within_its_tolerance():
    """V²/(4·Rs) = 250 mW at RL = 100 Ω, inside 120 Ω ±50 %; at its ends 234.4 mW and 229.6 mW."""
    circuit = "```circuit\nV1: 10 V, a to gnd\nRs: 100 Ω, a to b\nRL: 120 Ω ±50 %, b to gnd, max 240 mW\n```\n"
    report, found = ratings(circuit)
    assert len(found) == 1 and "RL = 100" in found[0].message
    assert float(report.ratings[0].worst.value) == pytest.approx(0.25, rel=1e-9)


def test_ratings_of_a_transistor_and_what_no_model_tells():
    circuit = """```circuit
Vcc: 10 V,        c to gnd
Rb:  470 kΩ,      c to b
Rc:  2.2 kΩ,      c to k
Q1:  npn, base b, collector k, emitter gnd, V_BE 0.7 V, beta 100, max 11 mW, max 5 V, max 1 mA
U1:  op-amp, plus b, minus o, out o, max 1 W
RL:  10 kΩ,       o to gnd
```
"""
    report, found = ratings(circuit)
    amps = 9.3 / 470e3
    volts = 10 - 2200 * 100 * amps
    worst = {h.rating.text: float(h.worst.value) for h in report.ratings}
    assert worst == pytest.approx(
        {"max 11 mW": volts * 100 * amps + 0.7 * amps, "max 5 V": volts, "max 1 mA": 100 * amps}
    )
    assert "could not be checked" in found[-1].message and "op-amp" in found[-1].message


def test_ratings_with_free_symbols_are_not_checked():
    report, found = ratings("```circuit\nV1: V V, a to gnd\nR1: 1 kΩ, a to gnd, max 1 W\n```\n")
    assert [f.message for f in found] == ["the rating of R1 could not be checked: it may depend on the free symbols V"]
    assert report.ratings == ()


def test_an_assumption_has_a_tolerance_of_its_own_kind():
    report = check_text("sheet.md", "---\nsheet: TS-199\n---\n`given Vmax = 15 V ±0.1 A` `given T = 40 °C ±5 %`\n")
    assert [j.verdict for j in report.claims] == ["unchecked", "unchecked"]
    assert "the value a voltage" in report.claims[0].message and "where degrees count from" in report.claims[1].message


def test_a_circuit_that_does_not_stand_is_not_rated_twice():
    report = check_text("sheet.md", "```circuit\nV1: 1 V, a to gnd, max 1 mA\nV2: 2 V, a to gnd\n```\n")
    assert [f.kind for f in report.findings] == ["structure"] and report.ratings == ()


# --- preferred values -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "series", "expected"),
    [("4700", "E24", None), ("4800", "E24", ("4700", "5100")), ("4700", "E96", ("4640", "4750")), ("0.95", "E24", ("0.91", "1")),
     ("105", "E12", ("100", "120")), ("249", "E96", None), ("9.19", "E192", ("9.09", "9.2")), ("9.2", "E192", None)],
)  # fmt: skip
def test_neighbours_in_a_series(value, series, expected):
    """IEC 60063:2015, from memory as in test_standards."""
    assert between(Fraction(value), series) == (expected and tuple(map(Fraction, expected)))


def test_resistances_are_held_against_the_series():
    circuit = "```circuit\nV1: 10 V, a to gnd\nR1: 4.8 kΩ, a to b\nR2: 47 kΩ, b to gnd\nR3: 2 * 2.4 kΩ, b to gnd\nG1: 1.05 mS, b to gnd\n```\n"
    report = check_text("sheet.md", front(preferred="E24") + circuit)
    assert [(f.kind, f.severity) for f in report.findings] == [("preferred", "caution")]
    assert (
        report.findings[0].message == "R1: 4.8 kΩ is no value of E24 (IEC 60063); its neighbours are 4.7 kΩ and 5.1 kΩ"
    )
    assert check_text("sheet.md", circuit).findings == ()


# --- sensitivities --------------------------------------------------------------------------------------------------


def test_sensitivities_in_the_working():
    """dV/dR of a divider: V·R1/(R1 + R2)² of the lower, −V·R2/(R1 + R2)² of the upper resistor."""
    found = {s.name: s for s in work_out(Sheet("sheet.md", DIVIDER), "V_out").sensitivities}
    assert list(found) == ["Vb", "R2", "R1"]
    lower, upper = 12 * 10e3 / 14.7e3**2, -12 * 4.7e3 / 14.7e3**2
    assert float(found["R2"].by_percent.value) == pytest.approx(47 * lower, rel=1e-7)
    assert float(found["R1"].by_percent.value) == pytest.approx(100 * upper, rel=1e-7)
    assert float(found["R2"].high.value) == pytest.approx(12 * 4.794 / 14.794 - NOMINAL, rel=1e-7)


def test_sensitivities_of_a_phasor_are_those_of_its_magnitude():
    x = 2 * math.pi * 1000 * 1e3 * 100e-9
    found = {s.name: s for s in work_out(Sheet("sheet.md", FILTER), "V_b").sensitivities}
    relative = -x * x / (1 + x * x)  # of 1/√(1 + x²)
    expected = 0.01 * relative / math.hypot(1, x)
    assert float(found["C1"].by_percent.value) == pytest.approx(expected, rel=1e-6)
    assert float(found["R1"].by_percent.value) == pytest.approx(expected, rel=1e-6)
    assert Settings().samples == 100_000


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
