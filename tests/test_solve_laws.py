"""Laws that hold in every linear circuit, over random circuits (Kirchhoff 1845, Tellegen 1952, superposition, reciprocity)."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from math import isclose

from circuits import circuit, circuits, part, scales
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from calccheck.model import Circuit
from calccheck.solve import solve, solve_batch, state, total
from calccheck.solve.branches import network_of
from calccheck.solve.nodal import condition

few = settings(max_examples=60, deadline=None)
PASSIVE = "RVISOCL0"


def sums_at_nodes(made, at):
    sums = dict.fromkeys(at.potentials, 0)
    for e in made.elements:
        sums[e.plus] += at.currents[e.name]
        sums[e.minus] -= at.currents[e.name]
    return sums


def powers(made, at):
    return {e.name: (at.potentials[e.plus] - at.potentials[e.minus]) * at.currents[e.name] for e in made.elements}


@few
@given(circuits())
def test_currents_at_every_node_and_powers_sum_to_zero_exactly_for_each_source_alone(made):
    solution = solve(made)
    assert solution.exact and set(solution.parts) == {e.name for e in made.sources()}
    for at in (*solution.parts.values(), total(solution)):
        assert set(sums_at_nodes(made, at).values()) == {0}
        assert sum(powers(made, at).values()) == 0
        assert at.potentials[made.reference] == 0
        assert all(isinstance(x, Fraction) for x in (*at.potentials.values(), *at.currents.values()))


@few
@given(circuits())
def test_every_part_obeys_its_own_law_with_each_source_alone_and_the_others_zeroed(made):
    for alone, at in solve(made).parts.items():
        for e in made.elements:
            volts, amperes = at.potentials[e.plus] - at.potentials[e.minus], at.currents[e.name]
            strength = e.value if e.name == alone else 0
            if e.control is not None:
                c = e.control
                strength = e.value * (at.currents[c.part] if c.part else at.potentials[c.plus] - at.potentials[c.minus])
            match e.kind:
                case "resistor":
                    assert volts == e.value * amperes
                case "voltage source" | "controlled voltage source":
                    assert volts == strength
                case "current source" | "controlled current source":
                    assert amperes == strength
                case "short" | "inductor":
                    assert volts == 0
                case "open" | "capacitor":
                    assert amperes == 0


@few
@given(circuits())
def test_superposition_equals_nodal(made):
    solution = solve(made)
    bound = 1e-9 if not any(e.control for e in made.elements) else 1e-13 * condition(network_of(made))
    assert solution.gap <= bound
    assert solution.residual <= bound and solution.balance <= bound


@few
@given(circuits(), st.integers(2, 9))
def test_scaled_sources_scale_voltages_and_square_powers(made, k):
    scaled = tuple(replace(e, value=k * e.value) if e in made.sources() else e for e in made.elements)
    louder = replace(made, elements=scaled)
    first, second = total(solve(made)), total(solve(louder))
    assert second.potentials == {n: k * v for n, v in first.potentials.items()}
    assert powers(louder, second) == {n: k * k * p for n, p in powers(made, first).items()}


@few
@given(circuits(), st.randoms(use_true_random=False))
def test_other_names_and_another_order_change_nothing(made, random):
    names = {n: f"node {k}" for k, n in enumerate(random.sample(made.nodes(), len(made.nodes())))}

    def renamed(e):
        control = e.control and replace(
            e.control, plus=names.get(e.control.plus, ""), minus=names.get(e.control.minus, "")
        )
        return replace(e, plus=names[e.plus], minus=names[e.minus], control=control)

    elements = [renamed(e) for e in made.elements]
    random.shuffle(elements)
    first, second = solve(made), solve(replace(made, elements=tuple(elements), reference=names[made.reference]))
    for name, at in first.parts.items():
        assert second.parts[name].currents == at.currents
        assert second.parts[name].potentials == {names[n]: v for n, v in at.potentials.items()}
    assert second.gap < max(1e-9, 1e-13 * condition(network_of(made)))


@few
@given(circuits(), st.data())
def test_a_reversed_part_changes_the_sign_of_what_is_its_own(made, data):
    chosen = data.draw(st.sampled_from(made.sources()))
    turned = replace(
        made, elements=tuple(replace(e, plus=e.minus, minus=e.plus) if e is chosen else e for e in made.elements)
    )
    assume(
        all(e.control is None or e.control.part != chosen.name for e in made.elements)
    )  # what it steers would turn too
    first, second = solve(made), solve(turned)
    for name in first.parts:
        sign = -1 if name == chosen.name else 1
        assert second.parts[name].potentials == {n: sign * v for n, v in first.parts[name].potentials.items()}


@few
@given(circuits(PASSIVE), st.data())
def test_transfer_resistances_are_reciprocal(made, data):
    """A current into one pair of nodes gives at another pair the voltage that it gives the other way round."""
    zeroed = tuple(replace(e, value=Fraction(0)) if e in made.sources() else e for e in made.elements)
    nodes = data.draw(st.tuples(*[st.sampled_from(made.nodes())] * 4))

    def transfer(a, b, c, d):
        fed = replace(made, elements=(*zeroed, part("I", "test", b, a, 1)))
        at = state(solve(fed), ("test",))
        return at.potentials[c] - at.potentials[d]

    assert transfer(*nodes) == transfer(*nodes[2:], *nodes[:2])
    assert transfer(*nodes[:2], *nodes[:2]) == transfer(*nodes[1::-1], *nodes[1::-1]) >= 0


@few
@given(circuits(PASSIVE), st.data())
def test_a_reference_moved_shifts_all_potentials_alike(made, data):
    other = data.draw(st.sampled_from(made.nodes()))
    first, second = total(solve(made)), total(solve(replace(made, reference=other)))
    shift = first.potentials[other]
    assert second.potentials == {n: v - shift for n, v in first.potentials.items()}
    assert second.currents == first.currents


@settings(max_examples=25, deadline=None)
@given(circuits(), st.data())
def test_a_batch_gives_what_each_circuit_gives_by_itself(made, data):
    def varied(e):
        return replace(e, value=e.value * Fraction(11, 10)) if e.value else replace(e, plus=e.minus, minus=e.plus)

    variants: list[Circuit] = [made]
    for k in range(len(made.elements)):
        variants.append(replace(made, elements=tuple(varied(e) if j == k else e for j, e in enumerate(made.elements))))
    variants.append(replace(made, elements=(*made.elements, part("R", "more", made.reference, made.nodes()[-1], 1))))
    for one, at in zip(variants, solve_batch(variants), strict=True):
        slack = 1e-13 * condition(network_of(one))
        if slack > 1e-4:
            continue
        solution = solve(one)
        exact = total(solution)
        assert at is not None
        volts, amperes = scales(one, solution)
        assert all(isclose(at.potentials[n], v, abs_tol=slack * volts) for n, v in exact.potentials.items())
        assert all(isclose(at.currents[n], i, abs_tol=slack * amperes) for n, i in exact.currents.items())


def test_thirty_nodes_are_worked_in_floating_point_and_still_agree():
    rungs = [part("R", f"A{k}", f"n{k}", f"n{k + 1}", 10 + k) for k in range(30)]
    rungs += [part("R", f"B{k}", f"n{k}", "com", 1000 - k) for k in range(31)]
    solution = solve(circuit(part("V", "V1", "n0", "com", 10), part("I", "I1", "com", "n30", "0.01"), *rungs))
    assert not solution.exact
    assert solution.gap < 1e-12 and solution.residual < 1e-12 and solution.balance < 1e-12
    assert all(isinstance(x, float) for x in total(solution).potentials.values())
