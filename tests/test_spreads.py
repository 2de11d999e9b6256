"""Root-sum-square and random values, against the ``uncertainties`` package, JCGM 100 and mpmath's quadrature."""

from __future__ import annotations

import math

import mpmath
import pytest
from tolerant_sheets import DIVIDER, NOMINAL, front, judged, verdict
from uncertainties import ufloat, umath

from calccheck import check_text

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
