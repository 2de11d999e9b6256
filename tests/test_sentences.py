"""Phrases of the judging as sentences, and dollar maths in plain characters: the expected texts are written by hand."""

from __future__ import annotations

import pytest

from calccheck import check_text
from calccheck.annotate.maths_words import plain
from calccheck.annotate.sentences import code_pieces, names_in, sentence

NAMES = frozenset({"a", "tin", "bus", "V_b"})


@pytest.mark.parametrize(
    ("phrase", "told"),
    [
        ("consistent with a digit wrong: 3 V", "Consistent with a digit wrong: 3 V."),
        (
            "a claim in plain prose: put it in code",
            "A claim in plain prose: put it in code.",
        ),  # the article, not the node
        ("a: neither a node nor a part", "a: neither a node nor a part."),
        ("tin is 46.35 °C", "tin is 46.35 °C."),
        ("tin, too", "tin, too."),
        ("bus names a part and a node", "bus names a part and a node."),
        ("there is no case cold", "There is no case cold."),
        ("V_b comes to 3 V", "V_b comes to 3 V."),
        ("dTsum is 0.1 K", "dTsum is 0.1 K."),
        ("−I_Va comes to 3 A", "−I_Va comes to 3 A."),
        ("did you mean V_b?", "Did you mean V_b?"),
        ("Write: `V_b = 3 V`", "Write: `V_b = 3 V`"),
        ("It stands.", "It stands."),
        ("assumed", "Assumed."),
        ("", ""),
    ],
)
def test_a_phrase_becomes_a_sentence_and_a_name_keeps_its_letters(phrase, told):
    assert sentence(phrase, NAMES) == told


def test_names_are_those_of_claims_parts_and_nodes():
    text = "# S\n\n```circuit\nreference com\nVa: 5 V, in to com\nR1: 1 kΩ, in to com\n```\n\n`I_R1 = 5 mA`\n"
    assert {"com", "in", "Va", "R1", "I_R1"} <= names_in(check_text("s.md", text))


def test_code_stands_apart_and_values_keep_their_units():
    assert list(code_pieces("write `V_b = 3 V`, 4 mA of 5")) == [
        (False, "write "), (True, "V_b = 3\xa0V"), (False, ", 4\xa0mA of 5"),
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("maths", "words"),
    [
        (r"0.30\,\mathrm{mA}", "0.30 mA"),
        (r"5.4\,\%", "5.4 %"),
        (r"10\,\mathrm{k\Omega}", "10 kΩ"),
        (r"V_\mathrm{out} \text{ due to S1}", "V_out due to S1"),
        (r"2\,\mathrm{V} \angle 30^\circ", "2 V ∠ 30°"),
        (r"\frac{\frac{a}{b}}{c}", "((a) / (b)) / (c)"),
        (r"\min \left( a - b \right)", "min ( a - b )"),
        ("no markup:  two blanks", "no markup:  two blanks"),
    ],
)
def test_maths_in_plain_characters(maths, words):
    assert plain(maths) == words
