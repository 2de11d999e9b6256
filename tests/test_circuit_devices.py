"""Op-amps, transformers, transistors and diodes in circuit blocks, and named cases.

Expected records follow from the sheet language (docs/sheet-language.md) by hand; a pnp's drops counted from its emitter are
common practice.
"""

from __future__ import annotations

from fractions import Fraction

import pytest
from circuit_lines import placed, reading

from calccheck.arithmetic import Amount, evaluate
from calccheck.formula import Reference
from calccheck.model import Case, Circuit, Control, Device
from calccheck.units import NONE, OHM, SIEMENS, VOLT, Dimension

NPN = "Q1: npn, base a, collector b, emitter gnd, V_BE 0.65 V, beta 150"
PNP = "Q2: pnp, emitter a, base b, collector o, V_BE 0.7 V, beta 80, saturated, V_CE 0.2 V"
OP_AMP = "U1: op-amp, plus a, minus b, out o, swing −0.2 V to 4.8 V"
DIODE = "D1: diode, a to b, drop 0.6 V"


def told(lines: str) -> list[tuple[str, str, str]]:
    """Kind, place and message of every finding in a block that has the nodes a, b and gnd."""
    sheet, result = reading(f"Rs: 50 Ω, a to gnd\nRt: 10 Ω, b to gnd\n{lines}")
    assert result.circuit.problems == tuple(f for f in result.findings if f.severity == "error")
    return [(f.kind, placed(sheet, f.span)[2], f.message) for f in result.findings]


def circuit(lines: str) -> Circuit:
    """The circuit of a block that is read without any finding."""
    _, result = reading(f"Rs: 50 Ω, a to gnd\nRt: 10 Ω, b to gnd\n{lines}")
    assert [f.message for f in result.findings] == []
    return result.circuit


# --- parts with a model ---------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("line", "kind", "terminals", "device"),
    [
        (OP_AMP, "op-amp", [("plus", "a"), ("minus", "b"), ("out", "o")],
         Device(swing_low=Fraction("-0.2"), swing_high=Fraction("4.8"))),
        ("U1: op-amp, plus a, minus b, out o, swing 2.5 V ± 2 V", "op-amp", [("plus", "a"), ("minus", "b"), ("out", "o")],
         Device(swing_low=Fraction("0.5"), swing_high=Fraction("4.5"))),
        ("U1: op-amp, plus a, minus b, out o, max 20 mA", "op-amp", [("plus", "a"), ("minus", "b"), ("out", "o")], Device()),
        ("T1: transformer 10:1, a to b, c to d", "transformer",
         [("first+", "a"), ("first-", "b"), ("second+", "c"), ("second-", "d")], Device(ratio=Fraction(10))),
        ("T1: transformer 230 : 11.5, a to b, c to d", "transformer",
         [("first+", "a"), ("first-", "b"), ("second+", "c"), ("second-", "d")], Device(ratio=Fraction(20))),
        (NPN, "transistor", [("base", "a"), ("collector", "b"), ("emitter", "gnd")],
         Device("active", "npn", Fraction(150), Fraction("0.65"))),
        (PNP, "transistor", [("emitter", "a"), ("base", "b"), ("collector", "o")],
         Device("saturated", "pnp", Fraction(80), Fraction("0.7"), Fraction("0.2"))),
    ],
)  # fmt: skip
def test_parts_of_several_terminals(line: str, kind: str, terminals: list[tuple[str, str]], device: Device) -> None:
    element = circuit(line).elements[-1]
    assert (element.kind, element.plus, element.minus, element.value) == (kind, "", "", None)
    assert list(element.terminals) == terminals
    assert element.device == device


def test_diodes() -> None:
    conducting, blocking = circuit(f"{DIODE}, max 1 A\nD2: diode, b to a, blocking, drop 0 V").elements[-2:]
    assert (conducting.plus, conducting.minus, conducting.device) == (
        "a",
        "b",
        Device("conducting", drop=Fraction("0.6")),
    )
    assert [r.text for r in conducting.ratings] == ["max 1 A"]
    assert (blocking.plus, blocking.device) == ("b", Device("blocking", drop=Fraction(0)))


def test_which_parts_are_independent_sources() -> None:
    found = circuit("\n".join([NPN, PNP, OP_AMP, DIODE, "D2: diode, b to a, drop 0.6 V, blocking", "V1: 5 V, a to b"]))
    assert [e.name for e in found.sources()] == ["Q1", "Q2", "D1", "V1"]


def test_tolerances_of_a_model() -> None:
    line = "Q1: npn, base a, collector b, emitter gnd, V_BE 0.65 V ±50 mV, beta 150 +100/−50 %"
    device = circuit(line).elements[-1].device
    assert device is not None
    found = {word: (t.plus, t.minus, t.relative) for word, t in device.tolerances}
    assert found == {"V_BE": (Fraction("0.05"), Fraction("0.05"), False), "beta": (1, Fraction("0.5"), True)}


def test_currents_into_terminals_steer_sources() -> None:
    lines = [
        NPN, PNP, "T1: transformer 2:1, a to b, x to y", OP_AMP, "F1: 2 * I_{Q1,collector}, a to b", "F2: 2 * I_{Q1,a}, a to b",
        "F3: 2 * I_{Q2,base}, a to b", "H1: 5 Ω * I_{U1,out}, a to b", "F4: 2 * I_{T1,first+}, a to b", "F5: 2 * I_{T1,x}, a to b",
    ]  # fmt: skip
    controls = [e.control for e in circuit("\n".join(lines)).elements if e.control]
    parts = ["Q1,collector", "Q1,base", "Q2,base", "U1,out", "T1,first+", "T1,second+"]
    assert controls == [Control(part=p) for p in parts]


@pytest.mark.parametrize(
    ("line", "place", "says"),
    [
        (NPN.replace("0.65", "−0.65"), "V_BE −0.65 V", "positive value, for a pnp too: from emitter to base"),
        (PNP.replace("0.2", "-0.2"), "V_CE -0.2 V", "positive value, for a pnp too: from emitter to collector"),
        (NPN.replace("150", "0"), "beta 0", "beta is stated as a positive value"),
        (DIODE.replace("0.6", "−0.6"), "drop −0.6 V", "drop is stated as a positive value"),
        (NPN.replace("150", "150 ±50"), "±50", "a tolerance without a unit"),
        (NPN.replace("150", "150 V"), "beta 150 V", "expected a plain number behind beta"),
        ("U1: op-amp, plus a, minus b, out o, swing 5 V to 1 V", "swing 5 V to 1 V", "from its lowest to its highest voltage"),
        ("T1: transformer 10:0, a to b, c to d", "transformer 10:0", "expected transformer 10:1"),
        (f"{NPN}\nF1: 2 * I_Q1, a to b", "I_Q1", "write the current into one, as in I_{Q1,base}"),
        (f"{NPN}\nF1: 2 * I_{{Q1,emitter}}, a to b", "I_{Q1,emitter}", "the current into base or collector of Q1, not emitter"),
        (f"{NPN}\nF1: 2 * I_{{Q1,x}}, a to b", "I_{Q1,x}", "this circuit has no terminal of Q1 at x"),
        (f"{NPN.replace('collector b', 'collector a')}\nF1: 2 * I_{{Q1,a}}, a to b", "I_{Q1,a}", "may mean base or collector"),
        (f"{NPN}\nE1: 2 * V_Q1, a to b", "V_Q1", "Q1 has several terminals; write a voltage between two nodes"),
        (f"{DIODE}\nF1: 2 * I_{{D1,a}}, a to b", "I_{D1,a}", "D1 has two terminals; write I_D1"),
    ],
)  # fmt: skip
def test_what_is_said_of_models(line: str, place: str, says: str) -> None:
    ((kind, under, message),) = told(line)
    assert (kind, under) == ("circuit-line", place)
    assert says in message


def test_a_tolerance_of_another_kind() -> None:
    assert [(k, p) for k, p, _ in told(NPN.replace("0.65 V", "0.65 V ±5 Ω"))] == [("dimension", "±5 Ω")]


# --- cases ----------------------------------------------------------------------------------------------------------

PARTS = "\n".join([
    "Rv: 4k7, a to b", "C1: 1 nF, a to b", "E1: 2 * V_a, b to gnd", "V1: 12 V, o to gnd", "V2: 5 V, o to gnd, 50 Hz", "S1: open, a to b",
    "G0: 0 S, a to b", "Rx: R Ω, a to b", "Z1: (3 + j4) Ω, a to b", NPN, PNP, OP_AMP, DIODE, "T1: transformer 2:1, a to b, x to y",
])  # fmt: skip


def case(changes: str) -> Case:
    (found,) = circuit(f"{PARTS}\ncase hot: {changes}").cases
    return found


def test_changes_of_a_case() -> None:
    found = case(
        "Rv = 3.3 kΩ; S1 shorted; V1 = 11.8 V; Rt open; Q1 beta 80; Q1 V_BE 0.6 V; Q2 V_CE 0.3 V; D1 drop 700 mV"
    )
    assert [(c.part, c.what) for c in found.changes] == [
        ("Rv", "as"), ("S1", "shorted"), ("V1", "as"), ("Rt", "open"), ("Q1", "beta"), ("Q1", "V_BE"), ("Q2", "V_CE"), ("D1", "drop"),
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("change", "value", "dimension"),
    [
        ("Rv = 3.3 kΩ", 3300, OHM), ("Rv = 3k3", 3300, OHM), ("Rv = 2 mS", Fraction(1, 500), SIEMENS), ("S1 = 5 Ω", 5, OHM),
        ("G0 = 5 Ω", 5, OHM), ("V1 = −3 V", -3, VOLT), ("V2 = 5 V ∠ 90°", 5j, VOLT), ("Z1 = (1 + j) Ω", 1 + 1j, OHM),
        ("Rv = (2 + 1/3) Ω", Fraction(7, 3), OHM), ("Rx = 2*R Ω", 14, OHM), ("Rv = R Ω", 7, OHM), ("Q1 beta 80", 80, NONE),
        ("D1 drop 700 mV", Fraction(7, 10), VOLT),
    ],
)  # fmt: skip
def test_values_of_a_case(change: str, value: complex, dimension: Dimension) -> None:
    (found,) = case(change).changes
    assert found.value is not None

    def lookup(r: Reference) -> Amount:
        assert r.word == "R"
        return Amount(Fraction(7), OHM)

    amount = evaluate(found.value, lookup)
    assert (amount.dimension, amount.value) == (dimension, pytest.approx(value))


def test_values_of_a_case_from_givens() -> None:
    _, result = reading("R1: 1 Ω, a to gnd\ncase hot: R1 = 2 Ω * (1 + k)", {"k": Amount(Fraction(1, 3))})
    assert result.findings == ()
    (change,) = result.circuit.cases[0].changes
    assert change.value is not None
    assert evaluate(change.value, lambda r: pytest.fail(r.word)) == Amount(Fraction(8, 3), OHM)


def test_names_of_cases() -> None:
    lines = "case low gain: Q1 beta 80\ncase hot and windy: Rt open\ncase cold 2: Rt shorted"
    assert [c.name for c in circuit(f"{NPN}\n{lines}").cases] == ["low gain", "hot and windy", "cold 2"]
    assert told("case hot: Rt open\ncase hot: Rs open") == [
        ("circuit-name", "case hot: Rs open", "two cases are called hot")
    ]
    for name in ("of", "lamp in", "lamp at night", "j"):
        ((_, place, message),) = told(f"case {name}: Rt open")
        assert place == name and "a word of the language" in message


@pytest.mark.parametrize(
    ("changes", "place", "says"),
    [
        ("Rv = 4 V", "4 V", "Rv is a resistor; a voltage cannot take its place"),
        ("V1 = 4 mA", "4 mA", "V1 is a voltage source; a current cannot take its place"),
        ("V1 = 5 V ∠ 30°", "5 V ∠ 30°", "V1 is a source at DC; a phasor cannot take its place"),
        ("Rv = 2 * V_a", "2 * V_a", "Rv is a resistor; a controlled source cannot take its place"),
        ("Rv = Ry Ω", "Ry Ω", "Ry has no value and is no free symbol of this circuit's parts"),
        ("Rv = 3 Ω; Rv open", "Rv open", "Rv changes twice in this case"),
        ("Q1 beta 80; Q1 beta 90", "Q1 beta 90", "Q1 changes twice in this case"),
        ("E1 = 3 V", "3 V", "E1 is a controlled source; a value cannot take its place"),
        ("D1 = 3 V", "3 V", "D1 is a diode; a value cannot take its place"),
        ("Q1 = 3 Ω", "Q1 = 3 Ω", "Q1 has several terminals; a case changes its V_BE, beta or V_CE"),
        ("U1 open", "U1 open", "U1 has several terminals; a case changes nothing of op-amp"),
        ("Q1 V_CE 0.2 V", "V_CE", "Q1 is not saturated and has no V_CE"),
        ("U1 swing 0 V to 1 V", "swing", "no swing of U1 can change"),
        ("Rv beta 3", "beta", "no beta of Rv can change; a case changes its value"),
        ("D1 drop 0.6 A", "D1 drop 0.6 A", "expected a voltage behind drop"),
        ("Q1 beta −80", "Q1 beta −80", "beta is stated as a positive value"),
        ("Q1 beta 80 ±5 %", "±5 %", "a value in a case has no tolerance of its own"),
        ("Rvv open", "Rvv", "this circuit has no part Rvv; is Rv meant?"),
        ("Rv warm", "Rv warm", "expected a change such as"),
    ],
)
def test_what_is_said_of_cases(changes: str, place: str, says: str) -> None:
    ((kind, under, message),) = told(f"{PARTS}\ncase hot: {changes}")
    assert (kind, under) == ("circuit-line", place)
    assert says in message


def test_dimensions_in_a_case() -> None:
    assert [(k, p) for k, p, _ in told("case hot: Rt = 5 Ω + 3 V")] == [("dimension", "5 Ω + 3 V")]


def test_a_case_of_a_part_that_could_not_be_read_is_not_told_twice() -> None:
    assert [p for _, p, _ in told("R1: banana, a to b\ncase hot: R1 = 3 Ω")] == ["banana"]
    assert [p for _, p, _ in told("R1: 5 Ω, a to b, split\ncase hot: R1 = 3 Ω; Ru open")] == ["split"]
