"""Values from other sheets: looked up by number, held against what stands there. Numbers by hand: 10 V × 3/4 = 7.5 V."""

from __future__ import annotations

import os
import subprocess
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import calccheck.command.citing
from calccheck import check_text
from calccheck.cli import main
from calccheck.model import Finding, Report

CIRCUIT = "```circuit\nreference g\nV1: 10 V, a to g\nR1: 1 kΩ, a to b\nR2: 3 kΩ, b to g\n```\n\n"
GOOD_CIRCUIT = "---\nsheet: EX-1\n---\n" + CIRCUIT
SOURCE = (
    GOOD_CIRCUIT + "The node is at `V_b = 7.50 V`, so `I_R2 = 2.5 mA` and `P_R2 = 18.75 mW`.\n\n"
    "Without load `V_b with R2 open = 10 V`. Measured `V_a = 10.3 V`; `V_x = 4 V`, `ratio = V_b / V_a = 0.75`.\n\n"
    "`given Vlim = 12 V`\n"
)


def sheet(number: str, *lines: str) -> str:
    return f"---\nsheet: {number}\n---\n" + "\n".join(["```working", *lines, "```", ""])


def findings(report: Report) -> list[Finding]:
    return [f for f in report.findings if f.kind.startswith("reference")]


def messages(text: str, *others: str) -> list[str]:
    """What is said of a sheet's values from others, the library's way."""
    reports = [check_text(f"{k}.md", other, others={}) for k, other in enumerate(others)]
    known = {r.reading.title["sheet"]: r for r in reports}
    return [f.message for f in findings(check_text("sheet.md", text, others=known))]


def cited(line: str) -> list[str]:
    return messages(sheet("EX-2", f"given {line} from EX-1"), SOURCE)


# --- one value ------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "line",
    [
        "Vb = 7.50 V", "Vb = 7.5 V", "V_b2 = 7.5 V", "Vb = 7500 mV", "vb = 7.5 V",
        "IR2 = 2.5 mA", "Iload = 2.50 mA", "ratio = 0.75", "Vlim = 12 V", "P = 18.75 mW",
        "PR2 = 19 mW", "Ptotal = 18.8 mW",  # right roundings of 18.75 mW
    ],
)  # fmt: skip
def test_values_that_the_other_sheet_claims(line):
    assert cited(line) == []


@pytest.mark.parametrize(
    ("line", "message"),
    [
        ("Vb = 7.6 V", "Vb is 7.6 V here, but EX-1 has V_b = 7.50 V in line 11"),
        ("Vb = 7.501 V", "Vb is 7.501 V here, but EX-1 has V_b = 7.50 V in line 11"),
        ("IR2 = 3 mA", "IR2 is 3 mA here, but EX-1 has I_R2 = 2.5 mA in line 11"),  # as coarse as this says too little
        (
            "Vb = 10 V",
            "Vb is 10 V here, but EX-1 has V_b = 7.50 V in line 11",
        ),  # what it is with R2 open is another value
        ("Vb = 7.5 A", "Vb is 7.5 A here, but EX-1 has V_b = 7.50 V in line 11"),
        ("Va = 10.3 V", "EX-1 has V_a = 10.3 V in line 13, but that claim differs from what the program finds there"),
        ("Vx = 4 V", "EX-1 has V_x = 4 V in line 13, but that claim is unchecked there"),
        ("Vq = 7.4 V", "EX-1 claims nothing called Vq, and no value 7.4 V; nearest is V_b = 7.50 V in line 11"),
        ("Lq = 4 mH", "EX-1 claims nothing called Lq, and no value 4 mH"),
        ("ratio = 0.8", "ratio is 0.8 here, but EX-1 has ratio = 0.75 in line 13"),
    ],
)
def test_values_that_do_not_stand_there(line, message):
    assert cited(line) == [message]


def test_a_value_rounded_twice_is_held_to_the_truth():
    """10 V × 7446/10000 = 7.446 V, printed 7.45 V; 7.4 V is right of both, 7.5 V of the printed one alone."""
    there = GOOD_CIRCUIT.replace("1 kΩ", "2554 Ω").replace("3 kΩ", "7446 Ω") + "`V_b = 7.45 V`\n"
    assert messages(sheet("EX-2", "given Vb = 7.4 V from EX-1"), there) == []
    assert messages(sheet("EX-2", "given Vb = 7.5 V from EX-1"), there) == [
        "Vb is 7.5 V here, but EX-1 has V_b = 7.45 V in line 11"
    ]


def test_a_fault_is_an_error_at_its_line_and_fails_the_sheet():
    text = sheet("EX-2", "given k = 2", "given Vb = 7.6 V from EX-1")
    report = check_text("sheet.md", text, others={"EX-1": check_text("EX-1.md", SOURCE)})
    (found,) = findings(report)
    assert (found.kind, found.severity) == ("reference", "error") and not report.clean
    assert report.reading.sheet.line_column(found.span.start) == (6, 1)


def test_without_other_sheets_the_doubt_is_said():
    report = check_text("sheet.md", sheet("EX-2", "given Vb = 7.5 V from EX-1"))
    (found,) = findings(report)
    assert (found.kind, found.severity) == ("reference-open", "caution") and "was not looked up" in found.message


@given(st.integers(-9999, 9999), st.integers(0, 4))
@settings(max_examples=60, deadline=None)
def test_a_value_passes_exactly_when_it_is_the_printed_one(number, places):
    """Of values printed with the other sheet's own places, its own alone agrees."""
    text = f"{number / 10**places:.{places}f}"
    there = sheet("EX-1", "given Vq = 7.50 V")
    said = messages(sheet("EX-2", f"given Vq = {text} V from EX-1"), there)
    if places >= 2:
        assert (said == []) == (float(text) == 7.5)
    elif said == []:
        assert abs(float(text) - 7.5) <= 0.5 * 10**-places


# --- sheets ---------------------------------------------------------------------------------------------------------


def test_a_sheet_that_is_missing():
    assert messages(sheet("EX-2", "given Vb = 7.5 V from EX-7"), SOURCE) == [
        "there is no sheet EX-7 to hold this against; correct the number, or bring the sheet"
    ]


def test_a_sheet_is_no_source_for_itself():
    assert messages(sheet("EX-2", "given Vb = 7.5 V from EX-2"), SOURCE) == ["a sheet is no source for itself"]


def test_sheets_that_rest_on_each_other():
    a = sheet("A", "given x = 1 V from B", "given u = 2 V from D", "y = 2 × x = 2 V")
    b = sheet("B", "given z = 3 V from C", "x = z / 3 = 1 V")
    c = sheet("C", "given y = 2 V from A", "z = y × 1.5 = 3 V")
    d = sheet("D", "given u = 2 V")
    circle = "the sheets rest on each other: {}; one of them must work its value out alone"
    assert messages(a, a, b, c, d) == [circle.format("A → B → C → A")]
    assert messages(b, a, b, c, d) == [circle.format("B → C → A → B")]
    assert messages(d, a, b, c, d) == []


def test_a_circle_further_up_is_that_sheets_matter():
    a = sheet("A", "given x = 1 V from B", "y = 2 × x = 2 V")
    b = sheet("B", "given y = 2 V from A", "x = y / 2 = 1 V")
    assert messages(sheet("Z", "given y = 2 V from A"), a, b) == []
    c = sheet("C", "given x = 1 V from B", "w = 2 × x = 2 V")
    assert messages(sheet("Z", "given w = 2 V from C"), a, b, c) == []


# --- on disk --------------------------------------------------------------------------------------------------------


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    return tmp_path


def write(path: str, text: str) -> None:
    Path(path).parent.mkdir(parents=True, exist_ok=True)
    Path(path).write_text(text)


def run(capsys, *arguments: str) -> tuple[int, str, str]:
    status = main(arguments)
    shown = capsys.readouterr()
    return status, shown.out, shown.err


GOOD = SOURCE.replace("V_a = 10.3 V", "V_a = 10 V").replace("; `V_x = 4 V`", "")
TAKES = sheet("EX-2", "given Vb = 7.5 V from EX-1")


def test_a_sheet_of_the_run_is_found_wherever_it_stands(folder, capsys):
    write("here/b.md", TAKES)
    write("there/a.md", GOOD)
    assert run(capsys, "check", "here/b.md")[0] == 1
    assert run(capsys, "check", "here/b.md", "there/a.md")[0] == 0
    assert run(capsys, "check")[0] == 0
    assert run(capsys, "check", "--jobs", "2")[0] == 0


def test_a_sheet_of_the_repository_is_found_from_any_of_its_folders(folder, capsys, monkeypatch):
    subprocess.run(["git", "init", "-q", "."], check=True)
    write("buses/deep/a.md", GOOD)
    write("loads/b.md", TAKES)
    assert run(capsys, "check", "loads/b.md")[0] == 0
    monkeypatch.chdir(folder / "loads")
    assert run(capsys, "check", "b.md")[0] == 0
    write("../buses/deep/a.md", GOOD.replace("V_b = 7.50 V", "V_b = 9.00 V").replace("R2: 3 kΩ", "R2: 9 kΩ"))
    status, out, _ = run(capsys, "check", "b.md")
    assert status == 1 and "b.md:5:1: error: Vb is 7.5 V here, but EX-1 has V_b = 9.00 V in line 11" in out


def test_only_staged_files_in_a_hook_and_the_others_from_the_working_tree(folder, capsys):
    alone = {**os.environ, "GIT_CONFIG_GLOBAL": os.devnull}
    subprocess.run(["git", "init", "-q", "."], check=True, env=alone)
    write("a.md", GOOD)
    write("b.md", TAKES)
    subprocess.run(["git", "add", "b.md"], check=True, env=alone)
    names = subprocess.run(
        ["git", "diff", "--cached", "--name-only"], check=True, capture_output=True, text=True
    ).stdout
    assert names.split() == ["b.md"] and run(capsys, "check", *names.split())[0] == 0


def test_a_number_given_twice(folder, capsys):
    write("b.md", TAKES)
    write("a.md", GOOD)
    write("old/a.md", GOOD)
    status, out, _ = run(capsys, "check", "b.md")
    assert status == 1 and "several sheets are numbered EX-1: a.md and old/a.md" in out


def test_standard_input_takes_values_too(folder, capsys, monkeypatch):
    write("a.md", GOOD)
    with Path("in").open("wb") as file:
        file.write(TAKES.encode())
    with Path("in").open() as file:
        monkeypatch.setattr("sys.stdin", file)
        assert run(capsys, "check", "-")[0] == 0


def test_marking_looks_them_up_too(folder, capsys):
    write("b.md", TAKES)
    assert run(capsys, "mark", "b.md", "--to", "md", "-o", ".")[0] == 1
    assert "there is no sheet EX-1" in Path("b.checked.md").read_text()


def test_nothing_is_looked_into_unless_a_sheet_names_another(folder, capsys, monkeypatch):
    looked: list[str] = []
    front, alone = calccheck.command.citing._front, calccheck.command.citing._alone
    monkeypatch.setattr(calccheck.command.citing, "_front", lambda path: looked.append(path.name) or front(path))
    monkeypatch.setattr(
        calccheck.command.citing, "_alone", lambda s, r: looked.append(f"read {s.path.name}") or alone(s, r)
    )
    write("a.md", GOOD)
    write("plain.md", GOOD.replace("EX-1", "EX-10"))
    assert run(capsys, "check", "a.md", "plain.md")[0] == 0 and looked == []
    write("b.md", TAKES)
    write("c.md", TAKES.replace("EX-2", "EX-3"))
    assert run(capsys, "check", ".")[0] == 0
    assert sorted(name for name in looked if not name.startswith("read")) == ["a.md", "b.md", "c.md", "plain.md"]
    assert {name for name in looked if name.startswith("read")} == {"read a.md"}


def test_each_other_sheet_is_read_once_a_run(folder, capsys, monkeypatch):
    import calccheck.pipeline

    checked: list[str] = []
    whole = calccheck.pipeline.check

    def check(sheet, *rest):
        checked.append(sheet.name)
        return whole(sheet, *rest)

    monkeypatch.setattr(calccheck.pipeline, "check", check)
    write("a.md", GOOD)
    for k in range(2, 6):
        write(f"b{k}.md", sheet(f"EX-{k}", "given Vb = 7.5 V from EX-1", "given I = 2.5 mA from EX-1"))
    assert run(capsys, "check", "b2.md", "b3.md", "b4.md", "b5.md")[0] == 0
    assert sorted(checked) == ["a.md", "b2.md", "b3.md", "b4.md", "b5.md"]


def test_what_was_found_is_forgotten_with_the_run(folder, capsys):
    write("b.md", TAKES)
    write("a.md", GOOD)
    assert run(capsys, "check", "b.md")[0] == 0
    write("a.md", GOOD.replace("EX-1", "EX-9"))
    assert run(capsys, "check", "b.md")[0] == 1


def test_files_that_cannot_be_looked_into_stand_in_nobodys_way(folder, capsys):
    write("b.md", TAKES)
    write("a.md", GOOD)
    Path("bytes.md").write_bytes(b"---\nsheet: \xff\n---\n")
    Path("gone.md").symlink_to("nowhere.md")
    Path("folder.md").mkdir()
    assert run(capsys, "check", "b.md")[0] == 0
