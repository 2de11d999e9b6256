"""Cautions that a sheet raises by itself. They fail no sheet.

Limits from memory of the standards: 50 V a.c. and 120 V d.c. end extra-low voltage (IEC 60364-4-41, clause 414), of which the
more cautious is told for both; 20 J at 2 V and more is a hazardous energy (IEC 60950-1, definition 1.2.8.10). 50 Hz and 60 Hz are
the standard frequencies of supply (IEC 60196). Voltages and energies by hand.
"""

from __future__ import annotations

import math

import pytest

from calccheck import check_text
from calccheck.model import Report

KINDS = ("hazard", "touch-voltage", "mains", "stored-energy")


def report(*lines: str, front: str = "") -> Report:
    head = f"---\nsheet: EX-1\n{front}---\n\n" if front else ""
    return check_text("sheet.md", head + "\n".join(["```circuit", "reference g", *lines, "```", ""]))


def told(found: Report) -> dict[str, str]:
    every = [f for f in found.findings if f.kind in KINDS]
    assert all(f.severity == "caution" for f in every) and len({f.kind for f in every}) == len(every)
    return {f.kind: f.message for f in every}


def test_a_hazard_is_told_in_the_sheets_own_words_at_its_line():
    found = report("V1: 5 V, a to g", "R1: 1 kΩ, a to g", front="hazard: the bank stays charged for 10 min\nby: QD\n")
    (finding,) = [f for f in found.findings if f.kind == "hazard"]
    assert finding.message == "the bank stays charged for 10 min" and found.clean
    assert found.reading.sheet.line_column(finding.span.start) == (3, 1)
    assert found.reading.sheet.text[finding.span.start : finding.span.end].startswith("hazard: the bank")


def test_no_hazard_no_caution():
    assert told(report("V1: 5 V, a to g", "R1: 1 kΩ, a to g", front="hazard:\n")) == {}
    assert told(check_text("minutes.md", "---\nhazard: none of ours\n---\n# Minutes\n")) == {}


@pytest.mark.parametrize(
    ("volts", "caution"), [("49.9", False), ("50", True), ("-50", True), ("-49.99", False), ("325", True)]
)
def test_fifty_volts_and_more_between_a_node_and_the_reference(volts, caution):
    found = report(f"V1: {volts} V, a to g", "R1: 1 kΩ, a to g")
    assert ("touch-voltage" in told(found)) == caution and found.clean


def test_two_nodes_that_are_each_below_the_limit():
    """+30 V and −30 V: 60 V between them."""
    found = report("V1: 30 V, a to g", "V2: 30 V, g to b", "R1: 1 kΩ, a to b")
    assert "60 V stand between a and b" in told(found)["touch-voltage"]
    assert told(report("V1: 24 V, a to g", "V2: 24 V, g to b", "R1: 1 kΩ, a to b")) == {}


def test_a_divider_is_judged_by_its_solution_not_by_its_source():
    """10 mA into 1 kΩ + 4.1 kΩ: 51 V."""
    assert "51.0 V" in told(report("I1: 10 mA, g to a", "R1: 1 kΩ, a to b", "R2: 4.1 kΩ, b to g"))["touch-voltage"]
    assert told(report("I1: 10 mA, g to a", "R1: 1 kΩ, a to b", "R2: 3.9 kΩ, b to g")) == {}


def test_phasors_by_magnitude_between_nodes():
    """40 V at 0° and at 180°: 80 V apart; at 0° and 60° they are 40 V apart, a triangle with equal sides."""
    apart = report("V1: 40 V, a to g, 400 Hz", "V2: 40 V ∠ 180°, b to g, 400 Hz", "R1: 1 kΩ, a to b")
    assert "80 V r.m.s. stand between a and b" in told(apart)["touch-voltage"]
    near = report("V1: 40 V, a to g, 400 Hz", "V2: 40 V ∠ 60°, b to g, 400 Hz", "R1: 1 kΩ, a to b")
    assert told(near) == {}


def test_peak_phasors_count_by_their_rms():
    """70 V peak are 49.5 V r.m.s., 71 V peak are 50.2 V."""
    front = "check:\n  phasors: peak\n"
    assert told(report("V1: 70 V, a to g, 400 Hz", "R1: 1 kΩ, a to g", front=front)) == {}
    assert "50.2 V" in told(report("V1: 71 V, a to g, 400 Hz", "R1: 1 kΩ, a to g", front=front))["touch-voltage"]


def test_several_frequencies_add_by_their_squares():
    """40 V DC and 30 V r.m.s.: √(40² + 30²) = 50 V."""
    found = report("V1: 40 V, a to g", "V2: 30 V, b to a, 400 Hz", "R1: 1 kΩ, b to g")
    assert "50 V r.m.s. stand between" in told(found)["touch-voltage"]
    assert told(report("V1: 39 V, a to g", "V2: 30 V, b to a, 400 Hz", "R1: 1 kΩ, b to g")) == {}


@pytest.mark.parametrize(
    ("hertz", "caution"), [("50 Hz", 50), ("60 Hz", 60), ("0.05 kHz", 50), ("400 Hz", 0), ("16.7 Hz", 0)]
)
def test_sources_at_mains_frequency(hertz, caution):
    said = told(report(f"Vs: 12 V, a to g, {hertz}", "R1: 1 kΩ, a to g"))
    assert list(said) == (["mains"] if caution else [])
    assert not caution or said["mains"].startswith(f"Vs: {caution} Hz is the frequency of the mains")


@pytest.mark.parametrize(
    ("volts", "farads", "caution"),
    [
        ("20", "100 mF", True),
        ("20", "99 mF", False),
        ("40", "25 mF", True),
        ("1.9", "20 F", False),
        ("2", "10 F", True),
    ],
)
def test_energy_stored_in_capacitors(volts, farads, caution):
    """½ × 0.1 F × (20 V)² = 20 J; ½ × 0.025 F × (40 V)² = 20 J; ½ × 10 F × (2 V)² = 20 J; 36.1 J at 1.9 V is below 2 V."""
    found = report(f"V1: {volts} V, a to g", "R1: 1 kΩ, a to b", f"C1: {farads}, b to g")
    assert ("stored-energy" in told(found)) == caution and found.clean
    if caution:
        assert told(found)["stored-energy"].startswith("C1 stores 20 J")


def test_energy_at_the_crest_of_an_alternating_voltage():
    """40 V r.m.s., 56.57 V crest: ½ × 12.5 mF × 3200 V² = 20 J."""
    assert math.isclose(0.5 * 0.0125 * (40 * math.sqrt(2)) ** 2, 20)
    assert "stored-energy" in told(report("V1: 40 V, a to g, 400 Hz", "C1: 12.6 mF, a to g"))
    assert told(report("V1: 40 V, a to g, 400 Hz", "C1: 12.4 mF, a to g")) == {}


def test_a_circuit_without_a_solution_or_with_free_symbols_says_nothing_of_volts():
    assert told(report("V1: 100 V, a to g", "V2: 90 V, a to g")) == {}
    assert told(report("V1: 100 V, a to g", "R1: R Ω, a to g")) == {}


def test_every_caution_reminds_who_decides():
    found = report("V1: 230 V, a to g, 50 Hz", "C1: 10 mF, a to g")
    said = told(found)
    assert set(said) == {"touch-voltage", "mains", "stored-energy"}
    assert all("local codes and licensed practice decide" in message for message in said.values())
