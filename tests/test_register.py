"""The calc register: what each row says of its sheet, what fails it, what is only open, in three forms, from real files."""

from __future__ import annotations

import json
import re
from datetime import date
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from markdown_it import MarkdownIt
from signed_sheets import SHEET, sign_text

from calccheck import __version__, check_text
from calccheck.annotate.register import FIELDS, Row, register_rows
from calccheck.annotate.to_register import register_json, register_markdown, register_text
from calccheck.cli import main
from calccheck.model import Report

DAY = date(2026, 12, 1)
SIGNED = sign_text(sign_text(sign_text(SHEET), "checker", "AB"), "approver", "CD")


def report(text: str, path: str = "sheets/a.md") -> Report:
    return check_text(path, text)


def row(text: str) -> Row:
    (only,) = register_rows([report(text)], DAY)
    return only


def kinds(text: str) -> list[tuple[str, int]]:
    return [(r.kind, r.line) for r in row(text).to_mend]


# --- rows -----------------------------------------------------------------------------------------------------------


def test_a_sheet_in_order():
    found = row(SIGNED)
    assert (found.number, found.verdict, found.errors, found.to_mend) == ("EX-1", "agrees", 0, ())
    assert (found.claims, found.counts["given"], found.counts["accepted"]) == (9, 1, 1)
    assert [(s.role, s.name, s.void) for s in found.signatures] == [
        ("originator", "QD", ""), ("checker", "AB", ""), ("approver", "CD", ""),
    ]  # fmt: skip
    assert [(r.kind, r.message) for r in found.open] == [("assumption", "assumed without a source: k = 2")]


def test_signatures_that_are_void_and_missing():
    text = sign_text(sign_text(SHEET), "checker", "AB").replace("R2: 3 kΩ, b to g, max 0.5 W", "R2: 3 kΩ, b to g")
    found = row(text)
    assert [(s.role, s.void) for s in found.signatures] == [
        ("originator", "changed since: circuit"), ("checker", "changed since: circuit"),
    ]  # fmt: skip
    assert [r.kind for r in found.to_mend] == ["signature", "signature"]
    assert found.open[0].message == "not signed by approver"


def test_fields_missing_in_the_title_block():
    for name in FIELDS:
        text = re.sub(rf"^{name}: .*\n", "", SHEET, flags=re.MULTILINE)
        assert [r.message for r in row(text).to_mend] == [f"missing in the title block: {name}"]
    bare = SHEET[SHEET.index("# Divider") :]
    assert row(bare).to_mend[0].message == "missing in the title block: " + ", ".join(FIELDS)


def test_claims_that_fail_stand_with_their_number_and_first_line():
    text = SHEET.replace("V_b = 7.5 V`", "V_b = 7.6 V`").replace("I_R2 = 2.50", "I_Rx = 2.50")
    text = text.replace("Vout = k × V_b = 15.0 V", "Vout = k × V_b = 16.0 V")
    line = next(k for k, words in enumerate(text.split("\n"), 1) if "7.6 V" in words)
    assert kinds(text) == [("claims", line), ("claims", line)]
    assert [r.message for r in row(text).to_mend] == [
        "2 claims differ, the first here",
        "1 claim unchecked, the first here",
    ]


def test_waivers_past_their_date():
    late = date(2027, 3, 2)
    for day, n in ((date(2027, 3, 1), 0), (late, 1)):
        idle = SHEET.replace(
            "V_b = 7.9 V`", "V_b = 7.5 V`"
        )  # it stands without: the check has no error, the register has
        (found,) = register_rows([report(idle)], day)
        assert [r.message for r in found.to_mend] == ["a waiver by QD ran until 2027-03-01"] * n
    lapsed = check_text("a.md", SHEET.replace("2027-03-01", "2026-03-01"))
    (found,) = register_rows([lapsed], late)
    assert [r.kind for r in found.to_mend] == ["claims", "waiver"]  # told once, by the check


def test_values_from_other_sheets_are_no_open_assumptions():
    text = SHEET.replace("given k = 2 ", "given k = 2 from EX-9 ")
    assert [r.kind for r in row(text).open] == ["unsigned"]


def test_numbers_given_twice():
    found = register_rows(
        [report(SHEET, "a.md"), report(SHEET, "b/a.md"), report(SHEET.replace("EX-1", "EX-2"), "c.md")], DAY
    )
    assert [(r.path, [m.message for m in r.to_mend]) for r in found] == [
        ("a.md", ["EX-1 is also the number of b/a.md"]), ("b/a.md", ["EX-1 is also the number of a.md"]), ("c.md", []),
    ]  # fmt: skip


def test_sheets_without_a_number_are_not_namesakes_and_stand_last():
    bare = SHEET.replace("sheet: EX-1\n", "")
    found = register_rows([report(bare, "a.md"), report(bare, "b.md"), report(SHEET, "c.md")], DAY)
    assert [r.path for r in found] == ["c.md", "a.md", "b.md"]
    assert all("number of" not in m.message for r in found for m in r.to_mend)


@given(st.permutations(["9", "10", "A-2", "A-10", "A-10a", "B-1", "b-2"]))
@settings(max_examples=20, deadline=None)
def test_rows_stand_by_number_nine_before_ten(numbers):
    reports = [report(f"---\nsheet: {n}\n---\n", f"{k}.md") for k, n in enumerate(numbers)]
    assert [r.number for r in register_rows(reports, DAY)] == ["9", "10", "A-2", "A-10", "A-10a", "B-1", "b-2"]


def test_other_files_are_no_rows():
    assert register_rows([report("# Minutes\n")], DAY) == []


# --- forms ----------------------------------------------------------------------------------------------------------

MIXED = [
    report(SIGNED, "sheets/a.md"),
    report(SIGNED.replace("EX-1", "EX-2").replace("carry: 0.4 %", "carry: 0.3 %"), "sheets/b.md"),
    report(SHEET.replace("EX-1", "EX-10").replace("subject: Divider", 'subject: "a | b <i> `c`\\nd"'), "sheets/c.md"),
]


def test_as_text():
    lines = register_text(register_rows(MIXED, DAY), DAY).split("\n")
    assert lines[0] == "Calc register of 3 sheets, 2026-12-01"
    assert lines[2].split() == [
        "sheet",
        "rev",
        "date",
        "verdict",
        "claims",
        "failing",
        "given",
        "originator",
        "checker",
        "approver",
        "subject",
    ]
    first = re.split(r" {2,}", lines[3])
    assert first == [
        "EX-1",
        "A",
        "2026-11-18",
        "✓ agrees",
        "9",
        "0",
        "1",
        *(f"{n} 2026-11-20" for n in ("QD", "AB", "CD")),
        "Divider",
    ]
    assert "AB 2026-11-20 VOID" in lines[4] and lines[4].startswith("EX-2")
    assert lines[5].startswith("EX-10") and lines[5].endswith("a | b <i> `c` d")
    mend, open_ = lines.index("To mend:"), lines.index("Open:")
    assert all(
        re.match(r"sheets/b\.md:1[0-9]: the \w+'s signature .* is void: changed since: settings;", t)
        for t in lines[mend + 1 : open_ - 1]
    )
    assert "sheets/c.md:1: not signed by originator, checker, approver" in lines[open_:]


def test_many_assumptions_are_one_line_and_each_stands_in_json():
    text = SHEET.replace("given k = 2 ", "given k = 2\ngiven m = 3 V\ngiven n = 4 V ")
    rows = register_rows([report(text)], DAY)
    assert "3 values assumed without a source: k, m, n\n" in register_text(rows, DAY)
    (sheet,) = json.loads(register_json(rows, DAY, "x"))["sheets"]
    assert [r["message"][-5:] for r in sheet["open"]][1:] == ["k = 2", "= 3 V", "= 4 V"]


def test_as_markdown_every_row_has_every_cell():
    page = register_markdown(register_rows(MIXED, DAY), DAY)
    tokens = MarkdownIt("commonmark", {"html": False}).enable("table").parse(page)
    cells = [tokens[k + 1].content for k, t in enumerate(tokens) if t.type == "td_open"]
    assert len(cells) == 3 * 11
    assert [cells[k] for k in (0, 11, 22)] == ["EX-1", "EX-2", "EX-10"]
    shown = "".join(c.content for c in tokens[[t.content for t in tokens].index(cells[-1])].children or [])
    assert shown == "a | b <i> c d"  # c is code
    line = next(k for k, words in enumerate(SIGNED.split("\n"), 1) if words.startswith("    AB "))
    assert f"- EX-2, line {line}: the checker's signature" in page


def test_as_json():
    found = json.loads(register_json(register_rows(MIXED, DAY), DAY, __version__))
    assert (found["register"], found["program"], found["on"]) == (1, __version__, "2026-12-01")
    a, b, c = found["sheets"]
    assert (a["path"], a["sheet"], a["revision"], a["by"], a["verdict"]) == ("sheets/a.md", "EX-1", "A", "QD", "agrees")
    assert a["claims"] == {
        "total": 9,
        "agrees": 7,
        "rounded": 0,
        "differs": 0,
        "unchecked": 0,
        "accepted": 1,
        "given": 1,
    }
    assert a["signatures"][1] == {"role": "checker", "name": "AB", "on": "2026-11-20", "holds": True, "void": ""}
    assert [(s["holds"], s["void"]) for s in b["signatures"]] == [(False, "changed since: settings")] * 3
    assert [m["kind"] for m in b["to_mend"]] == ["signature"] * 3 and c["signatures"] == []


def test_the_json_form_is_the_one_that_the_docs_describe():
    page = (Path(__file__).parents[1] / "docs" / "reviewing.md").read_text()
    described = json.loads(page.partition("```json\n")[2].partition("```")[0])
    found = json.loads(register_json(register_rows(MIXED[1:2], DAY), DAY, __version__))

    def form(value: object) -> object:
        """The members, their order and the kinds of their values; of a list its first."""
        if isinstance(value, dict):
            return [(key, form(v)) for key, v in value.items()]
        return [form(value[0])] if isinstance(value, list) else type(value).__name__

    assert form(found) == form(described)


# --- the command ----------------------------------------------------------------------------------------------------


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    return tmp_path


def write(path: str, text: str) -> None:
    Path(path).parent.mkdir(parents=True, exist_ok=True)
    Path(path).write_text(text)


def run(capsys, *arguments: str) -> tuple[int, str, str]:
    status = main(("register", *arguments, "--on", "2026-12-01"))
    shown = capsys.readouterr()
    return status, shown.out, shown.err


@pytest.mark.parametrize(
    ("text", "status"),
    [
        (SIGNED, 0),
        (SHEET, 0),  # unsigned is open, not wrong
        (SIGNED.replace("R2: 3 kΩ", "R2: 3.3 kΩ"), 1),
        (SIGNED.replace("max 0.5 W", "max 0.25 W"), 1),  # every claim stands, the signatures do not
        (SHEET.replace("revision: A\n", ""), 1),
        (SHEET.replace("7.5 V`", "7.6 V`"), 1),
        ("# Minutes\n", 0),
    ],
)
def test_the_status(folder, capsys, text, status):
    write("sheets/a.md", text)
    assert run(capsys)[0] == status


def test_a_folder_with_a_number_given_twice_and_a_bad_file(folder, capsys):
    write("sheets/a.md", SIGNED)
    write("sheets/b.md", SIGNED)
    status, out, err = run(capsys, "sheets")
    assert (status, err) == (1, "") and "sheets/a.md:1: EX-1 is also the number of sheets/b.md" in out
    Path("sheets/c.md").write_bytes(b"\xff")
    status, out, err = run(capsys, "sheets")
    assert status == 2 and "c.md: not UTF-8" in err and "EX-1" in out


def test_the_forms_of_the_command(folder, capsys):
    write("a.md", SIGNED)
    rows = register_rows([report(SIGNED, "a.md")], DAY)
    assert run(capsys, "a.md")[1] == register_text(rows, DAY)
    assert run(capsys, "a.md", "--format", "markdown")[1] == register_markdown(rows, DAY)
    assert run(capsys, "a.md", "--format", "json")[1] == register_json(rows, DAY, __version__)
    assert run(capsys, "a.md", "--jobs", "2") == run(capsys, "a.md")


def test_waivers_are_judged_by_the_day_of_the_register(folder, capsys):
    write("a.md", SIGNED)
    assert main(["register", "--on", "2027-03-02"]) == 1
    assert "the waiver has lapsed: it ran until 2027-03-01" in capsys.readouterr().out
