"""Laws of linear circuits at AC, and of parts of several terminals at DC and AC, over random circuits."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

from circuits import ac, ac_circuits, circuits, part, scales, stages
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from calccheck.model import Device
from calccheck.solve import Unsolvable, frequencies, solve, state, total
from calccheck.solve.branches import network_of
from calccheck.solve.nodal import condition

few = settings(max_examples=50, deadline=None)
DC = Fraction(0)


def ends(e, reference):
    """Node, key and sign of every current into a part, by the test's own list."""
    if e.kind == "op-amp":
        return [(n, f"{e.name},{word}", 1) for word, n in e.terminals] + [(reference, f"{e.name},out", -1)]
    if e.terminals:
        return [(n, f"{e.name},{word}", 1) for word, n in e.terminals]
    return [(e.plus, e.name, 1), (e.minus, e.name, -1)]


def powers(made, at):
    return {e.name: sum(sign * at.potentials[n] * at.currents[key].conjugate() for n, key, sign in ends(e, made.reference))
            for e in made.elements}  # fmt: skip


def sums_at_nodes(made, at):
    sums = dict.fromkeys(at.potentials, 0)
    for e in made.elements:
        for node, key, sign in ends(e, made.reference):
            sums[node] += sign * at.currents[key]
    return sums


def close(a, b, scale, slack=1e-9):
    return all(abs(a[name] - b[name]) <= slack * scale for name in a)


def tuned(made, change):
    return replace(made, elements=tuple(change(e) for e in made.elements))


# --- phasors --------------------------------------------------------------------------------------------------------


@few
@given(ac_circuits(mixed=True))
def test_currents_and_complex_powers_balance_at_every_frequency(made):
    """Kirchhoff; Tellegen's theorem for V·I*."""
    for hertz in frequencies(made):
        try:
            solution = solve(made, hertz)
        except Unsolvable:  # at DC capacitors and inductors may leave no single solution
            assert hertz == DC or any(e.control for e in made.elements)
            continue
        for at in (*solution.parts.values(), total(solution)):
            assert all(abs(x) <= 1e-12 * (solution.amperes or 1) for x in sums_at_nodes(made, at).values())
            assert abs(sum(powers(made, at).values())) <= 1e-12 * (solution.watts or 1)


@few
@given(ac_circuits())
def test_each_part_obeys_its_law(made):
    hertz = frequencies(made)[-1]
    w = 2j * 3.141592653589793 * float(hertz)
    solution = solve(made, hertz)
    for alone, at in solution.parts.items():
        for e in made.elements:
            v, i = at.potentials[e.plus] - at.potentials[e.minus], at.currents[e.name]
            law = {
                "resistor": lambda e=e, v=v, i=i: v - float(e.value) * i, "inductor": lambda e=e, v=v, i=i: v - w * float(e.value) * i,
                "capacitor": lambda e=e, v=v, i=i: v - i / (w * float(e.value)), "short": lambda v=v: v,
                "voltage source": lambda v=v, u=e.phasor if e.name == alone else 0: v - u,
            }.get(e.kind)  # fmt: skip
            assert law is None or abs(law()) <= 1e-9 * solution.volts
            if e.kind == "current source":
                assert abs(i - (e.phasor if e.name == alone else 0)) <= 1e-12 * solution.amperes


@few
@given(ac_circuits())
def test_superposition_equals_nodal(made):
    hertz = frequencies(made)[-1]
    solution = solve(made, hertz)
    assert solution.exact
    bound = max(1e-9, 1e-13 * condition(network_of(made, hertz)))
    assert solution.gap <= bound and solution.residual <= bound and solution.balance <= bound


@few
@given(ac_circuits("RVIEFSOLCZ"))
def test_conjugating_sources_and_reactances_conjugates_all_answers(made):
    def turned(e):
        phasor = None if e.phasor is None else e.phasor.conjugate()
        value = -e.value if e.kind in ("inductor", "capacitor") else e.value
        return replace(e, phasor=phasor, value=value)

    hertz = frequencies(made)[-1]
    first, second = total(solve(made, hertz)), total(solve(tuned(made, turned), hertz))
    for one, other in ((first.potentials, second.potentials), (first.currents, second.currents)):
        assert {n: x.conjugate() for n, x in one.items()} == other


@few
@given(ac_circuits("RVISOLCZ"), st.data())
def test_transfer_impedances_are_reciprocal(made, data):
    nodes = data.draw(st.tuples(*[st.sampled_from(made.nodes())] * 4))
    hertz = frequencies(made)[-1]

    def transfer(a, b, c, d):
        fed = replace(made, elements=(*made.elements, ac("I", "test", b, a, 1, hertz)))
        solution = solve(fed, hertz)
        at = state(solution, ["test"])
        return at.potentials[c] - at.potentials[d], max(abs(v) for v in at.potentials.values())

    (one, size), (other, more) = transfer(*nodes), transfer(*nodes[2:], *nodes[:2])
    assert abs(one - other) <= 1e-12 * max(size, more)


@few
@given(ac_circuits("RVISLC"))
def test_passive_parts_take_what_they_must(made):
    """Resistors take active power alone, coils reactive power above zero, capacitors below (IEC 60375; common practice)."""
    solution = solve(made, frequencies(made)[-1])
    small = 1e-9 * solution.watts
    for name, s in powers(made, total(solution)).items():
        match made.element(name).kind:
            case "resistor":
                assert s.real >= -small and abs(s.imag) <= small
            case "inductor":
                assert s.imag >= -small and abs(s.real) <= small
            case "capacitor":
                assert s.imag <= small and abs(s.real) <= small


@few
@given(ac_circuits(mixed=True))
def test_each_frequency_is_solved_as_if_the_other_sources_were_taken_out(made):
    for hertz in frequencies(made):

        def zeroed(e, hertz=hertz):
            if e not in made.sources() or (e.frequency or DC) == hertz:
                return e
            return replace(
                e, kind="short" if e.kind == "voltage source" else "open", value=None, phasor=None, frequency=None
            )

        try:
            whole = solve(made, hertz)
        except Unsolvable:
            continue
        alone = solve(tuned(made, zeroed), hertz)
        assert whole.parts == alone.parts and whole.nodal == alone.nodal


@few
@given(ac_circuits("RVIEFSOLC"), st.complex_numbers(min_magnitude=0.1, max_magnitude=10))
def test_scaled_and_turned_sources_scale_and_turn_everything(made, factor):
    hertz = frequencies(made)[-1]
    louder = tuned(made, lambda e: e if e.phasor is None else replace(e, phasor=e.phasor * factor))
    first, second = solve(made, hertz), solve(louder, hertz)
    scaled = {n: v * factor for n, v in total(first).potentials.items()}
    assert close(scaled, total(second).potentials, second.volts or 1)


@few
@given(circuits("RVIEFSOCL"))
def test_towards_zero_frequency_the_answers_tend_to_those_at_dc(made):
    """Coils of 1 mH and capacitors of 1 nF at 10⁻⁷ Hz: 10⁻⁹ Ω and more than 10¹⁵ Ω."""
    assume(condition(network_of(made)) < 1e5)
    slow = Fraction(1, 10**7)
    values = {"inductor": Fraction(1, 1000), "capacitor": Fraction(1, 10**9)}
    at_dc = solve(made)

    def altered(e):
        if e in made.sources():
            return replace(e, phasor=complex(e.value), value=None, frequency=slow)
        return replace(e, value=values.get(e.kind, e.value))

    solution = solve(tuned(made, altered), slow)
    assert close(total(at_dc).potentials, total(solution).potentials, scales(made, at_dc)[0] or 1, 1e-4)


# --- parts of several terminals -------------------------------------------------------------------------------------


@few
@given(st.data())
def test_exact_laws_with_op_amps_transformers_transistors_and_diodes(data):
    made = data.draw(stages(data.draw(circuits("RVIEF", most_nodes=4, most_extra=3))))
    solution = solve(made)
    assert solution.exact and set(solution.parts) == {e.name for e in made.sources()}
    assert solution.gap <= max(1e-9, 1e-13 * condition(network_of(made)))
    for alone, at in {**solution.parts, "": total(solution)}.items():
        assert set(sums_at_nodes(made, at).values()) == {0} and sum(powers(made, at).values()) == 0
        for e in made.elements:
            if e.device is not None:
                check_model(e, at, 1 if alone in ("", e.name) else 0)


def check_model(e, at, acting):
    """The equations of each hand model; ``acting``: 1 where its drops count, 0 where they are zeroed."""
    volts, device = {word: at.potentials[n] for word, n in e.terminals}, e.device
    amperes = {word: at.currents[f"{e.name},{word}"] for word in volts}
    sign = -1 if device.polarity == "pnp" else 1
    if e.kind == "op-amp":
        assert volts["plus"] == volts["minus"] and amperes["plus"] == amperes["minus"] == 0
    elif e.kind == "transformer":
        assert volts["first+"] - volts["first-"] == device.ratio * (volts["second+"] - volts["second-"])
        assert amperes["second+"] == -device.ratio * amperes["first+"] and amperes["first-"] == -amperes["first+"]
    elif e.kind == "transistor":
        assert sum(amperes.values()) == 0
        assert volts["base"] - volts["emitter"] == sign * device.v_be * acting
        if device.state == "saturated":
            assert volts["collector"] - volts["emitter"] == sign * device.v_ce * acting
        else:
            assert amperes["collector"] == device.beta * amperes["base"]
    elif device.state == "conducting":
        assert at.potentials[e.plus] - at.potentials[e.minus] == device.drop * acting
    else:
        assert at.currents[e.name] == 0


@few
@given(st.data())
def test_the_same_at_ac_where_drops_are_zeroed(data):
    made = data.draw(stages(data.draw(ac_circuits("RVIFLC", most_nodes=3, most_extra=3))))
    hertz = frequencies(made)[-1]
    solution = solve(made, hertz)
    assert all(made.element(name).kind.endswith("source") for name in solution.parts)
    assert solution.gap <= max(1e-9, 1e-13 * condition(network_of(made, hertz)))
    at = total(solution)
    assert all(abs(x) <= 1e-11 * solution.amperes for x in sums_at_nodes(made, at).values())
    assert abs(sum(powers(made, at).values())) <= 1e-11 * solution.watts
    for e in made.elements:
        if e.kind == "transformer":
            v = {word: at.potentials[n] for word, n in e.terminals}
            assert (
                abs(v["first+"] - v["first-"] - float(e.device.ratio) * (v["second+"] - v["second-"]))
                <= 1e-9 * solution.volts
            )
        if e.kind == "transistor":
            v = {word: at.potentials[n] for word, n in e.terminals}
            assert abs(v["base"] - v["emitter"]) <= 1e-9 * solution.volts


@few
@given(st.data())
def test_a_drop_is_a_voltage_source_named_by_its_part(data):
    """Each conducting diode replaced by a source of its drop gives the same parts and the same whole."""
    made = data.draw(stages(data.draw(circuits("RVI", most_nodes=4, most_extra=3))))

    def plain(e):
        if e.kind != "diode":
            return e
        if e.device.state == "blocking":
            return replace(e, kind="open", device=None)
        return replace(e, kind="voltage source", value=e.device.drop, device=None)

    assert solve(tuned(made, plain)).parts == solve(made).parts


@few
@given(circuits("RVI", most_nodes=4, most_extra=3), st.data())
def test_a_load_behind_a_transformer_is_seen_as_ratio_squared_times_it(made, data):
    """R₂ behind n:1 is n²·R₂ before it (every textbook of machines; from memory)."""
    node = data.draw(st.sampled_from(made.nodes()))
    n, ohms = Fraction(data.draw(st.integers(1, 40)), 4), Fraction(data.draw(st.integers(1, 1000)))
    words = {"first+": node, "first-": "com", "second+": "s", "second-": "com"}
    device = replace(
        part("O", "T1", "", ""), kind="transformer", terminals=tuple(words.items()), device=Device(ratio=n)
    )
    behind = replace(made, elements=(*made.elements, device, part("R", "load", "s", "com", ohms)))
    before = replace(made, elements=(*made.elements, part("R", "load", node, "com", ohms * n * n)))
    first, second = total(solve(behind)), total(solve(before))
    assert {k: v for k, v in first.potentials.items() if k != "s"} == second.potentials
    assert first.currents["T1,first+"] == second.currents["load"]
