"""Circuits at AC against published examples, other formulations by general-purpose libraries, and what cannot be solved there."""

from __future__ import annotations

import cmath
import math
from dataclasses import replace
from fractions import Fraction

import mpmath
import numpy as np
import pytest
from circuits import ac, ac_circuits, circuit, part
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp
from scipy.linalg import solve as scipy_solve
from scipy.sparse import coo_matrix
from scipy.sparse.linalg import spsolve

from calccheck.model import UNSTATED
from calccheck.solve import Unsolvable, frequencies, solve, solve_batch, state, total
from calccheck.solve.branches import network_of
from calccheck.solve.nodal import condition

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
VOLTS, AMPERES = "potentials", "currents"

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


# --- witnesses ------------------------------------------------------------------------------------------------------


def tableau(made, hertz, number):
    """All node potentials and all currents as unknowns, by an arrangement of the test's own; ``number`` carries the values."""
    w = 2 * mpmath.pi * mpmath.mpf(hertz.numerator) / hertz.denominator
    nodes, names = list(made.nodes()), [e.name for e in made.elements]
    count = len(nodes)
    rows, right = [{} for _ in range(count + len(names))], [number(0)] * (count + len(names))
    for k, e in enumerate(made.elements):
        own, plus, minus = count + k, nodes.index(e.plus), nodes.index(e.minus)
        for at, sign in ((plus, 1), (minus, -1)):
            rows[at][own] = rows[at].get(own, 0) + sign
        acting = (e.frequency or 0) == hertz
        value = None if e.value is None else mpmath.mpf(e.value.numerator) / e.value.denominator
        voltage, current = {
            "resistor": lambda v=value: (1, -v), "inductor": lambda v=value: (1, -1j * w * v),
            "capacitor": lambda v=value: (1j * w * v, -1), "short": lambda: (1, 0), "open": lambda: (0, 1),
            "voltage source": lambda: (1, 0), "controlled voltage source": lambda: (1, 0),
            "current source": lambda: (0, 1), "controlled current source": lambda: (0, 1),
            "impedance": lambda e=e: (1, -mpmath.mpc(e.phasor)),
        }[e.kind]()  # fmt: skip
        terms = [(plus, voltage), (minus, -voltage), (own, current)]
        if e.control is not None:
            c = e.control
            terms += (
                [(count + names.index(c.part), -value)]
                if c.part
                else [(nodes.index(c.plus), -value), (nodes.index(c.minus), value)]
            )
        elif e.kind.endswith("source") and acting:
            right[own] = number(value if e.phasor is None else mpmath.mpc(e.phasor))
        for at, x in terms:
            rows[own][at] = rows[own].get(at, 0) + number(x)
    rows[nodes.index(made.reference)] = {nodes.index(made.reference): number(1)}
    return nodes, rows, right


@settings(max_examples=40, deadline=None)
@given(ac_circuits())
def test_potentials_are_those_of_a_sparse_complex_solver(made):
    hertz = frequencies(made)[-1]
    nodes, rows, right = tableau(made, hertz, complex)
    i, j, x = zip(*[(i, j, x) for i, row in enumerate(rows) for j, x in row.items()], strict=True)
    matrix = coo_matrix((x, (i, j)), dtype=complex).tocsc()
    slack = 1e-15 * np.linalg.cond(matrix.toarray())
    solution = solve(made, hertz)
    for node, v in zip(nodes, spsolve(matrix, np.array(right)), strict=False):
        assert abs(total(solution).potentials[node] - v) <= max(1e-9, slack) * (solution.volts or abs(v) or 1)


@settings(max_examples=10, deadline=None)
@given(ac_circuits("RVILCZ", most_nodes=5, most_extra=4))
def test_phasors_against_fifty_digits(made):
    """Both routes, against Gaussian elimination in mpmath where 2πf is worked to fifty digits as well."""
    hertz = frequencies(made)[-1]
    solution = solve(made, hertz)
    with mpmath.workdps(50):
        nodes, rows, right = tableau(made, hertz, mpmath.mpc)
        matrix = mpmath.matrix(len(rows))
        for i, row in enumerate(rows):
            for j, x in row.items():
                matrix[i, j] = x
        solved = mpmath.lu_solve(matrix, mpmath.matrix(right))
        for k, node in enumerate(nodes):
            for at in (solution.nodal, total(solution)):
                assert abs(mpmath.mpc(at.potentials[node]) - solved[k]) <= 1e-9 * solution.volts


@settings(max_examples=15, deadline=None)
@given(st.lists(st.tuples(st.integers(1, 99), st.integers(1, 99)), min_size=1, max_size=5), st.integers(1, 5000))
def test_ladders_of_rc_against_the_state_equations(rungs, hertz):
    """Resistors in line and capacitors across: C·dv/dt = G·v + g·u, whose phasors are (jωC − G)⁻¹·g, worked by scipy."""
    ohms, farads = [100.0 * r for r, _ in rungs], [1e-8 * c for _, c in rungs]
    n = len(rungs)
    g = np.zeros((n, n))
    for k, r in enumerate(ohms):
        g[k, k] -= 1 / r
        if k:
            g[k - 1, k - 1] -= 1 / r
            g[k - 1, k] = g[k, k - 1] = 1 / r
    fed = np.array([1 / ohms[0]] + [0.0] * (n - 1))
    expected = scipy_solve(2j * math.pi * hertz * np.diag(farads) - g, fed)
    parts = [part("R", f"R{k}", f"n{k}", f"n{k + 1}", 100 * r) for k, (r, _) in enumerate(rungs)]
    parts += [part("C", f"C{k}", f"n{k + 1}", "com", Fraction(c, 10**8)) for k, (_, c) in enumerate(rungs)]
    at = total(solve(circuit(ac("V", "V1", "n0", "com", 1, hertz), *parts), Fraction(hertz)))
    assert [at.potentials[f"n{k + 1}"] for k in range(n)] == pytest.approx(list(expected), rel=1e-9)


def test_phasors_are_what_is_left_of_the_differential_equations():
    """Amplitude 10 V at 30° on 5 Ω, 2 mH and 40 µF, 1 kHz: L·di/dt = u − R·i − v, C·dv/dt = i run to their steady state by scipy."""
    ohms, henries, farads, w, drive = 5.0, 2e-3, 40e-6, 2000 * math.pi, polar(10, 30)

    def slopes(t, x):
        u = (drive * cmath.exp(1j * w * t)).real
        return [(u - ohms * x[0] - x[1]) / henries, x[0] / farads]

    seen = np.linspace(0.02, 0.021, 200)
    run = solve_ivp(slopes, (0, 0.021), [0, 0], t_eval=seen, rtol=1e-9, atol=1e-12)
    made = circuit(ac("V", "V1", "a", "com", drive, 1000), part("R", "R1", "a", "b", 5), part("L", "L1", "b", "c", "2e-3"),
                   part("C", "C1", "c", "com", "40e-6"))  # fmt: skip
    at = total(solve(made, Fraction(1000)))
    turning = np.exp(1j * w * seen)
    assert run.y[0] == pytest.approx((at.currents["L1"] * turning).real, abs=1e-6)
    assert run.y[1] == pytest.approx((at.potentials["c"] * turning).real, abs=1e-5)


# --- frequencies ----------------------------------------------------------------------------------------------------

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


# --- what cannot be solved ------------------------------------------------------------------------------------------

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
