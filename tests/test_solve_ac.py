"""Circuits at AC against published examples, and what acts at which frequency."""

from __future__ import annotations

import cmath
import math
from dataclasses import replace
from fractions import Fraction

import pytest
from circuits import ac, circuit, part

from calccheck.model import UNSTATED
from calccheck.solve import Unsolvable, frequencies, solve, solve_batch, state, total

HZ60 = Fraction(60)


def polar(magnitude, degrees):
    return cmath.rect(magnitude, math.radians(degrees))


def omega(radians):
    """The frequency in hertz of so many radians a second."""
    return Fraction(radians / (2 * math.pi))


# --- published examples ---------------------------------------------------------------------------------------------

KUPHALDT_RLC = circuit(
    ac("V", "VS", "a", "g", 120, 60), part("R", "R", "a", "b", 250), part("L", "L", "b", "c", "0.65"),
    part("C", "C", "c", "g", "1.5e-6"), reference="g",
)  # fmt: skip
KUPHALDT_LADDER = circuit(
    ac("V", "VS", "a", "g", 120, 60), part("C", "C1", "a", "b", "4.7e-6"), part("L", "L", "b", "c", "0.65"),
    part("C", "C2", "c", "g", "1.5e-6"), part("R", "R", "b", "g", 470), reference="g",
)  # fmt: skip
KUPHALDT_PARALLEL = circuit(
    ac("V", "VS", "a", "g", 10, 60), part("R", "R", "a", "g", 5), part("L", "L", "a", "g", "0.01"), reference="g"
)
KUPHALDT_TWO_TONES = circuit(
    ac("V", "V60", "s", "g", 5, 60), ac("V", "V90", "a", "s", 5, 90), part("R", "R", "a", "b", 2200),
    part("C", "C", "b", "g", "1e-6"), reference="g",
)  # fmt: skip
YOUSAFZAI_LADDER = circuit(
    ac("V", "VS", "s", "g", polar(20, 30), UNSTATED), ac("Z", "ZL", "s", "a", 10j), part("R", "R6", "a", "g", 6),
    part("R", "R1", "a", "b", 1), ac("Z", "ZC", "b", "g", -8j), reference="g",
)  # fmt: skip
YOUSAFZAI_MESH = circuit(
    ac("I", "IS", "g", "t", polar(5, 60), UNSTATED), ac("Z", "Zc", "t", "b", -4j), ac("Z", "Zl", "b", "g", 2j),
    ac("V", "VS", "t", "c", polar(30, -40), UNSTATED), part("R", "R10", "c", "g", 10), ac("Z", "Z6", "c", "e", 6j),
    part("R", "R2", "e", "g", 2), reference="g",
)  # fmt: skip
YOUSAFZAI_TWO_TONES = circuit(  # the first source's value is not needed: it is of another frequency
    ac("V", "V1", "a", "g", 7, omega(100)), part("R", "R", "a", "b", 2), part("L", "L", "b", "c", "0.02"),
    part("C", "C", "c", "d", "0.01"), ac("V", "V2", "d", "g", polar(20, 60), omega(50)), reference="g",
)  # fmt: skip
OPENSTAX_RLC = circuit(
    ac("V", "VS", "a", "g", "0.1", 200), part("R", "R", "a", "b", 4), part("L", "L", "b", "c", "0.003"),
    part("C", "C", "c", "g", "0.0008"), reference="g",
)  # fmt: skip

# circuit, frequency, sources, what, (plus, minus) or part, printed magnitude and weight of its last digit, degrees and theirs
PRINTED = [
    # T. R. Kuphaldt, Lessons in Electric Circuits, vol. II, ch. 5, series R, L and C
    (KUPHALDT_RLC, HZ60, None, "R", (77.734e-3, 1e-6), (80.680, 1e-3)),
    (KUPHALDT_RLC, HZ60, None, ("a", "b"), (19.434, 1e-3), (80.680, 1e-3)),
    (KUPHALDT_RLC, HZ60, None, ("b", "c"), (19.048, 1e-3), (170.68, 1e-2)),
    (KUPHALDT_RLC, HZ60, None, ("c", "g"), (137.46, 1e-2), (-9.3199, 1e-4)),
    # the same, series-parallel R, L and C
    (KUPHALDT_LADDER, HZ60, None, "C1", (146.64e-3, 1e-5), (58.371, 1e-3)),
    (KUPHALDT_LADDER, HZ60, None, ("a", "b"), (82.760, 1e-3), (-31.629, 1e-3)),
    (KUPHALDT_LADDER, HZ60, None, ("b", "g"), (65.857, 1e-3), (41.225, 1e-3)),
    (KUPHALDT_LADDER, HZ60, None, "R", (140.12e-3, 1e-5), (41.225, 1e-3)),
    (KUPHALDT_LADDER, HZ60, None, "L", (43.232e-3, 1e-6), (131.22, 1e-2)),
    (KUPHALDT_LADDER, HZ60, None, ("b", "c"), (10.594, 1e-3), (221.22, 1e-2)),
    (KUPHALDT_LADDER, HZ60, None, ("c", "g"), (76.451, 1e-3), (41.225, 1e-3)),
    # the same, ch. 3, parallel R and L; the source's current is printed out of its positive end
    (KUPHALDT_PARALLEL, HZ60, None, "L", (2.6526, 1e-4), (-90, 1)),
    (KUPHALDT_PARALLEL, HZ60, None, "-VS", (3.3221, 1e-4), (-52.984, 1e-3)),
    # the same, ch. 7, circuit effects: the source of 90 Hz alone
    (KUPHALDT_TWO_TONES, Fraction(90), None, ("a", "b"), (3.8971, 1e-4), (38.793, 1e-3)),
    (KUPHALDT_TWO_TONES, Fraction(90), None, ("b", "g"), (3.1325, 1e-4), (-51.207, 1e-3)),
    (KUPHALDT_TWO_TONES, Fraction(90), None, "R", (1.7714e-3, 1e-7), (38.793, 1e-3)),
    # Khalid Khan Yousafzai, Circuit Analysis, steady-state AC, ladder example
    (YOUSAFZAI_LADDER, UNSTATED, None, "ZL", (2.395, 1e-3), (-33.163, 1e-3)),
    (YOUSAFZAI_LADDER, UNSTATED, None, ("a", "g"), (10.8987, 1e-4), (-67.224, 1e-3)),
    (YOUSAFZAI_LADDER, UNSTATED, None, "R6", (1.816, 1e-3), (-67.224, 1e-3)),
    (YOUSAFZAI_LADDER, UNSTATED, None, "R1", (1.352, 1e-3), (15.65, 1e-2)),
    # the same, mesh and superposition examples on one circuit
    (YOUSAFZAI_MESH, UNSTATED, ["IS"], "R2", (2.076, 1e-3), (-78.37, 1e-2)),
    (YOUSAFZAI_MESH, UNSTATED, ["VS"], "R2", (6.23, 1e-2), (91.63, 1e-2)),
    (YOUSAFZAI_MESH, UNSTATED, None, "R2", (4.1993, 1e-4), (86.71, 1e-2)),
    (YOUSAFZAI_MESH, UNSTATED, ["IS"], ("t", "g"), (13.13, 1e-2), (-6.8, 1e-1)),
    (YOUSAFZAI_MESH, UNSTATED, ["VS"], "-VS", (8.356, 1e-3), (-61.8, 1e-1)),
    # the same, superposition at two frequencies: the source of 50 rad/s alone
    (YOUSAFZAI_TWO_TONES, omega(50), None, "-R", (8.944, 1e-3), (86.565, 1e-3)),
    # S. J. Ling, J. Sanny, W. Moebs, OpenStax University Physics, vol. 2, 15.3: amplitude; the angle printed 0.607 rad
    (OPENSTAX_RLC, Fraction(200), None, "R", (2.05e-2, 1e-4), (-math.degrees(0.607), math.degrees(1e-3))),
]  # fmt: skip


@pytest.mark.parametrize(("made", "hertz", "sources", "what", "magnitude", "angle"), PRINTED)
def test_printed_phasors(made, hertz, sources, what, magnitude, angle):
    solution = solve(made, hertz)
    assert solution.gap < 1e-12 and solution.residual < 1e-12 and solution.balance < 1e-12 and solution.exact
    at = state(solution, sources)
    if isinstance(what, str):
        found = at.currents[what.lstrip("-")] * (-1 if what.startswith("-") else 1)
    else:
        found = at.potentials[what[0]] - at.potentials[what[1]]
    assert abs(found) == pytest.approx(magnitude[0], abs=0.501 * magnitude[1])
    turned = math.degrees(cmath.phase(found / polar(1, angle[0])))
    assert abs(turned) <= 0.501 * angle[1]


def test_power_factor_correction():
    """Kuphaldt, vol. II, ch. 11, true, reactive and apparent power: 60 Ω and 160 mH on 120 V, 60 Hz, then 22 µF beside them."""
    load = [ac("V", "VS", "a", "g", 120, 60), part("L", "L", "a", "b", "0.16"), part("R", "R", "b", "g", 60)]

    def taken(made):
        at = total(solve(made, HZ60))
        return at.potentials["a"] * -at.currents["VS"].conjugate()

    bare = taken(circuit(*load, reference="g"))
    assert (bare.real, bare.imag, abs(bare)) == pytest.approx((119.365, 119.998, 169.256), abs=0.00051)
    mended = taken(circuit(*load, part("C", "C", "a", "g", "22e-6"), reference="g"))
    assert mended.real == pytest.approx(119.365, abs=0.00051) and abs(mended) == pytest.approx(119.366, abs=0.00051)
    assert mended.real / abs(mended) == pytest.approx(0.9999887, abs=5.1e-8)


def test_delta_of_sources_on_a_delta_of_loads():
    """Kuphaldt, vol. II, ch. 10, three-phase Y and Δ: 120 V, three loads of 10 kW; phase 83.33 A, line 144.34 A.

    The third source of the delta is what the other two leave; with it the circuit is a loop of sources.
    """
    parts = [
        ac("V", "Vab", "a", "b", 120, UNSTATED), ac("V", "Vbc", "b", "c", polar(120, 120), UNSTATED),
        part("R", "Rab", "a", "b", "1.44"), part("R", "Rbc", "b", "c", "1.44"), part("R", "Rca", "c", "a", "1.44"),
    ]  # fmt: skip
    at = total(solve(circuit(*parts, reference="c"), UNSTATED)).currents
    assert [abs(at[n]) for n in ("Rab", "Rbc", "Rca")] == pytest.approx([83.33] * 3, abs=0.0051)
    assert abs(at["Rab"] - at["Rca"]) == pytest.approx(144.34, abs=0.0051)
    with pytest.raises(Unsolvable, match="the voltages around it agree, but the currents in it are not determined"):
        solve(circuit(*parts, ac("V", "Vca", "c", "a", polar(120, 240), UNSTATED), reference="c"), UNSTATED)


YOUSAFZAI_TWO_PORT = [
    ac("I", "IS", "g", "t", 5, UNSTATED), ac("Z", "Zc", "t", "b", -2j), part("R", "R2", "b", "g", 2),
    ac("V", "VS", "t", "c", 10, UNSTATED), part("R", "Ra", "g", "d", 2), ac("Z", "Zl", "d", "c", 3j),
]  # fmt: skip


def test_two_terminal_equivalents():
    """Yousafzai, steady-state AC, Thevenin and Norton examples: open voltage, impedance seen, short current, load current.

    The Norton current is printed 3.535 A for 5/√2 = 3.53553: a unit of the last digit is granted.
    """

    def solve_one(*parts):
        return total(solve(circuit(*YOUSAFZAI_TWO_PORT, *parts, reference="g"), UNSTATED))

    v = solve_one().potentials["c"]
    assert abs(v) == pytest.approx(8.745, abs=0.00051) and math.degrees(cmath.phase(v)) == pytest.approx(
        -47.73, abs=0.0051
    )
    tested = solve(circuit(*YOUSAFZAI_TWO_PORT, ac("I", "test", "g", "c", 1, UNSTATED), reference="g"), UNSTATED)
    assert tested.parts["test"].potentials["c"] == pytest.approx(2.471 - 0.118j, abs=0.00071)
    i = solve_one(part("S", "laid", "c", "g")).currents["laid"]
    assert abs(i) == pytest.approx(3.535, abs=0.001) and math.degrees(cmath.phase(i)) == pytest.approx(-45, abs=0.5)
    i = solve_one(ac("Z", "Zload", "c", "g", -1j)).currents["Zload"]
    assert abs(i) == pytest.approx(3.22, abs=0.0051) and math.degrees(cmath.phase(i)) == pytest.approx(
        -23.39, abs=0.0051
    )


def test_a_controlled_source_among_phasors():
    """Yousafzai, steady-state AC, last nodal example; its equations take the controlled source as a current (see the figures)."""
    solution = solve(circuit(
        part("F", "F", "g", "v1", 2, "Zx"), ac("Z", "Z4", "v1", "v2", 4j), ac("Z", "Z6", "v2", "v3", -6j),
        ac("I", "IS", "v3", "g", 2, UNSTATED), ac("Z", "Z2", "v1", "v4", -2j), part("R", "R4", "v4", "v3", 4),
        ac("V", "VS", "v4", "v2", 10, UNSTATED), ac("Z", "Zx", "v4", "g", 1j), reference="g",
    ), UNSTATED)  # fmt: skip
    for at in (solution.nodal, total(solution)):
        assert at.potentials["v2"] == pytest.approx(-10 + 2j)
        assert at.potentials["v3"] == pytest.approx(-112 / 13 + 14j / 13)
        assert at.potentials["v4"] == pytest.approx(2j)


# --- frequencies ----------------------------------------------------------------------------------------------------

PLAIN = (part("R", "R1", "a", "b", 10), part("R", "R2", "b", "com", 10))
MIXED = circuit(
    part("V", "V0", "a", "com", 6), ac("V", "V50", "b", "a", 3, 50), ac("I", "I1k", "com", "c", 2j, 1000),
    part("R", "R1", "b", "c", 100), part("L", "L1", "c", "com", "0.1"), part("R", "R2", "a", "com", 30),
)  # fmt: skip


def test_frequencies_of_a_circuit():
    assert frequencies(MIXED) == (0, 50, 1000)
    assert frequencies(circuit(part("R", "R1", "a", "com", 1))) == ()
    assert frequencies(YOUSAFZAI_LADDER) == (UNSTATED,)


def test_only_the_sources_of_the_frequency_act():
    """By hand: at DC 6 V over 100 Ω through the inductor; at 50 Hz 3 V over 100 Ω and 31.4 Ω of reactance."""
    direct, fifty, thousand = (solve(MIXED, f) for f in (None, Fraction(50), Fraction(1000)))
    assert [set(s.parts) for s in (direct, fifty, thousand)] == [{"V0"}, {"V50"}, {"I1k"}]
    assert (direct.frequency, fifty.frequency, thousand.frequency) == (None, 50, 1000)
    assert total(direct).currents["R1"] == Fraction(6, 100)
    assert total(fifty).currents["R1"] == pytest.approx(3 / (100 + 31.41592653589793j))
    assert total(fifty).potentials["a"] == 0 and total(fifty).currents["I1k"] == 0
    z = 628.3185307179587j
    assert total(thousand).potentials["c"] == pytest.approx(2j * 100 * z / (100 + z))
    assert solve(MIXED, Fraction(0)) == direct
    with pytest.raises(KeyError):
        state(fifty, ["V0"])


def test_an_alternating_source_may_have_a_plain_value():
    plain = replace(part("V", "V1", "a", "com", 10), frequency=Fraction(50))
    solutions = [solve(circuit(*PLAIN, v), Fraction(50)) for v in (plain, ac("V", "V1", "a", "com", 10, 50))]
    assert solutions[0].parts == solutions[1].parts and solutions[0].nodal == solutions[1].nodal


def test_values_are_real_at_dc_and_complex_elsewhere():
    for f in frequencies(MIXED):
        solution = solve(MIXED, f)
        kind, floating = (complex, complex) if f else (Fraction, float)
        for at in solution.parts.values():
            assert {type(x) for x in (*at.potentials.values(), *at.currents.values())} == {kind}
        assert {type(x) for x in (*solution.nodal.potentials.values(), *solution.nodal.currents.values())} == {floating}


def test_more_nodes_than_are_worked_exactly():
    rungs = [part("R", f"A{k}", f"n{k}", f"n{k + 1}", 10 + k) for k in range(20)]
    rungs += [part("C", f"B{k}", f"n{k}", "com", Fraction(k + 1, 10**5)) for k in range(21)]
    rungs += [part("L", f"L{k}", f"n{k}", "com", Fraction(k + 1, 10**2)) for k in range(0, 21, 3)]
    solution = solve(circuit(ac("V", "V1", "n0", "com", 10, 50), *rungs), Fraction(50))
    assert not solution.exact and solution.gap < 1e-12 and solution.residual < 1e-12 and solution.balance < 1e-12


def test_a_batch_at_a_frequency():
    variants = [replace(KUPHALDT_LADDER, elements=tuple(replace(e, value=e.value * 2) if e.name == n else e for e in KUPHALDT_LADDER.elements))
                for n in ("", "C1", "L", "C2", "R")]  # fmt: skip
    looped = replace(KUPHALDT_LADDER, elements=(*KUPHALDT_LADDER.elements, part("S", "S1", "a", "g")))
    *found, refused = solve_batch([*variants, looped], HZ60)
    for one, at in zip(variants, found, strict=True):
        exact = total(solve(one, HZ60))
        assert at.potentials == pytest.approx(exact.potentials) and at.currents == pytest.approx(exact.currents)
    assert refused is None
