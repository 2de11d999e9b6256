"""Circuits without a single solution: each is refused, with the parts and nodes at fault and their line."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import pytest
from circuits import circuit, circuits, part
from hypothesis import given, settings
from hypothesis import strategies as st

from calccheck.model import Control
from calccheck.rules import RULES
from calccheck.solve import Unsolvable, solve, solve_batch
from calccheck.solve.branches import network_of
from calccheck.solve.singular import is_singular
from calccheck.solve.structure import faults

SOUND = (part("V", "V1", "a", "com", 5), part("R", "R1", "a", "b", 100), part("R", "R2", "b", "com", 100))


def refused(*parts, reference="com"):
    """The findings on a circuit that must not be solved."""
    made = circuit(*parts, reference=reference)
    with pytest.raises(Unsolvable) as caught:
        solve(made)
    assert caught.value.findings
    for f in caught.value.findings:
        assert f.severity == RULES[f.kind].severity == "error"
        assert f.message in str(caught.value)
    return made, caught.value.findings


def line_of(made, name):
    return made.element(name).span


def test_a_sound_circuit_has_no_faults():
    assert faults(network_of(circuit(*SOUND))) == ()


# Extra parts on the sound circuit; words that the message must hold; the part on whose line it stands.
CASES = {
    "island": (
        [part("R", "R3", "x", "y", 1), part("V", "V2", "x", "y", 1)],
        "Nodes x and y have no path to the reference com; parts there: R3 and V2.", "R3",
    ),
    "island behind gaps": (
        [part("R", "R3", "x", "y", 1), part("C", "C1", "x", "b", 1), part("O", "O1", "y", "com")],
        "Nodes x and y have no path to the reference com; parts there: R3; only gaps lead on: C1 (a capacitor, a gap at DC) and O1.",
        "R3",
    ),
    "node between capacitors": (
        [part("C", "C1", "b", "x", 1), part("C", "C2", "x", "com", 1)], "Node x has no path to the reference com; only gaps", "C1",
    ),
    "two shorts side by side": (
        [part("S", "S1", "b", "c"), part("R", "R3", "c", "com", 1), part("S", "S2", "c", "b")],
        "S1 and S2 make a loop without resistance: the voltages around it agree, but the currents in it are not determined.", "S2",
    ),
    "two equal voltage sources side by side": (
        [part("V", "V2", "com", "a", -5)], "V1 and V2 make a loop without resistance: the voltages around it agree", "V2",
    ),
    "two unequal voltage sources side by side": (
        [part("V", "V2", "a", "com", 3)], "V1 and V2 make a loop without resistance: the voltages around it add up to 2 V instead", "V2",
    ),
    "a voltage source shorted through an inductor and a resistance of zero": (
        [part("L", "L1", "a", "x", 1), part("R", "R0", "x", "com", 0)],
        "V1, L1 (an inductor, a link at DC) and R0 (a resistance of zero) make a loop without resistance: "
        "the voltages around it add up to 5 V instead of zero.", "R0",
    ),
    "three sources in a loop": (
        [part("V", "V2", "a", "c", 2), part("V", "V3", "com", "c", -4)],
        "V1, V2 and V3 make a loop without resistance: the voltages around it add up to 1 V instead", "V3",
    ),
    "a voltage source from a node to itself": (
        [part("V", "V2", "b", "b", 3)], "V2 has both ends at node b: no node stands 3 V above itself.", "V2",
    ),
    "a short from a node to itself": (
        [part("S", "S1", "b", "b")], "S1 has both ends at node b: nothing determines the current in it.", "S1",
    ),
    "a node fed only by a current source": (
        [part("I", "I1", "com", "x", "0.001")],
        "Node x is fed only by current sources (I1), and the currents into it add up to 1 mA instead of zero.", "I1",
    ),
    "a group fed by balanced current sources and a capacitor": (
        [part("I", "I1", "com", "x", "0.001"), part("R", "R3", "x", "y", 5), part("I", "I2", "y", "b", "0.001"),
         part("C", "C1", "y", "com", 1)],
        "Nodes x and y are fed only by current sources (I1 and I2) and gaps (C1 (a capacitor, a gap at DC)): "
        "the currents balance, but the potential there is not determined.", "I1",
    ),
    "an unknown controlling part": (
        [part("F", "F1", "b", "com", 2, "R11")],
        "F1 is controlled by the current of part R11, which this circuit does not have. Did you mean R1?", "F1",
    ),
    "an unknown controlling node": (
        [part("E", "E1", "c", "com", 2, ("b", "nowhere"))], "controlled by the voltage at node nowhere, which this circuit does not have.", "E1",
    ),
    "a controlled source that nothing controls": (
        [part("F", "F1", "b", "com", 2, ("", ""))], "nothing is named that controls it", "F1",
    ),
    "a part without a number": ([part("R", "R3", "b", "com")], "R3 has no number for a value", "R3"),
    "a value outside all bounds": ([part("R", "R3", "b", "com", "1e31")], "R3 has a value outside 1e−30 to 1e30", "R3"),
    "a controlled voltage source across a voltage source": (
        [part("E", "E1", "a", "com", 2, ("b", "com"))],
        "V1 and E1 make a loop without resistance: nothing determines the currents in it.", "E1",
    ),
    "a node fed only by controlled current sources": (
        [part("F", "F1", "com", "x", 2, "R1"), part("I", "I1", "x", "com", "0.1")],
        "Node x is fed only by current sources (F1 and I1), which leaves the potential there open.", "F1",
    ),
    "a gain that cancels a resistance": (  # −1/50 S across b beside 1/100 + 1/100 S
        [part("F", "F1", "com", "b", "0.02", ("b", "com"))],
        "The controlled source F1 with its gain of 0.02 cancels what the other parts do", "F1",
    ),
    "a controlled source that steers itself with a gain of one": (
        [part("F", "F1", "com", "b", 1, "F1")], "The controlled source F1 with its gain of 1 cancels", "F1",
    ),
    "a negative resistance that cancels another": (
        [part("R", "R3", "b", "com", -50)], "The resistance R3 of −50 Ω cancels what the other parts do", "R3",
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", CASES)
def test_faults_by_name_and_line(name):
    extra, words, at = CASES[name]
    made, (found,) = refused(*SOUND, *extra)
    assert words in found.message
    assert found.kind == "structure" and found.span == line_of(made, at)
    assert solve_batch([made]) == [None] or "outside" in words or "both ends" in words


def test_an_island_written_before_the_rest():
    made, (found,) = refused(part("R", "R3", "x", "y", 1), *SOUND)
    assert found.message.startswith("Nodes x and y have no path") and found.span == line_of(made, "R3")


def test_no_reference_offers_the_node_where_most_parts_meet():
    made, (found,) = refused(*SOUND, part("R", "R3", "b", "c", 1), reference="")
    assert found.message.startswith("No node is named as the reference") and found.suggestion == "reference b"
    assert found.span == made.span


def test_a_reference_that_no_part_touches():
    _, (found,) = refused(*SOUND, reference="gnd")
    assert found.message.startswith("The reference gnd is a node of no part.") and found.suggestion.startswith(
        "reference "
    )


def test_an_empty_block():
    made, (found,) = refused()
    assert "has no parts" in found.message and found.span == made.span


def test_a_part_whose_model_lacks_a_number():
    made = replace(
        circuit(*SOUND), elements=(*circuit(*SOUND).elements[:2], replace(circuit(*SOUND).elements[2], kind="diode"))
    )
    with pytest.raises(Unsolvable, match="R2 has no number for its drop") as caught:
        solve(made)
    assert caught.value.findings[0].span == made.elements[2].span


def test_a_controlled_source_without_control():
    made = circuit(*SOUND, part("F", "F1", "b", "com", 2))
    for control in (None, Control()):
        broken = replace(made, elements=(*made.elements[:3], replace(made.elements[3], control=control)))
        with pytest.raises(Unsolvable, match="nothing is named that controls it"):
            solve(broken)


def test_all_faults_are_said_at_once():
    _, found = refused(
        *SOUND, part("V", "V2", "a", "com", 3), part("R", "R3", "x", "y", 1), part("I", "I1", "com", "z", 1)
    )
    assert len(found) == 3


@pytest.mark.parametrize(
    "parts",
    [
        [part("E", "E1", "a", "com", 50, "E1")],  # a controlled source across V1 that is a resistance of 50 Ω
        [part("F", "F1", "com", "x", "0.01", ("com", "x"))],  # a node on a controlled source alone that is 100 Ω
        [part("F", "F1", "com", "b", "0.019999999999999999", ("b", "com"))],  # near to cancelling, but not there
        [part("E", "E1", "c", "com", 1, ("c", "d")), part("R", "R4", "c", "d", 1), part("R", "R5", "d", "com", 1)],
    ],
)
def test_controlled_sources_are_judged_by_their_equations_not_by_where_they_stand(parts):
    assert solve(circuit(*SOUND, *parts)).exact


def test_beyond_exact_sizes_the_condition_decides():
    """The same cancelling gain in a ladder of forty nodes: refused; with another gain solved."""
    ladder = [part("R", f"A{k}", f"n{k}", f"n{k + 1}", 10) for k in range(40)] + [part("R", "B", "n40", "com", 10)]
    ladder += [part("V", "V0", "n0", "com", 1), part("R", "R3", "x", "com", 50), part("R", "R4", "x", "n20", "1e3")]
    seen = 1 / (Fraction(1, 50) + 1 / (1000 + 1 / (Fraction(1, 200) + Fraction(1, 210))))  # by hand, from x to com
    _, (found,) = refused(*ladder, part("F", "F1", "com", "x", 1 / seen, ("x", "com")))
    assert "F1" in found.message
    assert solve(circuit(*ladder, part("F", "F1", "com", "x", 2 / seen, ("x", "com")))).gap < 1e-9


@settings(max_examples=60, deadline=None)
@given(circuits("RVISOCL0"))
def test_without_controlled_sources_structure_alone_decides(made):
    assert faults(network_of(made)) == () and not is_singular(network_of(made))


@settings(max_examples=60, deadline=None)
@given(circuits("RVISOCL0"), st.data())
def test_a_random_circuit_spoilt_is_refused_and_the_spoiler_named(made, data):
    """A loop without resistance is closed, or a node hung on a current source or a gap; the new part is named."""
    joined = [e for e in made.elements if e.kind in ("voltage source", "short", "inductor")]
    node = data.draw(st.sampled_from(made.nodes()))
    spoilers = [
        part("I", "spoiler", node, "new", 1),
        part("O", "spoiler", "new", node),
        part("S", "spoiler", node, node),
    ]
    spoilers += [part("V", "spoiler", e.plus, e.minus, 7) for e in joined]
    with pytest.raises(Unsolvable) as caught:
        solve(replace(made, elements=(*made.elements, data.draw(st.sampled_from(spoilers)))))
    assert any("spoiler" in f.message for f in caught.value.findings)
    assert is_singular(network_of(made)) is False


@settings(max_examples=60, deadline=None)
@given(circuits("RVIEF"), st.data())
def test_shapes_that_are_refused_have_singular_equations_and_no_others(made, data):
    """Any two nodes joined by any part: refused exactly where numpy finds the equations of rank too low or contradicting."""
    a, b = data.draw(st.tuples(*[st.sampled_from((*made.nodes(), "new"))] * 2))
    kind = data.draw(st.sampled_from("RVIS"))
    tried = replace(made, elements=(*made.elements, part(kind, "tried", a, b, None if kind == "S" else 3)))
    try:
        solve(tried)
        refused_here = False
    except Unsolvable:
        refused_here = True
    (batch,) = solve_batch([tried])
    assert refused_here == (batch is None)
