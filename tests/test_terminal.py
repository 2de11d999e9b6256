"""The report for a terminal: lines that editors read as links, nothing in them that a terminal would obey, honest totals."""

from __future__ import annotations

import re
import unicodedata
from dataclasses import replace

from annotate_fixture import amount, finding, report_of, said
from hypothesis import given
from hypothesis import strategies as st

from calccheck import check_text
from calccheck.annotate.to_terminal import to_terminal
from calccheck.annotate.visible import one_line, visible
from calccheck.annotate.working_table import working_table
from calccheck.model import Slip, WorkedQuantity
from calccheck.units import AMPERE, VOLT

# GNU Coding Standards, section 4.4 "Formatting Error Messages": sourcefile:lineno:column: message
GNU = re.compile(r"(?P<file>[^:\n]+):(?P<line>\d+):(?P<column>\d+): (?P<word>\w+): (?P<message>\S.*)")
TEXT = "Load `I_R = 2.96 A`,\nbus `V_b = 12 V` and `V_c = 3 V`, `given x = 1 V`,\n`V_d = 4 V`, `V_e = 5 V`\n"


def report():
    return report_of(
        TEXT,
        said(TEXT, "I_R = 2.96 A", "differs", place="code", basis="circuit", claimed=amount(2.96, AMPERE),
             computed=amount(2.66463, AMPERE), deviation=0.1109, message="I_R comes to 2.6646 A, printed 2.96 A",
             slips=(Slip("sign", "the second source was added instead of taken off"),)),
        said(TEXT, "V_b = 12 V", "agrees", place="code", basis="circuit", cautions=("coarse: 12 V says ±0.5 V",)),
        said(TEXT, "V_c = 3 V", "unchecked", place="code", message="there is no node c"),
        said(TEXT, "given x = 1 V", "given", place="code", message="assumed"),
        said(TEXT, "V_d = 4 V", "accepted", place="code", basis="circuit", message="comes to 5 V; accepted by QD: log 4"),
        said(TEXT, "V_e = 5 V", "rounded", place="code", basis="working", message="cut off, not rounded: 5.09 V"),
        findings=(finding(TEXT, "bus", "letter", "bus is an odd name", "Rbus"),),
    )  # fmt: skip


def test_each_finding_begins_with_a_line_that_editors_read_as_a_link():
    lines = to_terminal([report()]).split("\n\n")[0].split("\n")
    heads = [m for m in map(GNU.fullmatch, lines) if m]
    places = [(m["file"], m["line"], m["column"], m["word"]) for m in heads]
    assert [p[1:] for p in places] == [
        ("1", "7", "differs"), ("2", "1", "caution"), ("2", "6", "caution"), ("2", "23", "unchecked"), ("3", "2", "accepted"),
    ]  # fmt: skip
    assert {p[0] for p in places} == {"sheets/TS-101.md"}
    assert TEXT.split("\n")[1][23 - 1 :].startswith("V_c") and TEXT[7 - 1 :].startswith("I_R")
    assert all(line.startswith("    ") for line in lines if not GNU.fullmatch(line) and ": given: " not in line)


def test_behind_it_stand_claim_recomputed_value_deviation_and_slip():
    first = to_terminal([report()]).split("\n")[:5]
    assert first[0] == "sheets/TS-101.md:1:7: differs: I_R comes to 2.6646 A, printed 2.96 A"
    assert [line.split(None, 1) for line in first[1:]] == [
        ["claim", "I_R = 2.96 A"],
        ["recomputed", "2.66463 A, from the circuit"],
        ["deviation", "+11.1 %"],
        ["likely", "the second source was added instead of taken off"],
    ]
    assert all(line.startswith("    ") for line in first[1:])


def test_a_finding_says_what_to_write_instead():
    lines = to_terminal([report()]).split("\n")
    at = lines.index("sheets/TS-101.md:2:1: caution: bus is an odd name")
    assert lines[at + 1].split() == ["write", "Rbus"]


def test_what_stands_is_named_only_when_asked_and_assumptions_always():
    short, long = to_terminal([report()]), to_terminal([report()], verbose=True)
    assert "cut off" not in short and ":3:15: rounded: V_e = 5 V; cut off" in long
    assert ": given: given x = 1 V\n" in long
    assert ":2:6: agrees: V_b = 12 V" in long and ": agrees:" not in short
    assert "sheets/TS-101.md: given: x = 1 V\n" in short
    assert "accepted: comes to 5 V; accepted by QD: log 4" in short


def test_totals_hold_every_claim_once_by_verdict_and_once_by_what_it_was_held_against():
    text = to_terminal([report(), report()])
    verdicts, against = text.split("\n\n")[1].split("\n")[:2]
    assert verdicts == (
        "2 calc sheets, 12 claims: 2 ✓ agrees, 2 ≈ rounded, 2 ✗ differs, 2 ? unchecked, 2 ◇ accepted, 2 ○ given."
    )
    assert sum(int(n) for n in re.findall(r"\b(\d+) ", against)) == 12
    assert against.startswith("4 held against a circuit, 2 against the sheet's own working alone, ")
    assert "It is not an approval." in text.split("\n\n")[1]


def test_what_was_not_read_is_counted_and_named_on_request():
    other = report()
    plain = replace(
        other, reading=replace(other.reading, is_calc=False, sheet=replace(other.reading.sheet, name="a.md"))
    )
    unread = replace(other, reading=replace(other.reading, not_read=2))
    text = to_terminal([plain, unread])
    assert "1 file passed over as not a calc sheet.\n" in text and "a.md" not in text
    assert "2 other fences or pieces of HTML not read.\n" in text
    assert to_terminal([plain], verbose=True).startswith("a.md: not a calc sheet\n")
    assert to_terminal([plain]).startswith("0 calc sheets, 0 claims")


def test_a_claim_that_fails_further_down_is_shown_where_it_fails():
    text = "```circuit\nreference g\nV1: 10 V, a to g\nR1: 1 kΩ, a to b\nR2: 3 kΩ, b to g\n```\n"
    text += "```working\nV_b = V1 × R2 / (R1 + R2)\n    = 10 V × 1/4\n    = 2.5 V\n```\n"
    heads = [m for m in map(GNU.fullmatch, to_terminal([check_text("a.md", text)]).split("\n")) if m]
    assert [(m["line"], m["word"]) for m in heads] == [("9", "differs"), ("10", "differs")]


def test_colour_only_on_request_and_never_without_its_word():
    plain, coloured = to_terminal([report()]), to_terminal([report()], colour=True)
    assert "\x1b" not in plain
    assert re.sub(r"\x1b\[[\d;]*m", "", coloured) == plain
    assert "\x1b[1;31mdiffers\x1b[0m" in coloured


@given(st.text(st.characters() | st.characters(categories=["Cc", "Cf", "Cs", "Zl", "Zp", "Zs"])))
def test_nothing_a_terminal_would_obey_or_hide_gets_through(text):
    """By the categories and bidirectional classes of the Unicode Character Database, as the standard library has it."""
    for shown in (visible(text), one_line(text)):
        assert not {unicodedata.category(c) for c in shown} & {"Cc", "Cf", "Cs", "Zl", "Zp"}
        assert not {unicodedata.bidirectional(c) for c in shown} & {
            "LRE",
            "RLE",
            "LRO",
            "RLO",
            "PDF",
            "LRI",
            "RLI",
            "FSI",
            "PDI",
        }
    assert visible("10 mV at 20\u202f°C, I ≤ 3 A") == "10 mV at 20\u202f°C, I ≤ 3 A"


def test_what_is_not_seen_stands_as_its_code_point():
    assert visible("a\x1b[31m\u202eb\u2066\r\n") == "a[U+001B][31m[U+202E]b[U+2066][U+000D][U+000A]"
    text = "`x = 3 A`\n"
    nasty = report_of(text, said(text, "x = 3 A", "differs", message="\x1b]0;x\x07 \u202e"), name="a\x1b.md")
    shown = to_terminal([nasty], verbose=True)
    assert shown.startswith("a[U+001B].md:1:2: differs: [U+001B]]0;x[U+0007] [U+202E]\n")


def test_the_working_of_one_quantity():
    """Two sources on a divider, worked by hand: 9.19481 V − 3.32893 V = 5.86588 V, shares 157 % and −56.8 %."""
    rows = (("Vb", amount(9.19481, VOLT)), ("Vp", amount(-3.32893, VOLT)))
    worked = WorkedQuantity("V_bus", rows, amount(5.86588, VOLT), amount(5.86588, VOLT), 1.5e-16)
    assert [line.split() for line in working_table(worked).split("\n") if "-----" not in line and line] == [
        ["V_bus", "value", "share"],
        ["due", "to", "Vb", "9.19481", "V", "157", "%"],
        ["due", "to", "Vp", "−3.32893", "V", "−56.8", "%"],
        ["sum", "5.86588", "V"],
        ["nodal", "solution", "5.86588", "V"],
        ["gap", "1.5e-16"],
    ]
    alone = replace(worked, rows=rows[:1], total=amount(0.0, VOLT), nodal=None)
    assert "nodal" not in working_table(alone) and working_table(alone).split("\n")[2].endswith("-")
