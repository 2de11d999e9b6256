"""Test results in XML: the shape that build services share, totals that add up, nothing that XML does not allow.

The shape is tests/schemas/junit.xsd, written down from memory, there being no standard. Characters: XML 1.0 (W3C
Recommendation, fifth edition), production 2; the parser is libxml2's.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from pathlib import Path

import pytest
from annotate_fixture import example, finding, hostile, report_of, said
from hypothesis import given
from hypothesis import strategies as st
from lxml import etree

from calccheck import check_text
from calccheck.annotate.to_junit import to_junit
from calccheck.cli import main

SCHEMA = etree.XMLSchema(etree.parse(Path(__file__).parent / "schemas" / "junit.xsd"))
ROOT = Path(__file__).parents[1]
SHEETS = sorted(ROOT.glob("sheets/**/*.md"))
CIRCUIT = "```circuit\nreference g\nV1: 10 V, a to g\nR1: 1 kΩ, a to b\nR2: 3 kΩ, b to g\n```\n\n"
COUNTED = {"failures": "failure", "errors": "error", "skipped": "skipped"}


def read(*reports, problems=()):
    """The root, after the schema has had its say and every total was counted again."""
    return checked(to_junit(reports, "0.1.0", problems).encode("utf-8"))


def checked(written: bytes):
    root = etree.fromstring(written)
    SCHEMA.assertValid(root)
    for whole in (root, *root):
        cases = list(whole.iter("testcase"))
        assert int(whole.get("tests")) == len(cases)
        for attribute, tag in COUNTED.items():
            assert int(whole.get(attribute)) == sum(len(case.findall(tag)) for case in cases)
        for suite in whole.iter("testsuite"):
            names = [c.get("name") for c in suite.iter("testcase")]
            assert len(set(names)) == len(names)
    return root


def outcomes(suite):
    return [(c[0].tag if len(c) else "passed", c.get("name")) for c in suite.iter("testcase")]


def test_the_schema_refuses_what_is_wrong():
    root = read(example())
    root[1].find("testcase").attrib.pop("name")
    assert not SCHEMA.validate(root)
    with pytest.raises(AssertionError):
        checked(to_junit([example()], "0.1.0").replace('failures="2"', 'failures="1"').encode())


def test_all_sheets_of_the_register():
    reports = [check_text(str(p.relative_to(ROOT)), p.read_bytes().decode()) for p in SHEETS]
    root = read(*reports)
    run, *suites = root
    assert len(suites) == len(SHEETS)
    counts = Counter(j.verdict for r in reports for j in r.claims)
    told = {p.get("name"): int(p.get("value")) for p in run.find("properties")}
    assert {v: told[v] for v in counts} == counts
    found = Counter(tag for suite in suites for tag, _ in outcomes(suite))
    assert found["failure"] == counts["differs"]
    assert found["skipped"] == counts["accepted"] + counts["given"]
    assert found["passed"] == counts["agrees"] + counts["rounded"]
    failing = [int(suite.get("failures")) > 0 for suite in suites]
    assert failing == sorted(failing, reverse=True) and any(failing)
    assert f"{len(SHEETS)} calc sheets, {len([j for r in reports for j in r.claims])} claims" in run.findtext(
        "system-out"
    )


def test_one_outcome_for_each_verdict_the_worst_first():
    (suite,) = read(example())[1:]
    assert [tag for tag, _ in outcomes(suite)] == [
        "failure", "failure", "error", "error", "skipped", "passed", "passed", "passed", "skipped",
    ]  # fmt: skip
    failure = suite.find("testcase/failure")
    assert failure.get("type") == "differs" and "I_R1 is not what" in failure.get("message")
    assert "The number follows if R2 is left out." in failure.text and "I_R1 = 1.50 A" in failure.text
    assert suite.findall("testcase")[2][0].get("type") == "unchecked"
    assert suite.findall("testcase")[3][0].get("type") == "structure"
    assert "measured, TR-7" in suite.findall("testcase")[4][0].get("message")
    beside = suite.findtext("system-out")
    assert "caution: coarse: says little" in beside and "caution: R1 is well named" in beside


def test_cases_are_named_by_quantity_and_line():
    text = CIRCUIT + "`V_b = 7.6 V`, `V_b = 7.5 V`\n\n`V_b = 7.5 V`\n"
    (suite,) = read(check_text("sheets/a.md", text))[1:]
    assert outcomes(suite) == [
        ("failure", "V_b (line 8)"), ("passed", "V_b (line 8, column 16)"), ("passed", "V_b (line 10)"),
    ]  # fmt: skip
    case = suite.find("testcase")
    assert case.get("file") == case.get("classname") == "sheets/a.md" and case.get("line") == "8"
    assert case[0].text.startswith("sheets/a.md:8:8\n")


def test_names_stay_apart_even_at_one_place():
    text = "`I_R = 2 A`\n"
    claim = said(text, "I_R = 2 A", "agrees", quantity="I_R")
    (suite,) = read(report_of(text, claim, claim, claim, claim))[1:]
    assert [name for _, name in outcomes(suite)] == [
        "I_R (line 1)", "I_R (line 1, column 2)", "I_R (line 1, column 2, no. 2)", "I_R (line 1, column 2, no. 3)",
    ]  # fmt: skip


def test_hostile_text_stays_text():
    suite = read(hostile())[1]
    assert suite.get("name") == 'nasty "]#.md'
    assert {e.tag for e in suite.iter()} <= {
        "testsuite", "properties", "property", "testcase", "failure", "error", "skipped", "system-out",
    }  # fmt: skip
    (message,) = {e.get("message") for e in suite.iter("failure")}
    assert "<b>&amp;</b>" in message and "[U+202E]" in message and "\u202e" not in message


@given(st.text(), st.text(min_size=1))
def test_any_text_and_any_name_make_xml(words, name):
    text = f"`I_R = 2 A`\n{words}"
    odd = replace(said(text, "I_R = 2 A", "differs"), message=words, quantity=words, cautions=(words,))
    caution = finding(text, "I_R", "letter", words, words)
    read(report_of(text, odd, findings=(caution,), name=name), problems=[words])


def test_odd_bytes_in_a_file_name():
    assert read(report_of("`I_R = 2 A`\n", name="a\udcff.md"))[1].get("name") == "a[U+DCFF].md"


def test_the_same_reports_give_the_same_bytes_and_no_times():
    written = to_junit([example()], "0.1.0")
    assert written == to_junit([example()], "0.1.0")
    assert " time=" not in written and " timestamp=" not in written


def test_no_sheets_at_all():
    (run,) = read()
    assert run.get("tests") == "0"


def test_the_command_writes_it_and_keeps_its_status(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "a b.md").write_text(CIRCUIT + "`V_b = 7.6 V`\n", encoding="utf-8")
    (tmp_path / "notes.md").write_text("# Minutes\n", encoding="utf-8")
    assert main(["check", "--format", "junit"]) == 1
    root = checked(capsys.readouterr().out.encode())
    assert [s.get("name") for s in root] == ["calccheck", "a b.md"] and root.get("failures") == "1"
    (tmp_path / "bad.md").write_bytes(b"```circuit\n\xff\n")
    assert main(["check", "--format", "junit"]) == 2
    root = checked(capsys.readouterr().out.encode())
    (case,) = root[0].findall("testcase")
    assert case[0].tag == "error" and case[0].get("type") == "unreadable" and "bad.md" in case.get("name")
