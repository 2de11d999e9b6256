"""Circuits without a single solution at AC: resonance without loss, impedances and sources of unfit frequencies."""

from __future__ import annotations

import cmath
import math
from dataclasses import replace
from fractions import Fraction

import pytest
from circuits import ac, circuit, part

from calccheck.model import UNSTATED
from calccheck.solve import Unsolvable, solve, solve_batch, total
from calccheck.solve.branches import network_of
from calccheck.solve.nodal import condition


def polar(magnitude, degrees):
    return cmath.rect(magnitude, math.radians(degrees))


RESONANT = 1 / (2 * math.pi * math.sqrt(1e-3 * 1e-6))  # of 1 mH and 1 µF: ω²LC = 1 (Thomson's formula)
COIL, CAPACITOR = part("L", "L1", "a", "x", "1e-3"), part("C", "C1", "x", "com", "1e-6")


def refused(made, hertz):
    with pytest.raises(Unsolvable) as caught:
        solve(made, Fraction(hertz))
    return str(caught.value)


@pytest.mark.parametrize("hertz", [RESONANT, RESONANT * (1 + 1e-15)])
@pytest.mark.parametrize(
    "parts",
    [
        [ac("V", "V1", "a", "com", 1, RESONANT), COIL, CAPACITOR],  # a series circuit across a source
        [ac("I", "I1", "com", "a", 1, RESONANT), COIL, replace(CAPACITOR, plus="a", minus="x"), part("R", "R1", "x", "com", 5)],
        [ac("V", "V1", "v", "com", 1, RESONANT), part("R", "R1", "v", "a", 5), COIL, replace(CAPACITOR, plus="a", minus="x")],
    ],
)  # fmt: skip
def test_resonance_without_loss_is_refused_and_its_parts_named(parts, hertz):
    """Also where nothing stirs it: in the last circuit the loop hangs on a node without carrying current from the source."""
    made = circuit(*(replace(e, frequency=Fraction(hertz)) if e.frequency else e for e in parts))
    message = refused(made, hertz)
    assert f"At {hertz:.10g} Hz the reactances of L1 and C1 cancel" in message


@pytest.mark.parametrize("factor", [1 + 1e-6, 1 - 1e-9])
def test_beside_its_resonance_a_circuit_without_loss_is_solved(factor):
    """By hand: the reactances leave √(L/C)·(x − 1/x) with x = f/f₀."""
    f = Fraction(RESONANT * factor)
    solution = solve(circuit(ac("V", "V1", "a", "com", 1, f), COIL, CAPACITOR), f)
    x = math.sqrt(1e3) * 2 * (factor - 1)
    assert total(solution).currents["L1"] == pytest.approx(1 / (1j * x), rel=1e-5)
    assert abs(total(solution).currents["L1"] - solution.nodal.currents["L1"]) < 1e-4 * solution.amperes


def test_a_large_condition_number_beside_a_resonance_is_looked_at_closer():
    """Coils of 1 pH and more hung on 10¹² Ω make equations that look singular; one part in 10⁵ beside it a resonance is none."""
    f = Fraction(RESONANT * (1 + 1e-5))
    hung = [part("L", f"L{k}", f"n{k % 4}", f"n{(k + 1) % 4}", Fraction(k, 10**12)) for k in range(2, 6)]
    made = circuit(ac("V", "V1", "a", "com", 1, f), COIL, CAPACITOR, ac("I", "I1", "com", "n0", 1e-9, f), *hung,
                   part("R", "R1", "n2", "com", "1e12"))  # fmt: skip
    assert condition(network_of(made, f)) > 1e13
    at = total(solve(made, f))
    assert at.potentials["n3"] == pytest.approx(1000, rel=1e-9)
    assert at.currents["L1"] == pytest.approx(1 / (1j * math.sqrt(1e3) * 2e-5), rel=1e-4)


def test_with_loss_the_resonance_is_plain():
    """At resonance the reactances cancel and R alone is left, the voltage across each reactance being √(L/C)/R times it."""
    f = Fraction(RESONANT)
    solution = solve(circuit(ac("V", "V1", "v", "com", 1, f), part("R", "R1", "v", "a", 5), COIL, CAPACITOR), f)
    assert total(solution).currents["R1"] == pytest.approx(0.2, rel=1e-9)
    assert total(solution).potentials["x"] == pytest.approx(-1j * math.sqrt(1e3) / 5, rel=1e-9)


def test_impedances_that_cancel_are_refused():
    made = circuit(
        ac("V", "V1", "a", "com", 1, UNSTATED), ac("Z", "Z1", "a", "x", polar(10, 90)), ac("Z", "Z2", "x", "com", -10j)
    )
    assert "At AC the reactances of Z1 and Z2 cancel" in refused(made, UNSTATED)


def test_twelve_decades_of_impedance_are_no_resonance():
    """By hand: 1 nH (0.3 µΩ), 1 GΩ and 1 pF beside coils of µH; what a condition number takes for singular is solved."""
    parts = [part("L", f"L{k}", "b", "c", Fraction(k, 10**9)) for k in range(1, 4)]
    parts += [
        part("R", "R1", "c", "com", "1e9"),
        part("C", "C1", "b", "com", "1e-12"),
        part("R", "R2", "a", "b", "1e-3"),
    ]
    solution = solve(circuit(ac("V", "V1", "a", "com", 1, 50), *parts), Fraction(50))
    assert total(solution).currents["R1"] == pytest.approx(1e-9, rel=1e-9)
    assert total(solution).currents["C1"] == pytest.approx(2j * math.pi * 50e-12, rel=1e-9)


PLAIN = (part("R", "R1", "a", "b", 10), part("R", "R2", "b", "com", 10))
WANTING = {
    "an impedance at DC": (
        [part("V", "V1", "a", "com", 1), ac("Z", "Z1", "b", "com", 3j)], 0, "Z1 is an impedance, known at one AC frequency and not at DC",
    ),
    "an impedance in a circuit of several frequencies": (
        [ac("V", "V1", "a", "c", 1, 50), ac("V", "V2", "c", "com", 1, 60), ac("Z", "Z1", "b", "com", 3j)], 50,
        "Z1 is an impedance, known at one frequency, but the circuit has several: 50 Hz and 60 Hz",
    ),
    "an impedance at another frequency than the sources": (
        [ac("V", "V1", "a", "com", 1, 50), ac("Z", "Z1", "b", "com", 3j)], 1000, "several: 50 Hz and 1000 Hz",
    ),
    "a capacitor and no frequency": (
        [ac("V", "V1", "a", "com", 1, UNSTATED), part("C", "C1", "b", "com", 1)], UNSTATED, "C1 (capacitor) depends on the frequency",
    ),
    "an inductor without a value": (
        [ac("V", "V1", "a", "com", 1, 50), part("L", "L1", "b", "com")], 50, "L1 has no number for a value, which a solution at 50 Hz needs",
    ),
    "a phasor without a frequency beside one with": (
        [ac("V", "V1", "a", "c", 1, 50), ac("V", "V2", "c", "com", 1, UNSTATED)], 50, "V2 has no frequency, but others are named here",
    ),
    "a phasor at DC": ([ac("V", "V1", "a", "com", 1j)], 0, "V1 has a phasor for a value but no frequency"),
    "a frequency out of all bounds": ([ac("V", "V1", "a", "com", 1, Fraction(10) ** 40)], Fraction(10) ** 40, "1e30 Hz"),
    "sources of two frequencies side by side": (
        [ac("V", "V1", "a", "com", 1, 50), ac("V", "V2", "a", "com", 1, 60)], 50,
        "V1 and V2 (zeroed at 50 Hz) make a loop without resistance: the voltages around it add up to 1 V instead of zero.",
    ),
    "a node between current sources": (
        [ac("V", "V1", "a", "com", 1, 50), ac("I", "I1", "com", "x", 3, 50), ac("I", "I2", "com", "x", 4j, 50)], 50,
        "fed only by current sources (I1 and I2), and the currents into it add up to 5 A ∠ 53.13",
    ),
    "a capacitance of zero": (
        [ac("V", "V1", "a", "com", 1, 50), part("C", "C0", "b", "x", 0)], 50, "only gaps lead on: C0 (a capacitance of zero)",
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", WANTING)
def test_what_is_wanting_is_said(name):
    parts, hertz, words = WANTING[name]
    made = circuit(*PLAIN, *parts)
    assert words in refused(made, hertz)
    assert solve_batch([made], Fraction(hertz)) == [None]


def test_an_impedance_beside_a_source_of_direct_voltage_is_solved_at_its_frequency():
    """By hand: 10 V over 10 + 10 + (10 ∥ j10) − 0 Ω; the battery is a short."""
    made = circuit(
        *PLAIN, ac("V", "V1", "a", "c", 10, 50), part("V", "V0", "c", "com", 5), ac("Z", "Z1", "b", "com", 10j)
    )
    assert total(solve(made, Fraction(50))).currents["V1"] == pytest.approx(-10 / (10 + 100j / (10 + 10j)))


def test_branches_of_a_capacitor_and_an_inductor():
    """Reactances from memory of every handbook: X_L = 2πfL, X_C = 1/(2πfC); at 50 Hz 1 H is 314.16 Ω, 1 µF 3183.1 Ω."""
    made = circuit(part("L", "L1", "a", "com", 1), part("C", "C1", "a", "com", "1e-6"))
    coil, capacitor = network_of(made, Fraction(50)).branches
    assert coil.value == pytest.approx(314.159265j) and capacitor.value == pytest.approx(-3183.09886j)
    assert [b.role for b in network_of(made).branches] == ["link", "gap"]
