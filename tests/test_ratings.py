"""Ratings, preferred values and sensitivities: expected numbers are worked by hand beside each sheet."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest
from tolerant_sheets import DIVIDER, FILTER, NOMINAL, front

from calccheck import check_text
from calccheck.model import Settings
from calccheck.pipeline import work_out
from calccheck.preferred_values import between
from calccheck.source import Sheet

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
