"""The JSON report: the form that docs/report-json.md describes, its example, and values that another program can rely on."""

from __future__ import annotations

import hashlib
import json
import math
import re
from dataclasses import replace
from pathlib import Path

import pytest
from annotate_fixture import amount, finding, report_of, said

from calccheck import __version__, check_text
from calccheck.annotate.to_json import to_json
from calccheck.model import CircuitFigures, Slip
from calccheck.units import AMPERE, VOLT

PAGE = (Path(__file__).parents[1] / "docs" / "report-json.md").read_text(encoding="utf-8")
SHEETS = sorted(Path(__file__).parents[1].glob("sheets/**/*.md"))
CLAIM = [
    "line", "column", "end_line", "end_column", "text", "quantity", "basis", "verdict", "claimed", "computed",
    "deviation", "message", "steps", "slips",
]  # fmt: skip


def read(*reports):
    return json.loads(to_json(reports, __version__))


def test_the_documented_example_is_what_the_program_says():
    sheet = re.search(r"````markdown\n(.*?)````", PAGE, re.DOTALL)[1]
    shown = json.loads(re.search(r"```json\n(.*?)```", PAGE, re.DOTALL)[1])
    found = read(check_text("sheets/bus.md", sheet))
    for report in (shown, found):  # rounding errors, which may differ from machine to machine, but not in size
        for circuit in report["sheets"][0]["circuits"]:
            assert all(circuit.pop(name) < 1e-12 for name in ("route_gap", "kcl_residual", "power_balance"))
        report.pop("program")
    assert found == shown
    assert json.dumps(found) == json.dumps(shown)  # the order of members as well


def test_values_of_the_example_by_hand():
    """12.6 V over 0.22 Ω + 4.7 Ω (Ohm's law): 2.5609756 A; 4.7/4.92 of 12.6 V (divider): 12.0365854 V."""
    current, voltage = json.loads(re.search(r"```json\n(.*?)```", PAGE, re.DOTALL)[1])["sheets"][0]["claims"]
    assert math.isclose(current["computed"]["value"], 12.6 / 4.92, rel_tol=1e-11)
    assert math.isclose(current["deviation"], 2.65 / (12.6 / 4.92) - 1, rel_tol=1e-3)
    assert math.isclose(voltage["computed"]["value"], 12.6 * 4.7 / 4.92, rel_tol=1e-11)


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.stem)
def test_sheets_of_the_register(path):
    text = path.read_bytes().decode()
    report = check_text(str(path), text)
    written = to_json([report], __version__)
    record = json.loads(written, parse_constant=pytest.fail)
    assert list(record) == ["report", "program", "summary", "sheets"]
    (sheet,) = record["sheets"]
    assert list(sheet) == ["path", "digest", "verdict", "circuits", "claims", "findings", "ratings"]
    assert sheet["digest"] == "sha256:" + hashlib.sha256(path.read_bytes()).hexdigest()
    lines = text.split("\n")
    for claim, judged in zip(sheet["claims"], report.claims, strict=True):
        assert list(claim) == CLAIM
        shown = lines[claim["line"] - 1 : claim["end_line"]]
        shown[-1] = shown[-1][: claim["end_column"] - 1]
        shown[0] = shown[0][claim["column"] - 1 :]
        if judged.claim.place in ("code", "prose"):
            assert claim["text"] in "\n".join(shown)
        assert claim["verdict"] == judged.verdict
    summary = record["summary"]
    assert summary["claims"] == len(sheet["claims"])
    verdicts = ("agrees", "rounded", "differs", "unchecked", "accepted", "given")
    assert sum(summary[v] for v in verdicts) == summary["claims"]


def test_every_kind_of_value_and_what_is_not_finite():
    text = "é `I_R = 2 A` `V_a ≤ 3 V` 😀 `V_b ≥ 1 V`\n"
    slip = Slip("sign", "a sign was lost")
    reports = report_of(
        text,
        said(text, "I_R = 2 A", "differs", place="code", basis="circuit", quantity="I_R", claimed=amount(2, AMPERE),
             computed=amount(math.inf, AMPERE), deviation=math.nan, message="no", slips=(slip,), cautions=("coarse",)),
        said(text, "V_a ≤ 3 V", "agrees", place="code", high=amount(3, VOLT), computed=amount(-0.0, VOLT)),
        said(text, "V_b ≥ 1 V", "unchecked", place="code", low=amount(1, VOLT)),
        findings=(finding(text, "😀", "letter", "odd", "R1"),),
        figures=(CircuitFigures("bridge", 1, 4, 5, 3.14159e-16, None, 1e-400),),
    )  # fmt: skip
    (sheet,) = read(reports)["sheets"]
    current, upper, lower = sheet["claims"]
    assert current["claimed"] == {"value": 2, "unit": "A"}
    assert current["computed"] == {"value": None, "unit": "A"} and current["deviation"] is None
    assert current["slips"] == [{"slip": "sign", "text": "a sign was lost"}]
    assert (current["line"], current["column"], current["end_column"]) == (1, 4, 13)
    assert upper["claimed"] == {"value": {"low": None, "high": 3}, "unit": "V"}
    assert str(upper["computed"]["value"]) == "0.0"
    assert lower["claimed"] == {"value": {"low": 1, "high": None}, "unit": "V"} and lower["computed"] is None
    circuit = sheet["circuits"][0]
    assert circuit["route_gap"] == 3.1e-16 and circuit["kcl_residual"] is None and circuit["power_balance"] == 0
    assert sheet["findings"] == [
        {"line": 1, "column": 4, "kind": "claim", "severity": "caution", "message": "coarse"},
        {"line": 1, "column": 27, "kind": "letter", "severity": "caution", "message": "odd; write R1"},
    ]
    assert sheet["verdict"] == "differs"


def test_the_summary_counts_over_sheets_and_names_what_was_passed_over():
    text = "`I_R = 2 A` `I_S = 3 A`\n"
    one = report_of(text, said(text, "I_R = 2 A", "agrees", cautions=("a", "b")), said(text, "I_S = 3 A", "given"))
    other = replace(one, reading=replace(one.reading, is_calc=False), claims=())
    record = read(one, one, other)
    assert record["summary"] == {
        "sheets": 2, "claims": 4, "agrees": 2, "rounded": 0, "differs": 0, "unchecked": 0, "accepted": 0, "given": 2,
        "cautions": 4, "not_sheets": 1,
    }  # fmt: skip
    assert len(record["sheets"]) == 2


def test_a_file_name_of_odd_bytes_still_makes_json():
    text = "`I_R = 2 A`\n"
    written = to_json([report_of(text, name="a\udcff.md")], __version__).encode("utf-8")
    assert json.loads(written)["sheets"][0]["path"] == "a\udcff.md"
