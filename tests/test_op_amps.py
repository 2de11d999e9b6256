"""Ideal op-amps: published stages, other formulations, missing feedback."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest
import sympy
from circuits import ac, circuit, op_amp, part
from hypothesis import given, settings
from hypothesis import strategies as st

from calccheck.solve import Unsolvable, solve, solve_batch, state, total


def refused(*parts, hertz=None, reference="com"):
    with pytest.raises(Unsolvable) as caught:
        solve(circuit(*parts, reference=reference), hertz)
    return caught.value.findings


# --- op-amps: published ---------------------------------------------------------------------------------------------

# Khalid Khan Yousafzai, Circuit Analysis (open textbook), op-amps: examples and exercises; T. R. Kuphaldt et al., Lessons in
# Electric Circuits, vol. III, ch. 8, divided feedback. All printed as whole numbers or fractions.
OP_AMPS = {
    "Kuphaldt: non-inverting, gain of 2": (
        [part("V", "VS", "p", "g", 6), part("R", "R1", "n", "g", 1000), part("R", "R2", "o", "n", 1000), op_amp("U", "p", "n", "o")],
        {"o": 12, "n": 6}, {"R1": Fraction(6, 1000)},
    ),
    "Yousafzai: two direct inputs": (
        [part("V", "VP", "p", "g", 5), part("V", "VN", "s", "g", 2), part("R", "R1", "s", "n", 2000), part("R", "R2", "n", "o", 8000),
         op_amp("U", "p", "n", "o")],
        {"o": 17}, {},
    ),
    "Yousafzai: inverting, a resistor at the virtual ground and a load": (
        [part("V", "VS", "s", "g", "0.4"), part("R", "R1", "s", "n", 12000), part("R", "R2", "n", "o", 82000), part("R", "R3", "n", "g", 10000),
         part("R", "RL", "o", "g", 5000), op_amp("U", "g", "n", "o")],
        {"o": Fraction(-41, 6) * Fraction(2, 5)}, {"RL": Fraction(-41, 75000)},
    ),
    "Yousafzai: transimpedance": (
        [part("I", "IS", "g", "n", "0.002"), part("R", "Rf", "n", "o", 4000), part("R", "RL", "o", "g", 80), op_amp("U", "g", "n", "o")],
        {"o": -8}, {"RL": Fraction(-1, 10)},
    ),
    "Yousafzai: attenuator, then non-inverting": (
        [part("V", "VS", "s", "g", 1), part("R", "Ra", "s", "p", 40000), part("R", "Rb", "p", "g", 10000), part("R", "R1", "n", "g", 2000),
         part("R", "R2", "n", "o", 48000), op_amp("U", "p", "n", "o")],
        {"o": 5}, {},
    ),
    "Kuphaldt: instrumentation amplifier, 1 + 2R/R_gain for R = 1 kΩ and 100 Ω": (
        [part("V", "V1", "i1", "g", 0), part("V", "V2", "i2", "g", "0.001"), op_amp("U1", "i1", "p1", "p3"), op_amp("U2", "i2", "p2", "p4"),
         part("R", "Ra", "p3", "p1", 1000), part("R", "Rg", "p1", "p2", 100), part("R", "Rb", "p2", "p4", 1000), part("R", "Rc", "p3", "n", 1000),
         part("R", "Rd", "n", "o", 1000), part("R", "Re", "p4", "q", 1000), part("R", "Rf", "q", "g", 1000), op_amp("U3", "q", "n", "o")],
        {"o": Fraction(21, 1000)}, {},
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", OP_AMPS)
def test_printed_op_amp_stages(name):
    parts, potentials, currents = OP_AMPS[name]
    solution = solve(circuit(*parts, reference="g"))
    at = total(solution)
    assert {n: at.potentials[n] for n in potentials} == potentials
    assert {n: at.currents[n] for n in currents} == currents
    assert solution.gap < 1e-12 and solution.residual < 1e-12 and solution.balance < 1e-12


def test_superposition_of_two_inputs():
    """The same two-input example: 5 V alone gives 25 V, 2 V alone −8 V (the book's gains, 1 + 8/2 and −8/2)."""
    solution = solve(circuit(*OP_AMPS["Yousafzai: two direct inputs"][0], reference="g"))
    assert {n: s.potentials["o"] for n, s in solution.parts.items()} == {"VP": 25, "VN": -8}
    assert state(solution, ["VN"]).potentials["o"] == -8


def test_currents_of_an_op_amp():
    """By hand: 12 mA goes on from the output through the load, 6 mA through the feedback, both out of the output."""
    parts = [*OP_AMPS["Kuphaldt: non-inverting, gain of 2"][0], part("R", "RL", "o", "g", 1000)]
    at = total(solve(circuit(*parts, reference="g"))).currents
    assert (at["U,plus"], at["U,minus"], at["U,out"]) == (0, 0, Fraction(-18, 1000))


# --- op-amps: another formulation -----------------------------------------------------------------------------------

RESISTORS = st.lists(st.integers(1, 99), min_size=5, max_size=5)


@settings(max_examples=8, deadline=None)
@given(RESISTORS)
def test_difference_amplifier_against_the_limit_of_a_finite_gain(ohms):
    """sympy: v_o = A·(v₊ − v₋) with A left a symbol, the node equations solved, then A → ∞."""
    r = [sympy.Integer(x) for x in ohms]
    v1, v2, plus, minus, out, gain = sympy.symbols("v1 v2 p m o A")
    solved = sympy.solve(
        [(minus - v1) / r[0] + (minus - out) / r[1], (plus - v2) / r[2] + plus / r[3], out - gain * (plus - minus)],
        [plus, minus, out], dict=True,
    )[0]  # fmt: skip
    expected = sympy.limit(solved[out].subs({v1: 3, v2: 7}), gain, sympy.oo)
    at = total(solve(circuit(
        part("V", "V1", "a", "com", 3), part("V", "V2", "b", "com", 7), part("R", "R1", "a", "m", ohms[0]), part("R", "R2", "m", "o", ohms[1]),
        part("R", "R3", "b", "p", ohms[2]), part("R", "R4", "p", "com", ohms[3]), part("R", "RL", "o", "com", ohms[4]), op_amp("U", "p", "m", "o"),
    )))  # fmt: skip
    assert sympy.Rational(at.potentials["o"].numerator, at.potentials["o"].denominator) == expected


@settings(max_examples=25, deadline=None)
@given(RESISTORS)
def test_a_high_gain_comes_near_the_ideal(ohms):
    """The same circuit with a controlled source of gain 10⁹ for the op-amp."""
    parts = [part("V", "V1", "a", "com", 3), part("R", "R1", "a", "m", ohms[0]), part("R", "R2", "m", "o", ohms[1]),
             part("R", "R3", "m", "com", ohms[2]), part("R", "R4", "o", "x", ohms[3]), part("R", "R5", "x", "com", ohms[4])]  # fmt: skip
    ideal = total(solve(circuit(*parts, op_amp("U", "com", "m", "o"))))
    near = total(solve(circuit(*parts, part("E", "E", "o", "com", 10**9, ("com", "m")))))
    assert all(abs(near.potentials[n] - v) <= 1e-5 * ohms[1] for n, v in ideal.potentials.items())


def test_low_pass_of_second_order():
    """Unity-gain stage of R. P. Sallen and E. L. Key (IRE Trans. CT-2, 1955): H = 1/(1 + s·C₂·(R₁ + R₂) + s²·R₁·R₂·C₁·C₂)."""
    r1, r2, c1, c2, hertz = 10e3, 22e3, 4.7e-9, 1e-9, 5000
    s = 2j * math.pi * hertz
    solution = solve(circuit(
        ac("V", "V1", "a", "com", 1, hertz), part("R", "R1", "a", "b", 10000), part("R", "R2", "b", "p", 22000),
        part("C", "C1", "b", "o", "4.7e-9"), part("C", "C2", "p", "com", "1e-9"), op_amp("U", "p", "o", "o"), part("R", "RL", "o", "com", 1000),
    ), Fraction(hertz))  # fmt: skip
    expected = 1 / (1 + s * c2 * (r1 + r2) + s * s * r1 * r2 * c1 * c2)
    assert total(solution).potentials["o"] == pytest.approx(expected, rel=1e-9)
    assert solution.gap < 1e-12


# --- op-amps: what is missing ---------------------------------------------------------------------------------------

SOURCE, GROUNDED, LOAD = (
    part("V", "V1", "p", "com", 6),
    part("R", "R1", "n", "com", 1000),
    part("R", "RL", "o", "com", 1000),
)


@pytest.mark.parametrize(
    "parts",
    [
        [SOURCE, GROUNDED, LOAD, op_amp("U1", "p", "n", "o")],
        [SOURCE, GROUNDED, part("R", "R2", "p", "n", 1000), LOAD, op_amp("U1", "p", "n", "o")],
        [SOURCE, GROUNDED, op_amp("U1", "p", "n", "o")],  # nothing at its output at all
        [
            SOURCE,
            op_amp("U0", "p", "m", "m"),
            part("R", "R2", "m", "n", 5),
            GROUNDED,
            LOAD,
            op_amp("U1", "p", "n", "o"),
        ],
        [SOURCE, GROUNDED, part("C", "C1", "o", "n", "1e-6"), LOAD, op_amp("U1", "p", "n", "o")],  # feedback at AC only
    ],
)
def test_missing_feedback_is_said(parts):
    (found,) = refused(*parts)
    assert found.message.startswith("U1 has no feedback") and "minus input" in found.message
    assert ("a capacitor is a gap" in found.message) == any(e.kind == "capacitor" for e in parts)
    assert solve_batch([circuit(*parts)]) == [None]


def test_feedback_of_one_op_amp_through_another():
    """By hand: the inner stage inverts, gain −2, so the outer one is fed back through it: v_n = −2·v_o·1/2 = 1 V."""
    at = total(solve(circuit(
        part("V", "V1", "p", "com", 1), op_amp("U1", "p", "n", "o"), part("R", "Ra", "o", "m", 1000), part("R", "Rb", "m", "q", 2000),
        op_amp("U2", "com", "m", "q"), part("R", "Rc", "q", "n", 1000), part("R", "Rd", "n", "com", 1000),
    )))  # fmt: skip
    assert (at.potentials["o"], at.potentials["q"]) == (-1, 2)


def test_feedback_that_cancels_itself():
    bridge = [
        part("R", "R1", "o", "p", 10),
        part("R", "R2", "p", "com", 10),
        part("R", "R3", "o", "n", 10),
        part("R", "R4", "n", "com", 10),
    ]
    (found,) = refused(*bridge, part("I", "I1", "com", "p", 1), op_amp("U1", "p", "n", "o"))
    assert found.message.startswith("The feedback of U1 to its plus input cancels")
    assert solve(
        circuit(
            *bridge[:3], part("R", "R4", "n", "com", 11), part("I", "I1", "com", "p", 1), op_amp("U1", "p", "n", "o")
        )
    ).exact


def test_an_output_held_by_a_source():
    (found,) = refused(
        SOURCE, GROUNDED, part("R", "R2", "o", "n", 1000), part("V", "V2", "o", "com", 3), op_amp("U1", "p", "n", "o")
    )
    assert found.message.startswith("V2 and U1 (its output) make a loop without resistance")


def test_an_input_that_hangs_in_the_air():
    (found,) = refused(SOURCE, LOAD, op_amp("U1", "p", "n", "o"))
    assert found.message.startswith("Node n has no path to the reference com; parts there: U1.")
