"""Claims in plain prose: whatever states a value of a quantity or of a name of the circuit is found, and nothing else."""

from __future__ import annotations

import pytest

from calccheck.read.markdown import read_page
from calccheck.read.prose import prose_claims

NAMES = {"R1", "RL", "+5V", "_x", "out_", "n1'", "bus"}


def stated(text: str) -> list[str]:
    (paragraph,) = read_page(text)
    return [c.text for c in prose_claims(paragraph, NAMES, 0)]


@pytest.mark.parametrize(
    ("text", "found"),
    [
        ("where R1 = 3 kΩ and RL ≈ 5 Ω", ["R1 = 3 kΩ", "RL ≈ 5 Ω"]),
        ("V_bus is small, but I_{R1} < 3 mA", ["I_{R1} < 3 mA"]),
        ("with −R1 = 3 Ω and -V_b ≥ 2 V", ["R1 = 3 Ω", "V_b ≥ 2 V"]),
        ("the rail +5V = 5.1 V", ["+5V = 5.1 V"]),
        ("**R1** = 3 kΩ, *RL* = 1 Ω, __bus__ = 2 V, _R1_ = 4 Ω", ["R1 = 3 kΩ", "RL = 1 Ω", "bus = 2 V", "R1 = 4 Ω"]),
        ("node _x = 3 V, node out_ = 4 V, n1' = 5 V", ["x = 3 V", "out = 4 V", "n1' = 5 V"]),
        ("x = 3 R1 = 5 Ω", ["R1 = 5 Ω"]),
        ("R1 is about = about 3 kΩ, RL ~ ca. 5 Ω", ["RL ≈ 5 Ω"]),
        ("`R1` = 3 kΩ, but not `R1 = 3 kΩ`", ["R1 = 3 kΩ"]),
    ],
)
def test_a_value_of_a_quantity_or_a_known_name_is_found(text, found):
    assert stated(text) == found


@pytest.mark.parametrize(
    "text",
    [
        "R1a = 3 V",
        "xR1 = 3 V",
        "R1² = 9",
        "x.R1 = 3",
        "R2 = 3 Ω",
        "R1 is 3 kΩ",
        "n = 3",
        "R1 = x",
        "a R1 b = 3",
        "R1 5 = 3",
    ],
)
def test_what_states_nothing_of_the_circuit_is_passed_over(text):
    assert stated(text) == []
