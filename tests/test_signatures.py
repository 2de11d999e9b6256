"""What a signature covers: nothing that prose or layout touch, everything else, and it says which part has changed."""

from __future__ import annotations

import subprocess
import sys
from dataclasses import replace
from datetime import date

import pytest
import yaml
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from signed_sheets import SHEET, SIGNED_ON, read, sign_text

from calccheck import check_text
from calccheck.model import Finding
from calccheck.signatures import FORM, PARTS, digest_of, signature_findings

SIGNED = sign_text(sign_text(SHEET), "checker", "AB")


def void(text: str) -> list[str]:
    """What the findings say of void signatures: the parts, in one string a signature."""
    return [f.message.partition("changed since: ")[2].partition(";")[0] for f in findings(text)]


def findings(text: str) -> list[Finding]:
    return [f for f in check_text("sheet.md", text).findings if f.kind == "signature"]


# --- what is read ---------------------------------------------------------------------------------------------------


def test_a_signature_says_who_when_in_which_role_and_for_what():
    originator, checker = read(SIGNED).signatures
    assert (originator.role, originator.name, originator.on) == ("originator", "QD", SIGNED_ON)
    assert (checker.role, checker.name, checker.form) == ("checker", "AB", FORM)
    assert originator.digest == checker.digest and tuple(checker.parts) == PARTS
    assert SIGNED[checker.span.start : checker.span.end].startswith("AB 2026-11-20 form:1 sha256:")
    assert "signatures" not in read(SIGNED).title


def test_signatures_are_yaml_that_others_can_read():
    front = yaml.load(SIGNED.split("---")[1], Loader=yaml.BaseLoader)["signatures"]
    assert list(front) == ["originator", "checker", "approver"] and front["approver"] == ""
    assert front["checker"].split()[:2] == ["AB", "2026-11-20"]


@pytest.mark.parametrize(
    ("block", "line", "says"),
    [
        ("signatures: [QD, AB]", 1, "one a line"),
        ("signatures:\n- QD 2026-11-20", 9, "no signature"),
        ("signatures:\n  originator: QD 2026-11-20", 9, "no signature"),
        ("signatures:\n  drawn:\n    QD 2026-11-20", 9, "originator, checker, approver"),
        ("signatures:\n  checker:\n    QD 2026-11-20 form:1 sha256:12", 10, "no signature"),
        ("signatures:\n  checker:\n    QD 2026-02-30 form:1 sha256:" + "0" * 64, 10, "no signature"),
        (
            "signatures:\n  checker:\n    AB 2026-11-20 form:1 sha256:" + "0" * 64 + "\n    more words",
            11,
            "no signature",
        ),
    ],
)
def test_what_is_no_signature_is_told_with_its_line(block, line, says):
    text = SHEET.replace("date: 2026-11-18\n", f"date: 2026-11-18\n{block}\n")
    report = check_text("sheet.md", text)
    told = [f for f in report.findings if f.kind == "signature" and says in f.message]
    assert [report.reading.sheet.line_column(f.span.start)[0] for f in told][:1] == [line]
    assert not report.clean


def test_a_merge_left_open_is_called_one():
    text = SHEET.replace("date: 2026-11-18\n", "date: 2026-11-18\n<<<<<<< HEAD\nsignatures:\n=======\n>>>>>>> other\n")
    found = next(f for f in check_text("sheet.md", text).findings if f.kind == "front-matter")
    assert "merge of two branches was left open" in found.message
    assert text[found.span.start : found.span.end] == "<<<<<<< HEAD"


def test_a_signed_sheet_of_plain_fields_is_read_without_yaml():
    plain = SIGNED.replace("check:\n  carry: 0.4 %\n", "")
    program = (
        "import sys; from calccheck.read.sheet import read_sheet; from calccheck.source import Sheet;"
        "from calccheck.model import Settings; r = read_sheet(Sheet('s', sys.stdin.read()), Settings());"
        "print(len(r.signatures), r.title['by'], 'yaml' in sys.modules)"
    )
    said = subprocess.run([sys.executable, "-c", program], input=plain, capture_output=True, text=True, check=True)
    assert said.stdout.split() == ["2", "QD", "False"]


# --- whether it holds -----------------------------------------------------------------------------------------------


def test_signatures_hold_for_what_was_signed():
    report = check_text("sheet.md", SIGNED, None)
    assert findings(SIGNED) == [] and report.clean and report.counts["accepted"] == 1


CHANGES = [
    ("V1: 10 V", "V1: 11 V", "circuit"),
    ("R2: 3 kΩ", "R2: 3.3 kΩ", "circuit"),
    ("R1: 1 kΩ ±5 %", "R1: 1 kΩ ±1 %", "circuit"),
    ("max 0.5 W", "max 0.25 W", "circuit"),
    ("b to g, max", "g to b, max", "circuit"),
    ("reference g", "reference a", "circuit"),
    ("V1: 10 V, a to g ", "V1: 10 V, a to g, max 50 mA ", "circuit"),
    ("R1: 1 kΩ", "R9: 1 kΩ", "circuit"),
    ("V_b = 7.5 V`", "V_b = 7.50 V`", "claims"),
    ("I_R2 = 2.50 mA", "I_R2 = 2.51 mA", "claims"),
    ("I_R2 = 2.50 mA", "I_R1 = 2.50 mA", "claims"),
    ("I_R2 = 2.50 mA", "I_R2 ≈ 2.50 mA", "claims"),
    ("I_R2 = 2.50 mA", "I_R2 = 2.50 A", "claims"),
    ("P_R2 = 19 mW", "P_R2 = 19 mVA", "claims"),
    ("| 10.0 V  ", "| 10.1 V  ", "claims"),
    ("with R2 open", "with R1 open", "claims"),
    ("V_a due to V1 = 10.0 V\n", "", "claims"),
    ("given k = 2 ", "given k = 3 ", "givens"),
    ("given k = 2 ", "given k = 2 ±1 % ", "givens"),
    ("given k = 2 ", "given k = 2 from EX-2 ", "givens"),
    ("given k = 2 ", "given k = 2\ngiven z = 1 V", "givens"),
    ('"measured, log 4"', '"measured, log 5"', "waivers"),
    ("until 2027-03-01", "until 2027-04-01", "waivers"),
    ("by QD until", "by AB until", "waivers"),
    ("accept 7.9 V for 7.5 V", "accept 7.9 V for 7.50 V", "waivers"),
    ("carry: 0.4 %", "carry: 0.5 %", "settings"),
    ("carry: 0.4 %", "carry: 0.4 %\n  derate: 0.5", "settings"),
    ("carry: 0.4 %", "carry: 0.4 %\n  phasors: peak", "settings"),
    ("V_b = 7.9 V` <!-- calccheck: accept 7.9", "V_b = 7.8 V` <!-- calccheck: accept 7.8", "claims, waivers"),
]


@pytest.mark.parametrize(("old", "new", "parts"), CHANGES)
def test_a_change_that_matters_voids_and_names_its_part(old, new, parts):
    changed = SIGNED.replace(old, new)
    assert changed != SIGNED
    assert void(changed) == [parts, parts]
    assert not check_text("sheet.md", changed).clean


LAYOUT = [
    ("Some words before", "Other words, reworded, before"),
    ("# Divider", "# The divider, renamed"),
    ("revision: A", "revision: B"),
    ("# supply", "# the 10 V supply of the bench"),
    ("V1: 10 V, a to g          # supply\nR1: 1 kΩ ±5 %, a to b\n", "R1: 1kΩ ±5 %,   a to b\nV1: 10.0 V, a to g\n"),
    ("R2: 3 kΩ, b to g", "R2: 3000 Ω, b to g"),
    ("R2: 3 kΩ, b to g", "R2: 3k0, b to g"),
    ("R2: 3 kΩ, b to g", "R2: 3 kohm, b to g"),
    ("R2: 3 kΩ, b to g", "R2: 3 k\u2126, b to g"),
    ("`I_R2 = 2.50 mA`", "`I_R2=2.50 mA`"),
    ("`I_R2 = 2.50 mA`", "**`I_R2 = 2.50 mA`**"),
    ("19 mW", "19mW"),
    ("P_R2 = 19 mW = 18750 µW", "P_R2 = 19 mW = 18750 uW"),
    ("given k = 2               # gain\n", "given k = 2\n\n"),
    ("given k = 2               # gain\nVout = k × V_b = 15.0 V", "given k = 2\nVout = k·V_b\n     = 15.0 V"),
    ("Vout = k × V_b", "Vout = (k × V_b)"),
    ("|        | total  | with R2 open |\n|--------|--------|", "| | total | with R2 open |\n|:--|--:|"),
    ("Measured:", "- Measured, in a list:"),
    ('"measured, log 4" by QD', '"measured, log 4"  by  QD'),
    ("carry: 0.4 %", "carry: 0.004"),
    ("carry: 0.4 %", "carry: 0.4 %\n  approx: 5 %"),
]


@pytest.mark.parametrize(("old", "new"), LAYOUT)
def test_prose_and_layout_do_not_void(old, new):
    changed = SIGNED.replace(old, new)
    assert changed != SIGNED
    assert findings(changed) == []


def test_a_given_that_a_part_is_worked_from_voids_both_parts():
    text = sign_text(SHEET.replace("R2: 3 kΩ", "R2: 1.5 kΩ * k"))
    assert check_text("sheet.md", text).clean
    assert void(text.replace("given k = 2 ", "given k = 4 ")) == ["circuit, givens"]


def test_the_repositorys_settings_are_covered_too():
    plain = sign_text(SHEET.replace("check:\n  carry: 0.4 %\n", ""))
    reading = read(plain)
    assert signature_findings(reading) == []
    loose = replace(reading, settings=replace(reading.settings, approx=reading.settings.approx * 2))
    assert "changed since: settings;" in signature_findings(loose)[0].message
    other_day = replace(reading, settings=replace(reading.settings, on=date(2030, 1, 1)))
    assert signature_findings(other_day) == []


def test_an_altered_line_and_another_form_are_called_so():
    digest = read(SIGNED).signatures[0].digest
    assert "its own line was altered" in findings(SIGNED.replace(digest, "0" * 64))[0].message
    assert "form 2" in findings(SIGNED.replace("form:1", "form:2"))[0].message


def test_originator_and_checker_are_two_people():
    assert "originator and checker" in findings(sign_text(sign_text(SHEET), "checker", "qd"))[0].message
    assert "originator and checker" in findings(sign_text(SHEET, "checker", "QD"))[0].message  # by: QD, not yet signed
    assert findings(sign_text(sign_text(SHEET, "originator", "Q. Dahl"), "checker", "QD")) == []


def test_a_void_signature_stands_at_its_own_line():
    changed = SIGNED.replace("R2: 3 kΩ", "R2: 3.3 kΩ")
    report = check_text("sheet.md", changed)
    lines = [report.reading.sheet.line_column(f.span.start)[0] for f in report.findings if f.kind == "signature"]
    assert [changed.split("\n")[k - 1].split()[0] for k in lines] == ["QD", "AB"]


# --- laws -----------------------------------------------------------------------------------------------------------

DIGITS = {
    "circuit": ["V1: 10 V", "R1: 1 kΩ", "R2: 3 kΩ", "±5 %", "max 0.5 W"],
    "claims": ["7.5 V", "2.50 mA", "15.0 V", "10.0 V"],
    "givens": ["given k = 2"],
    "waivers": ["log 4", "2027-03-01", "for 7.5 V"],
    "settings": ["carry: 0.4"],
}
CASES = [(part, words) for part, every in DIGITS.items() for words in every]


@given(st.sampled_from(CASES), st.data())
@settings(max_examples=120, deadline=None)
def test_any_digit_that_changes_voids_and_names_its_part(case, data):
    part, words = case
    start = SIGNED.index(words, SIGNED.index("check:"))
    tail = words.split(":")[-1] if ":" in words else words.split("=")[-1]
    first = start + len(words) - len(tail)
    at = data.draw(st.sampled_from([k for k in range(first, start + len(words)) if SIGNED[k].isdigit()]))
    new = data.draw(st.sampled_from("0123456789"))
    changed = SIGNED[:at] + new + SIGNED[at + 1 :]
    assume(changed != SIGNED)
    reading = read(changed)
    assume(len(reading.signatures) == 2)
    messages = [f.message for f in signature_findings(reading)]
    assert len(messages) == 2 and all(f"changed since: {part};" in m for m in messages), messages


WORDS = st.lists(st.text("abcdefghijklmnopqrstuvwxyzäöü", min_size=1, max_size=9), min_size=1, max_size=12).map(
    " ".join
)
SEAMS = ["# Divider", "```circuit", "The node", "```working", "|        |", "Measured"]


@given(st.lists(st.tuples(st.sampled_from(SEAMS), WORDS), min_size=1, max_size=4))
@settings(max_examples=60, deadline=None)
def test_prose_put_anywhere_between_blocks_voids_nothing(added):
    text = SIGNED
    for seam, words in added:
        text = text.replace(seam, f"Prose {words} here.\n\n{seam}", 1)
    assert signature_findings(read(text)) == [] and len(read(text).signatures) == 2


@given(st.permutations(range(3)), st.sampled_from(["\n", "\r\n", "\r"]))
@settings(max_examples=20, deadline=None)
def test_the_order_of_parts_and_the_line_ends_do_not_matter(order, end):
    lines = SIGNED.split("\n")
    first = lines.index("reference g") + 1
    lines[first : first + 3] = [lines[first + k] for k in order]
    text = end.join(lines)
    assert signature_findings(read(text)) == [] and len(read(text).signatures) == 2


def test_signatures_of_earlier_versions_hold():
    """The digest of form 1 as first made, kept because signed sheets carry it. A change that breaks this raises ``FORM``."""
    kept = {
        "circuit": "8826597a",
        "claims": "3ede7514",
        "givens": "7b9c42b3",
        "waivers": "28769888",
        "settings": "a96c77e6",
    }
    assert (FORM, digest_of(read(SHEET)).parts) == (1, kept)


def test_the_digest_is_the_same_in_every_process():
    program = (
        "import sys; sys.path.insert(0, 'tests'); from signed_sheets import SHEET, read;"
        "from calccheck.signatures import digest_of; print(digest_of(read(SHEET)).whole)"
    )
    found = {
        subprocess.run(
            [sys.executable, "-c", program], capture_output=True, text=True, check=True, env={"PYTHONHASHSEED": seed, "PYTHONPATH": ":".join(sys.path)}
        ).stdout.strip()
        for seed in ("1", "2")
    }  # fmt: skip
    assert found == {digest_of(read(SHEET)).whole}
