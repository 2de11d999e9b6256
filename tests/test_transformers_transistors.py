"""Ideal transformers, transistors and diodes by their hand models: published examples, other formulations, what is missing."""

from __future__ import annotations

import math
from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest
from circuits import ac, circuit, diode, part, transformer, transistor
from hypothesis import given, settings
from hypothesis import strategies as st

from calccheck.model import Device
from calccheck.solve import Unsolvable, solve, state, state_faults, total


def refused(*parts, hertz=None, reference="com"):
    with pytest.raises(Unsolvable) as caught:
        solve(circuit(*parts, reference=reference), hertz)
    return caught.value.findings


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
