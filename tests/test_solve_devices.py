"""Op-amps, transformers, transistors and diodes: published examples, other formulations, missing feedback, assumed states."""

from __future__ import annotations

import math
from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest
import sympy
from circuits import ac, circuit, diode, op_amp, part, transformer, transistor
from hypothesis import given, settings
from hypothesis import strategies as st

from calccheck.model import Device
from calccheck.rules import RULES
from calccheck.solve import Unsolvable, solve, solve_batch, state, state_faults, total


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


# --- transformers ---------------------------------------------------------------------------------------------------


def test_a_matching_transformer():
    """By hand: 10:1 and 2 Ω are 200 Ω before it; 10 V behind 50 Ω gives 40 mA, 8 V, then 0.8 V and 0.4 A."""
    at = total(solve(circuit(part("V", "V1", "a", "com", 10), part("R", "RS", "a", "b", 50), transformer("T1", 10, "b", "com", "c", "com"),
                             part("R", "RL", "c", "com", 2))))  # fmt: skip
    assert (at.potentials["b"], at.potentials["c"], at.currents["RL"]) == (8, Fraction(4, 5), Fraction(2, 5))
    assert [at.currents[f"T1,{w}"] for w in ("first+", "first-", "second+", "second-")] == [
        Fraction(1, 25), Fraction(-1, 25), Fraction(-2, 5), Fraction(2, 5)]  # fmt: skip


@settings(max_examples=25, deadline=None)
@given(st.lists(st.tuples(st.sampled_from("RLCT"), st.integers(1, 99)), min_size=1, max_size=6), st.integers(20, 2000))
def test_ladders_with_transformers_against_chain_matrices(sections, hertz):
    """(v, i) before = product of chain matrices · (v, i) behind; series Z: [[1, Z], [0, 1]], shunt C: [[1, 0], [Y, 1]], n:1: [[n, 0], [0, 1/n]]."""
    w, chain, parts = 2j * math.pi * hertz, np.eye(2, dtype=complex), []
    for k, (kind, x) in enumerate(sections):
        a, b = f"n{k}", f"n{k + 1}"
        if kind == "T":
            n = Fraction(x, 10)
            chain = chain @ np.array([[float(n), 0], [0, 1 / float(n)]])
            parts.append(transformer(f"T{k}", n, a, "com", b, "com"))
        elif kind == "C":
            chain = chain @ np.array([[1, 0], [w * x * 1e-7, 1]])
            parts += [part("C", f"C{k}", a, "com", Fraction(x, 10**7)), part("S", f"S{k}", a, b)]
        else:
            z = x if kind == "R" else w * x * 1e-3
            chain = chain @ np.array([[1, z], [0, 1]])
            parts.append(part(kind, f"Z{k}", a, b, x if kind == "R" else Fraction(x, 1000)))
    load, end = 47, f"n{len(sections)}"
    made = circuit(ac("V", "V1", "n0", "com", 1, hertz), *parts, part("R", "RL", end, "com", load))
    at = total(solve(made, Fraction(hertz)))
    before = chain @ np.array([1, 1 / load])
    assert at.potentials[end] == pytest.approx(1 / before[0], rel=1e-9)
    assert -at.currents["V1"] == pytest.approx(before[1] / before[0], rel=1e-9)


def test_transformers_that_contradict_their_sources():
    (found,) = refused(
        part("V", "V1", "a", "com", 10), transformer("T1", 10, "a", "com", "c", "com"), part("V", "V2", "c", "com", 2)
    )
    assert found.message.startswith("V1, T1 and V2 set the same voltage or current")


def test_a_side_without_a_path_to_the_reference():
    (found,) = refused(
        part("V", "V1", "a", "com", 10), transformer("T1", 10, "a", "com", "c", "d"), part("R", "R1", "c", "d", 2)
    )
    assert found.message.startswith("Nodes c and d have no path to the reference com; parts there: T1 and R1.")


def test_a_transformer_without_a_load():
    at = total(solve(circuit(part("V", "V1", "a", "com", 10), transformer("T1", 4, "a", "com", "c", "com"))))
    assert at.potentials["c"] == Fraction(5, 2) and at.currents["V1"] == 0


# --- transistors: published -----------------------------------------------------------------------------------------

# T. R. Kuphaldt et al., Lessons in Electric Circuits, vol. III, ch. 4, Biasing calculations. The book takes I_E = β·I_B, so
# that its β is our β + 1. Emitter currents as printed, in milliamperes, with the weight of their last digit.
SUPPLY = part("V", "VCC", "cc", "g", 10)
BIAS = [
    (99, 1.02, 0.01, [SUPPLY, part("R", "RB", "cc", "b", 910000), ("b", "cc", "g")]),
    (299, 3.07, 0.01, [SUPPLY, part("R", "RB", "cc", "b", 910000), ("b", "cc", "g")]),
    (99, 0.989, 0.001, [SUPPLY, part("R", "RC", "cc", "c", 4700), part("R", "RB", "c", "b", 470000), ("b", "c", "g")]),
    (299, 1.48, 0.01, [SUPPLY, part("R", "RC", "cc", "c", 4700), part("R", "RB", "c", "b", 470000), ("b", "c", "g")]),
    (99, 1.01, 0.01, [SUPPLY, part("R", "RB", "cc", "b", 870000), part("R", "RE", "e", "g", 470), ("b", "cc", "e")]),
    (299, 2.76, 0.01, [SUPPLY, part("R", "RB", "cc", "b", 870000), part("R", "RE", "e", "g", 470), ("b", "cc", "e")]),
    (99, 1.01, 0.01, [SUPPLY, part("V", "VBB", "bb", "g", 2), part("R", "RB", "bb", "b", 82000), part("R", "RE", "e", "g", 470), ("b", "cc", "e")]),
    (299, 1.75, 0.01, [SUPPLY, part("V", "VBB", "bb", "g", 2), part("R", "RB", "bb", "b", 82000), part("R", "RE", "e", "g", 470), ("b", "cc", "e")]),
    (299, 1.25, 0.01, [SUPPLY, part("V", "VBB", "bb", "g", 2), part("R", "RB", "bb", "b", 39000), part("R", "RE", "e", "g", 910), ("b", "cc", "e")]),
    (299, 1.38, 0.01, [SUPPLY, part("V", "VBB", "bb", "g", "1.5"), part("R", "RB", "bb", "b", 33000), part("R", "RE", "e", "g", 470), ("b", "cc", "e")]),
]  # fmt: skip


@pytest.mark.parametrize(("beta", "printed", "weight", "parts"), BIAS)
def test_printed_bias_currents(beta, printed, weight, parts):
    *others, terminals = parts
    made = circuit(*others, transistor("Q1", *terminals, beta), reference="g")
    solution = solve(made)
    assert solution.gap < 1e-12 and not state_faults(made, total(solution))
    assert -1000 * float(total(solution).currents["Q1,emitter"]) == pytest.approx(printed, abs=0.501 * weight)


def test_base_bias_source_by_source():
    """By hand: (10 V − 0.7 V)/910 kΩ; the supply and the drop act each by itself, the drop named by its transistor."""
    solution = solve(
        circuit(SUPPLY, part("R", "RB", "cc", "b", 910000), transistor("Q1", "b", "cc", "g", 100), reference="g")
    )
    assert set(solution.parts) == {"VCC", "Q1"}
    alone = {name: s.currents["Q1,base"] for name, s in solution.parts.items()}
    assert alone == {"VCC": Fraction(10, 910000), "Q1": Fraction(-7, 9100000)}
    assert total(solution).currents["Q1,collector"] == 100 * Fraction(93, 9100000)


SATURATED = [
    part("V", "VCC", "cc", "g", 10),
    part("V", "VB", "d", "g", 5),
    part("R", "RB", "d", "b", 10000),
    part("R", "RC", "cc", "c", 1000),
]


def test_both_drops_of_a_saturated_transistor_bear_its_name():
    """By hand: I_B = 4.3 V/10 kΩ, I_C = 9.8 V/1 kΩ; due to Q1 alone −0.7 V/10 kΩ and −0.2 V/1 kΩ."""
    solution = solve(circuit(*SATURATED, transistor("Q1", "b", "c", "g", 100, v_ce="0.2"), reference="g"))
    at, alone = total(solution).currents, state(solution, ["Q1"]).currents
    assert (at["Q1,base"], at["Q1,collector"], at["Q1,emitter"]) == (
        Fraction(43, 10**5),
        Fraction(98, 10**4),
        -Fraction(1023, 10**5),
    )
    assert (alone["Q1,base"], alone["Q1,collector"]) == (Fraction(-7, 10**5), Fraction(-2, 10**4))


def test_npn_and_pnp_mirror_each_other():
    """Every source turned round and the polarity with it: all voltages and currents change their sign."""
    mirrored = [replace(e, value=-e.value) if e.kind == "voltage source" else e for e in SATURATED]
    for model in ({}, {"v_ce": "0.2"}):
        npn = total(solve(circuit(*SATURATED, transistor("Q1", "b", "c", "g", 20, **model), reference="g")))
        pnp = total(
            solve(circuit(*mirrored, transistor("Q1", "b", "c", "g", 20, polarity="pnp", **model), reference="g"))
        )
        assert pnp.currents == {n: -i for n, i in npn.currents.items()}
        assert pnp.potentials == {n: -v for n, v in npn.potentials.items()}


def test_drops_are_zeroed_at_ac():
    """By hand: a base driven by 1 V over 1 kΩ; β = 50 draws 50 mA through 100 Ω: −5 V; no r_be in the hand model."""
    made = circuit(part("V", "VCC", "cc", "com", 10), ac("V", "V1", "a", "com", 1, 1000), part("R", "RB", "a", "b", 1000),
                   part("R", "RC", "cc", "c", 100), transistor("Q1", "b", "c", "com", 50), part("R", "RD", "cc", "d", 10), diode("D1", "d", "com"))  # fmt: skip
    solution = solve(made, Fraction(1000))
    assert set(solution.parts) == {"V1"} and total(solution).potentials["c"] == pytest.approx(-5)
    assert set(solve(made).parts) == {"VCC", "Q1", "D1"}


@pytest.mark.parametrize(
    ("parts", "words"),
    [
        ([transistor("Q1", "d", "c", "g", 9)], "VB and Q1 (base to emitter) make a loop without resistance: the voltages around it add up to 4.3 V"),
        ([transistor("Q1", "b", "x", "g", 9)], "Node x is fed only by current sources (Q1 (collector to emitter))"),
        ([transistor("Q1", "b", "c", "g", 9), replace(transistor("Q2", "b", "c", "g", 9), device=Device(polarity="npn", state="active"))],
         "Q2 has no number for V_BE"),
        ([replace(transistor("Q1", "b", "c", "g", 9), device=Device(state="active", v_be=Fraction(1), beta=Fraction(9)))], "Q1 is neither npn nor pnp"),
        ([replace(transistor("Q1", "b", "c", "g", 9), device=Device(polarity="npn", v_be=Fraction(1), beta=Fraction(9)))], "Q1 (transistor) has no state"),
        ([transistor("Q1", "b", "c", "g", 9, v_be="-0.7", polarity="pnp")], "for a pnp too they are written as positive values"),
        ([replace(transistor("Q1", "b", "c", "g", 9), terminals=(("base", "b"), ("collector", "c")))], "needs the terminals base, collector, emitter"),
        ([transformer("T1", 0, "b", "g", "c", "g")], "T1 has no number for its ratio"),
        ([part("F", "F1", "g", "b", 2, "Q1"), transistor("Q1", "b", "c", "g", 9)], "which has several terminals. Name the terminal: Q1,base or Q1,collector."),
        ([diode("D1", "b", "g"), diode("D2", "b", "g")], "D1 (a diode) and D2 (a diode) make a loop without resistance: the voltages around it agree"),
    ],
)  # fmt: skip
def test_parts_that_cannot_be_solved(parts, words):
    assert words in " ".join(f.message for f in refused(*SATURATED, *parts, reference="g"))


def test_a_controlled_source_may_follow_the_current_into_a_terminal():
    made = circuit(
        *SATURATED,
        transistor("Q1", "b", "c", "g", 20),
        part("F", "F1", "g", "x", 3, "Q1,collector"),
        part("R", "RX", "x", "g", 10),
        reference="g",
    )
    at = total(solve(made)).currents
    assert at["RX"] == 3 * at["Q1,collector"] == 60 * at["Q1,base"]


# --- assumed states -------------------------------------------------------------------------------------------------


def said(*parts, reference="g"):
    made = circuit(*parts, reference=reference)
    found = state_faults(made, total(solve(made)))
    assert all(f.kind == "state" and f.severity == RULES["state"].severity == "error" for f in found)
    assert all(f.span == made.element(f.message.split()[0]).span for f in found)
    return [f.message for f in found]


STATES = {
    "active, and it is": ([transistor("Q1", "b", "c", "g", 20)], []),  # by hand: 8.6 mA over 1 kΩ leaves 1.4 V
    "active, but it saturates": (  # by hand: 43 mA over 1 kΩ leaves −33 V
        [transistor("Q1", "b", "c", "g", 100)],
        ["Q1 is taken as active, but its V_CE is −33 V; it must be no less than the saturation voltage of common practice, 200 mV, and misses that by 33.2 V."],
    ),
    "active, but it is cut off": (  # by hand: −0.5 V − 0.7 V over 10 kΩ
        [part("V", "VN", "n", "g", "-0.5"), part("R", "RN", "n", "y", 10000), part("R", "RY", "cc", "x", 1000), transistor("Q1", "y", "x", "g", 20)],
        ["Q1 is taken as active, but its base current is −120 µA; it must be above zero, and misses that by 120 µA."],
    ),
    "saturated, and it is": ([transistor("Q1", "b", "c", "g", 100, v_ce="0.2")], []),  # by hand: 9.8 mA against 43 mA
    "saturated, but not driven so far": (  # by hand: β·I_B = 8.6 mA
        [transistor("Q1", "b", "c", "g", 20, v_ce="0.2")],
        ["Q1 is taken as saturated, but its collector current is 9.8 mA; it must be at most beta times its base current, 8.6 mA, and misses that by 1.2 mA."],
    ),
    "saturated, but its collector feeds back": (  # by hand: −0.2 V over 1 kΩ to a collector resistor at the reference
        [part("R", "RG", "x", "g", 1000), transistor("Q1", "b", "x", "g", 100, v_ce="0.2")],
        ["Q1 is taken as saturated, but its collector current is −200 µA; it must be no less than zero, and misses that by 200 µA."],
    ),
    "conducting, and it is": ([part("R", "R1", "cc", "x", 100), diode("D1", "x", "g")], []),
    "conducting, but reversed": (  # by hand: 10.6 V over 100 Ω the wrong way
        [part("R", "R1", "cc", "x", 100), diode("D1", "g", "x")],
        ["D1 is taken as conducting, but its forward current is −106 mA; it must be no less than zero, and misses that by 106 mA."],
    ),
    "blocking, and it is": ([diode("D1", "g", "cc", state="blocking")], []),
    "blocking, but above its drop": (
        [diode("D1", "d", "g", state="blocking")],
        ["D1 is taken as blocking, but its forward voltage is 5 V; it must be at most its drop, 600 mV, and misses that by 4.4 V."],
    ),
    "an output within its swing": ([part("R", "R1", "m", "g", 1000), part("R", "R2", "o", "m", 800), op_amp("U1", "d", "m", "o", "0.2", 9)], []),
    "an output above its swing": (  # by hand: 5 V · (1 + 1)
        [part("R", "R1", "m", "g", 1000), part("R", "R2", "o", "m", 1000), op_amp("U1", "d", "m", "o", "0.2", "4.8")],
        ["U1 is ideal within its swing, but its output is 10 V; it must be at most the upper end of its swing, 4.8 V, and misses that by 5.2 V."],
    ),
    "an output below its swing": (
        [part("R", "R1", "d", "m", 1000), part("R", "R2", "o", "m", 1000), op_amp("U1", "g", "m", "o", "0.2", "4.8")],
        ["U1 is ideal within its swing, but its output is −5 V; it must be no less than the lower end of its swing, 200 mV, and misses that by 5.2 V."],
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", STATES)
def test_assumed_states(name):
    """The conditions are common practice; the figures by hand."""
    parts, words = STATES[name]
    messages = said(*SATURATED, *parts)
    assert len(messages) == len(words)
    assert all(m.startswith(w) for m, w in zip(messages, words, strict=True))


@pytest.mark.parametrize("name", STATES)
def test_assumed_states_of_a_pnp_mirror_those_of_an_npn(name):
    parts, words = STATES[name]
    if not any(e.kind == "transistor" for e in parts):
        return
    turned = [replace(e, value=-e.value) if e.kind == "voltage source" else e for e in (*SATURATED, *parts)]
    turned = [replace(e, device=replace(e.device, polarity="pnp")) if e.kind == "transistor" else e for e in turned]
    expected = [
        w.replace("base current is", "base current out of it is")
        .replace("collector current is", "collector current out of it is")
        .replace("V_CE", "V_EC")
        for w in words
    ]
    assert [m[: len(w)] for m, w in zip(said(*turned), expected, strict=True)] == expected


@given(st.integers(-20, 20))
def test_the_edge_of_saturation(tenths):
    """RC such that V_CE comes to 0.2 V and some tenths of a microvolt: 10 V − 8.6 mA · RC (β·I_B with β = 20)."""
    edge = (10 - (Fraction(1, 5) + Fraction(tenths, 10**7))) / Fraction(86, 10000)
    parts = [*SATURATED[:3], part("R", "RC", "cc", "c", edge), transistor("Q1", "b", "c", "g", 20)]
    assert bool(said(*parts)) == (tenths < 0)


def test_a_transistor_without_drive_is_not_active():
    messages = said(part("V", "VCC", "cc", "g", "0.7"), part("R", "RB", "cc", "b", 1000), part("V", "VX", "x", "g", 9), part("R", "RC", "x", "c", 10),
                    transistor("Q1", "b", "c", "g", 20))  # fmt: skip
    assert messages == [
        "Q1 is taken as active, but its base current is 0 A; it must be above zero. It is cut off: take it out, or check what drives it."
    ]


def test_a_stated_saturation_voltage_is_the_bound():
    q = transistor("Q1", "b", "c", "g", 20)  # V_CE 1.4 V as above
    told = replace(q, device=replace(q.device, v_ce=Fraction(3, 2)))
    assert said(*SATURATED, told)[0].startswith(
        "Q1 is taken as active, but its V_CE is 1.4 V; it must be no less than its saturation voltage, 1.5 V"
    )


@pytest.mark.parametrize(("crest", "high", "holds"), [(1, "4.5", True), (2**0.5, "4.5", False), (2**0.5, "4.6", True)])
def test_ripple_counts_against_the_swing(crest, high, holds):
    """By hand: gain 2 on 2 V and 0.2 V rms: 4 V ± 0.4 V rms, ± 0.566 V peak."""
    made = circuit(part("V", "V0", "q", "com", 2), ac("V", "V1", "p", "q", "0.2", 1000), GROUNDED, part("R", "R2", "o", "n", 1000),
                   op_amp("U1", "p", "n", "o", 0, high))  # fmt: skip
    found = state_faults(made, total(solve(made)), [total(solve(made, Fraction(1000)))], crest)
    assert (not found) == holds
    for f in found:
        assert "its output is 4 V ± 565.685 mV" in f.message and "misses that by 65.6854 mV" in f.message


def test_without_anything_at_dc_the_ripple_stands_alone():
    """1 V · 2 = 2 V of amplitude swings below a lower end of 0 V."""
    made = circuit(
        ac("V", "V1", "p", "com", 1, 1000), GROUNDED, part("R", "R2", "o", "n", 1000), op_amp("U1", "p", "n", "o", 0, 5)
    )
    (found,) = state_faults(made, None, [total(solve(made, Fraction(1000)))])
    assert "no less than the lower end of its swing, 0 V, and misses that by 2 V" in found.message
