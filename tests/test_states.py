"""The states that hand models assume: which inequality fails, and by how much."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import pytest
from circuits import ac, circuit, diode, op_amp, part, transistor
from hypothesis import given
from hypothesis import strategies as st

from calccheck.rules import RULES
from calccheck.solve import solve, state_faults, total

SATURATED = [
    part("V", "VCC", "cc", "g", 10),
    part("V", "VB", "d", "g", 5),
    part("R", "RB", "d", "b", 10000),
    part("R", "RC", "cc", "c", 1000),
]


GROUNDED = part("R", "R1", "n", "com", 1000)


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
