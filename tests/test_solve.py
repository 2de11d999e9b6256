"""Solved circuits against published examples, general-purpose libraries, and an elimination of the test's own."""

from __future__ import annotations

import math
import subprocess
import sys
from dataclasses import replace
from fractions import Fraction

import mpmath
import networkx
import numpy as np
import pytest
from circuits import circuit, circuits, decimals, part, scales
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.sparse import coo_matrix
from scipy.sparse.linalg import spsolve

from calccheck.model import Finding, State
from calccheck.solve import Unsolvable, solve, solve_batch, state, total
from calccheck.solve.agreement import compared
from calccheck.solve.branches import network_of
from calccheck.solve.elimination import solve_float
from calccheck.source import Span


def both(solution, look):
    """What both routes say, after they are seen to agree."""
    assert solution.gap < 1e-12 and solution.residual < 1e-12 and solution.balance < 1e-12
    exact = look(total(solution))
    assert look(solution.nodal) == pytest.approx(float(exact), rel=1e-12)
    return exact


# --- published examples ---------------------------------------------------------------------------------------------

KUPHALDT = circuit(  # T. R. Kuphaldt, Lessons in Electric Circuits, vol. I, ch. 10, superposition theorem
    part("V", "B1", "a", "g", 28), part("R", "R1", "a", "m", 4), part("R", "R2", "m", "g", 2),
    part("R", "R3", "m", "b", 1), part("V", "B2", "b", "g", 7), reference="g",
)  # fmt: skip


@pytest.mark.parametrize(
    ("sources", "volts", "amperes"),
    [
        (("B1",), {"R1": 24, "R2": 4, "R3": 4}, {"R1": 6, "R2": 2, "R3": 4}),
        (("B2",), {"R1": -4, "R2": 4, "R3": -3}, {"R1": -1, "R2": 2, "R3": -3}),
        (("B1", "B2"), {"R1": 20, "R2": 8, "R3": 1}, {"R1": 5, "R2": 4, "R3": 1}),
        (None, {"R1": 20, "R2": 8, "R3": 1}, {"R1": 5, "R2": 4, "R3": 1}),
    ],
)
def test_kuphaldt_superposition_tables(sources, volts, amperes):
    at = state(solve(KUPHALDT), sources)
    for name, v in volts.items():
        e = KUPHALDT.element(name)
        assert at.potentials[e.plus] - at.potentials[e.minus] == v
        assert at.currents[name] == amperes[name]


def test_kuphaldt_source_currents_follow_from_the_published_branch_currents():
    """The sources are in series with R1 and R3, so they carry the same tables' currents, also where they are zeroed."""
    solution = solve(KUPHALDT)
    assert {n: (s.currents["B1"], s.currents["B2"]) for n, s in solution.parts.items()} == {
        "B1": (-6, 4),
        "B2": (1, -3),
    }


def test_kuphaldt_unbalanced_bridge():
    """Lessons in Electric Circuits, vol. I, ch. 10, mesh current method: printed to 0.001 mA and 0.0001 V."""
    solution = solve(circuit(
        part("V", "B", "t", "g", 24), part("R", "R1", "t", "l", 150), part("R", "R2", "t", "q", 50),
        part("R", "R3", "q", "l", 100), part("R", "R4", "l", "g", 300), part("R", "R5", "q", "g", 250), reference="g",
    ))  # fmt: skip
    printed = {"B": -136.092, "R1": 42.299, "R2": 93.793, "R3": 16.552, "R4": 58.851, "R5": 77.241}
    for name, milliamperes in printed.items():
        assert both(solution, lambda s, n=name: s.currents[n]) * 1000 == pytest.approx(milliamperes, abs=0.0005)
    assert both(solution, lambda s: s.potentials["l"]) == pytest.approx(17.6552, abs=0.00005)


# Khalid Khan Yousafzai, Circuit Analysis (open textbook), chapters on nodal analysis and theorems; all answers printed as
# whole numbers or fractions, but for the second, printed to 0.01 V.
YOUSAFZAI = {
    "source on the common rail, superposition exercise": (
        [part("V", "VS", "g", "s", 6), part("R", "R2k", "s", "m", 2000), part("R", "R4k", "m", "o", 4000),
         part("R", "R6k", "o", "g", 6000), part("I", "IS", "g", "m", "0.004")],
        {"o": 1}, {},
    ),
    "current-controlled voltage source to the reference": (
        [part("R", "R4k", "v1", "g", 4000), part("E", "H", "v1", "g", 2000, "R1k"), part("R", "R2k", "v2", "v1", 2000),
         part("R", "R1k", "v2", "g", 1000), part("I", "IS", "v2", "g", "0.002")],
        {"v1": -8, "v2": -4}, {"R1k": Fraction(-4, 1000), "R2k": Fraction(2, 1000)},
    ),
    "voltage-controlled current source": (
        [part("I", "IS", "g", "a", "0.004"), part("R", "R3k", "a", "g", 3000), part("R", "R6k", "a", "g", 6000),
         part("F", "G", "a", "o", Fraction(1, 3000), ("a", "g")), part("R", "R2k", "o", "g", 2000)],
        {"o": Fraction(16, 5)}, {},
    ),
    "controlled voltage source in a supernode": (
        [part("V", "V5", "v4", "g", 5), part("R", "R8k", "v4", "v3", 8000), part("I", "I2", "v3", "w", "0.002"),
         part("R", "R4k", "w", "g", 4000), part("R", "R2k", "v1", "g", 2000), part("E", "E", "w", "v1", 3, ("v1", "g")),
         part("R", "R1k", "v3", "v2", 1000), part("I", "I1", "v2", "g", "0.001"), part("R", "R6k", "v1", "v2", 6000)],
        {"v1": Fraction(20, 47), "v2": Fraction(-364, 47), "v3": Fraction(-381, 47)}, {},
    ),
    "controlled voltage source closing a mesh": (
        [part("V", "V6", "a", "g", 6), part("R", "R4k", "a", "b", 4000), part("R", "R6k", "b", "g", 6000),
         part("R", "R2k", "b", "c", 2000), part("E", "E", "g", "c", 2, ("g", "b"))],
        {"b": -18}, {"R6k": Fraction(-3, 1000), "R2k": Fraction(9, 1000)},
    ),
    "resistance seen by a test source, with a controlled source": (
        [part("V", "VT", "a", "g", 1), part("R", "R4k", "n1", "g", 4000), part("R", "R8k", "n1", "d", 8000),
         part("E", "E", "d", "g", 3, ("d", "n1")), part("R", "R2k", "a", "d", 2000), part("R", "R10k", "a", "n1", 10000),
         part("R", "R6k", "a", "g", 6000)],
        {"n1": Fraction(8, 23), "d": Fraction(12, 23)}, {"VT": Fraction(-65, 138000)},
    ),
    "current-controlled current source, open circuit": (
        [part("F", "F", "p", "g", 4, "R8k"), part("R", "R4k", "p", "g", 4000), part("V", "V6", "q", "p", 6),
         part("R", "R8k", "q", "g", 8000)],
        {"q": Fraction(12, 7)}, {},
    ),
    "current-controlled current source, short circuit": (
        [part("F", "F", "p", "g", 4, "R8k"), part("R", "R4k", "p", "g", 4000), part("V", "V6", "q", "p", 6),
         part("R", "R8k", "q", "g", 8000), part("S", "laid", "q", "g")],
        {"q": 0}, {"laid": Fraction(3, 2000)},
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", YOUSAFZAI)
def test_yousafzai_worked_examples(name):
    parts, potentials, currents = YOUSAFZAI[name]
    solution = solve(circuit(*parts, reference="g"))
    for node, v in potentials.items():
        assert total(solution).potentials[node] == v
    for label, i in currents.items():
        assert total(solution).currents[label] == i
    assert solution.gap < 1e-12 and solution.residual < 1e-12 and solution.balance < 1e-12


def test_yousafzai_transconductance_example_printed_to_two_places():
    solution = solve(circuit(
        part("I", "IA", "g", "v1", "0.001"), part("R", "R1", "v1", "g", 4000), part("R", "R2", "v1", "v2", 8000),
        part("R", "R3", "v1", "v3", 12000), part("F", "G", "v2", "g", "0.002", ("v2", "v3")),
        part("R", "R4", "v2", "v3", 6000), part("R", "R5", "v3", "g", 2000), reference="g",
    ))  # fmt: skip
    for node, v in {"v1": 2.38, "v2": 0.48, "v3": 0.37}.items():
        assert both(solution, lambda s, n=node: s.potentials[n]) == pytest.approx(v, abs=0.005)


@pytest.mark.parametrize(("node", "ohms"), [("7", Fraction(5, 6)), ("1", Fraction(7, 12)), ("3", Fraction(3, 4))])
def test_cube_of_twelve_one_ohm_resistors(node, ohms):
    """Body diagonal, edge and face diagonal of the cube; schoolphysics.co.uk, age 16-19, Resistance networks."""
    edges = [(a, a | bit) for a in range(8) for bit in (1, 2, 4) if not a & bit]
    cube = [part("R", f"R{k}", str(a), str(b), 1) for k, (a, b) in enumerate(edges)]
    assert total(solve(circuit(*cube, part("I", "test", "0", node, 1), reference="0"))).potentials[node] == ohms


# --- witnesses ------------------------------------------------------------------------------------------------------


@settings(max_examples=40, deadline=None)
@given(circuits("RI"), st.data())
def test_resistance_between_nodes_is_the_resistance_distance_of_the_graph(made, data):
    a, b = data.draw(st.permutations(made.nodes()))[:2]
    graph = networkx.MultiGraph()
    for e in made.elements:
        if e.kind == "resistor" and e.plus != e.minus:
            graph.add_edge(e.plus, e.minus, ohms=float(e.value))
    tested = replace(made, elements=(*made.elements, part("I", "test", b, a, 1)))
    alone = state(solve(tested), ("test",)).potentials
    assert float(alone[a] - alone[b]) == pytest.approx(networkx.resistance_distance(graph, a, b, "ohms"), rel=1e-9)


def tableau(made, zero, number):
    """Node potentials and all currents as unknowns by an arrangement of the test's own, the reference held by a row."""
    nodes, names = list(made.nodes()), [e.name for e in made.elements]
    count = len(nodes)
    rows, right = [{} for _ in range(count + len(names))], [zero] * (count + len(names))
    for k, e in enumerate(made.elements):
        own, plus, minus = count + k, nodes.index(e.plus), nodes.index(e.minus)
        for at, sign in ((plus, 1), (minus, -1)):
            rows[at][own] = rows[at].get(own, 0) + sign
        value = number(e.value) if e.value is not None else zero
        law = rows[own]
        if e.kind in ("current source", "controlled current source", "open", "capacitor"):
            law[own] = number(1)
        else:
            law[plus], law[minus] = number(1), law.get(minus, 0) - 1 if plus != minus else zero
        if e.kind == "resistor":
            law[own] = -value
        elif e.control is not None:
            c = e.control
            steer = (
                ((count + names.index(c.part), 1),)
                if c.part
                else ((nodes.index(c.plus), 1), (nodes.index(c.minus), -1))
            )
            for at, sign in steer:
                law[at] = law.get(at, 0) - sign * value
        elif e.kind in ("voltage source", "current source"):
            right[own] = value
    rows[nodes.index(made.reference)] = {nodes.index(made.reference): number(1)}
    return nodes, rows, right


@settings(max_examples=60, deadline=None)
@given(circuits())
def test_potentials_are_those_of_a_sparse_solver(made):
    nodes, rows, right = tableau(made, 0.0, float)
    cells = [(i, j, float(x)) for i, row in enumerate(rows) for j, x in row.items()]
    i, j, x = zip(*cells, strict=True)
    matrix = coo_matrix((x, (i, j))).tocsc()
    solved = spsolve(matrix, np.array(right))
    solution = solve(made)
    volts, _ = scales(made, solution)
    slack = 1e-15 * np.linalg.cond(matrix.toarray())
    for node, v in zip(nodes, solved, strict=False):
        assert float(total(solution).potentials[node]) == pytest.approx(v, rel=1e-9, abs=max(1e-9, slack) * volts)


@settings(max_examples=15, deadline=None)
@given(circuits("RVISL0", most_nodes=5, most_extra=4), st.data())
def test_eighteen_decades_of_resistance_against_fifty_digits(made, data):
    wide = decimals(-6, 12)
    made = replace(
        made, elements=tuple(replace(e, value=data.draw(wide)) if e.kind == "resistor" else e for e in made.elements)
    )
    solution, exact = solve(made), total(solve(made))
    with mpmath.workdps(90):
        nodes, rows, right = tableau(made, mpmath.mpf(0), lambda q: mpmath.mpf(q.numerator) / q.denominator)
        matrix = mpmath.matrix(len(rows))
        for i, row in enumerate(rows):
            for j, x in row.items():
                matrix[i, j] = x
        solved = mpmath.lu_solve(matrix, mpmath.matrix(right))
        for k, node in enumerate(nodes):
            v = exact.potentials[node]
            assert abs(mpmath.mpf(v.numerator) / v.denominator - solved[k]) <= mpmath.mpf(10) ** -50 * solution.volts
    assert solution.exact


def test_eighteen_decades_of_resistance_in_both_routes():
    """By hand: 1 V over 1 µΩ + 1 TΩ + 1 TΩ, and a dead-end µΩ behind it."""
    solution = solve(circuit(
        part("V", "V1", "a", "com", 1), part("R", "R1", "a", "b", "1e-6"), part("R", "R2", "b", "c", "1e12"),
        part("R", "R3", "c", "com", "1e12"), part("R", "R4", "c", "d", "1e-6"),
    ))  # fmt: skip
    exact = 1 / (2 * Fraction(10) ** 12 + Fraction(1, 10**6))
    assert total(solution).currents["R1"] == exact and total(solution).currents["R4"] == 0
    assert solution.nodal.currents["R1"] == pytest.approx(float(exact), rel=1e-9)
    assert solution.gap < 1e-9


# --- what stands where ----------------------------------------------------------------------------------------------


def test_currents_through_links_and_zeroed_sources_are_worked_in_every_part():
    """By hand: S1 in series with R1 (10 Ω) on 5 V; I1 returns through the zeroed V1 and the links."""
    made = circuit(
        part("V", "V1", "a", "com", 5), part("S", "S1", "a", "b"), part("R", "R1", "b", "c", 10),
        part("L", "L1", "c", "com", "0.001"), part("I", "I1", "com", "b", 2), part("C", "C1", "b", "com", "1e-6"),
        part("R", "R0", "com", "d", 0), part("O", "O1", "d", "a"),
    )  # fmt: skip
    solution = solve(made)
    half = Fraction(1, 2)
    assert solution.parts["V1"].currents == {
        "V1": -half, "S1": half, "R1": half, "L1": half, "I1": 0, "C1": 0, "R0": 0, "O1": 0,
    }  # fmt: skip
    assert solution.parts["I1"].currents == {
        "V1": 2, "S1": -2, "R1": 0, "L1": 0, "I1": 2, "C1": 0, "R0": 0, "O1": 0,
    }  # fmt: skip


@pytest.mark.parametrize("steering", ["S1", "V1", "F1", "I1", "O1", "R2"])
def test_any_part_may_steer_a_controlled_source(steering):
    """A controlled source of gain 3 puts out three times the current of what steers it, in each part and in all."""
    made = circuit(
        part("V", "V1", "a", "com", 6), part("S", "S1", "a", "b"), part("R", "R1", "b", "c", 2),
        part("R", "R2", "c", "com", 1), part("I", "I1", "com", "c", 1), part("O", "O1", "c", "com"),
        part("F", "F1", "d", "com", 2, "S1"), part("R", "R3", "d", "com", 4),
        part("F", "F2", "e", "com", 3, steering), part("R", "R4", "e", "com", 1),
    )  # fmt: skip
    solution = solve(made)
    for at in (*solution.parts.values(), total(solution)):
        assert at.currents["F2"] == 3 * at.currents[steering]
        assert at.currents["R4"] == -at.currents["F2"]
    assert solution.gap < 1e-12


def test_scales_are_the_largest_voltage_current_and_power():
    """By hand: 12 V and −6 V rails, 18 V between them; 18 V over 9 Ω gives 2 A and 36 W."""
    solution = solve(circuit(
        part("V", "V1", "a", "com", 12), part("V", "V2", "com", "b", 6), part("R", "R1", "a", "b", 9),
    ))  # fmt: skip
    assert (solution.volts, solution.amperes, solution.watts) == pytest.approx((18, 2, 36))


def test_no_independent_source_gives_zero_everywhere():
    solution = solve(circuit(part("R", "R1", "a", "com", 10), part("E", "E1", "b", "com", 2, ("a", "com")),
                             part("R", "R2", "b", "com", 5)))  # fmt: skip
    assert solution.parts == {} and solution.exact
    assert (solution.gap, solution.residual, solution.balance) == (0, 0, 0)
    for at in (solution.nodal, total(solution)):
        assert set(at.potentials.values()) == set(at.currents.values()) == {0}
    assert set(total(solution).potentials) == {"a", "b", "com"}


def test_sources_that_cancel_leave_no_gap():
    """Two like sources against each other: every current is zero, and rounding is measured by what cancels."""
    solution = solve(circuit(part("V", "V1", "a", "com", "9.1"), part("R", "R1", "a", "b", "0.3"), part("R", "R2", "b", "c", "0.7"),
                             part("V", "V2", "c", "com", "9.1")))  # fmt: skip
    assert set(total(solution).currents.values()) == {0}
    assert solution.amperes == pytest.approx(9.1) and solution.gap < 1e-12


def test_a_part_from_a_node_to_itself_takes_no_part():
    """A resistor there carries nothing; a current source sends its current round itself."""
    parts = [part("V", "V1", "a", "com", 5), part("R", "R1", "a", "com", 10)]
    solution = solve(circuit(*parts, part("R", "R2", "a", "a", 3), part("I", "I1", "a", "a", 2)))
    assert total(solution).currents == {"V1": Fraction(-1, 2), "R1": Fraction(1, 2), "R2": 0, "I1": 2}
    assert solution.gap < 1e-12


def test_negative_resistance_is_solved():
    """By hand: −100 Ω beside 300 Ω make −150 Ω; with 350 Ω before them 200 Ω, 10 mA on 2 V."""
    solution = solve(circuit(part("V", "V1", "a", "com", 2), part("R", "R1", "a", "b", 350), part("R", "R2", "b", "com", 300),
                             part("R", "R3", "b", "com", -100)))  # fmt: skip
    assert both(solution, lambda s: s.currents["R1"]) == Fraction(1, 100)


def test_a_circuit_with_problems_is_not_solved():
    problem = Finding("circuit-line", "error", "cannot be read", Span(0, 9))
    made = replace(KUPHALDT, problems=(problem,))
    with pytest.raises(Unsolvable) as refused:
        solve(made)
    assert refused.value.findings == (problem,)
    assert solve_batch([made, KUPHALDT])[0] is None


def test_a_batch_leaves_out_what_has_no_solution_and_keeps_the_rest():
    b2 = KUPHALDT.element("B2")
    loose = replace(
        KUPHALDT, elements=tuple(replace(e, kind="open") if e.name in ("R3", "B2") else e for e in KUPHALDT.elements)
    )
    looped = replace(KUPHALDT, elements=(*KUPHALDT.elements[:4], replace(b2, plus="a")))
    missing = replace(KUPHALDT, elements=(*KUPHALDT.elements, part("F", "F1", "a", "g", 2, "nothing")))
    found = solve_batch([KUPHALDT, loose, looped, missing, replace(KUPHALDT, elements=()), KUPHALDT])
    assert [at is None for at in found] == [False, True, True, True, True, False]
    assert found[0].currents == pytest.approx({"B1": -5, "R1": 5, "R2": 4, "R3": 1, "B2": 1})
    assert found[5] == found[0] and solve_batch([]) == []


def test_a_batch_of_like_parts_between_other_nodes():
    turned = replace(
        KUPHALDT,
        elements=tuple(
            replace(e, plus=e.plus.replace("m", "n"), minus=e.minus.replace("m", "n")) for e in KUPHALDT.elements
        ),
    )
    first, second = solve_batch([KUPHALDT, turned])
    assert first.currents == second.currents and first.potentials["m"] == second.potentials["n"] == pytest.approx(8)


def test_a_source_named_twice_counts_once():
    assert state(solve(KUPHALDT), ("B1", "B1")) == state(solve(KUPHALDT), ("B1",))


def test_a_small_pivot_is_passed_over_in_floating_point():
    """10⁻²⁰·x + y = 1 and x + y = 2, so x = y = 1 to 20 places; with the first pivot x would come out 0 (textbook example)."""
    x, y = solve_float([{0: 1e-20, 1: 1.0, -1: -1.0}, {0: 1.0, 1: 1.0, -1: -2.0}])
    assert (x[-1], y[-1]) == pytest.approx((1, 1))


@pytest.mark.parametrize(
    ("parts", "volts", "amperes", "gap"),
    [
        # 2 A round a short with 5 Ω beside it: every voltage zero, so 10 V (2 A in 5 Ω) is what rounding is measured by
        ([part("I", "I1", "com", "a", 2), part("S", "S1", "a", "com"), part("R", "R1", "a", "com", 5)], 1e-14, 0, 1e-15),
        # 10 V on an open resistor of 5 Ω: every current zero, so 2 A (10 V over 5 Ω) is
        ([part("V", "V1", "a", "com", 10), part("R", "R1", "a", "b", 5)], 0, 1e-15, 5e-16),
        ([part("V", "V1", "a", "com", 10), part("R", "R1", "a", "b", 5)], math.nan, 0, math.inf),
        ([part("V", "V1", "a", "com", 10), part("R", "R1", "a", "b", 5)], 0, math.inf, math.inf),
        ([part("V", "V1", "a", "com", 10), part("R", "R1", "a", "com", 5)], 1e-6, 0, 1e-7),
    ],
)  # fmt: skip
def test_a_route_that_strays_shows_in_the_gap(parts, volts, amperes, gap):
    made = circuit(*parts)
    solution = solve(made)
    strayed = State(
        {n: v + volts for n, v in solution.nodal.potentials.items()},
        {n: i + amperes for n, i in solution.nodal.currents.items()},
    )
    assert compared(network_of(made), strayed, solution.parts).gap == pytest.approx(gap, rel=0.2, abs=0)


def test_a_single_value_that_is_no_number_shows_in_every_figure():
    solution = solve(KUPHALDT)
    spoilt = State(solution.nodal.potentials, {**solution.nodal.currents, "R3": math.nan})
    figures = compared(network_of(KUPHALDT), spoilt, solution.parts)
    assert (figures.gap, figures.residual, figures.balance) == (math.inf, math.inf, math.inf)


def test_values_that_fit_no_float_are_refused_with_words():
    """Twelve stages of gain 10³⁰ on one volt."""
    stages = [part("E", f"E{k}", f"n{k + 1}", "com", "1e30", (f"n{k}", "com")) for k in range(12)]
    loads = [part("R", f"R{k}", f"n{k}", "com", 1) for k in range(13)]
    with pytest.raises(Unsolvable, match="fit no number"):
        solve(circuit(part("V", "V1", "n0", "com", 1), *stages, *loads))


def test_an_unknown_source_is_refused():
    with pytest.raises(KeyError):
        state(solve(KUPHALDT), ("R1",))


def test_numpy_is_imported_only_to_solve():
    code = "import sys, calccheck.solve; sys.exit('numpy' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
