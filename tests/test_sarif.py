"""The SARIF log, held against the schema of the standard and against what its text asks for beyond the schema.

SARIF 2.1.0, OASIS Standard, 27 March 2020. Section numbers are those of the standard, quoted from memory; the schema is
tests/schemas/sarif-2.1.0-rtm.5.json.
"""

from __future__ import annotations

import json
import re
from collections import Counter
from dataclasses import replace
from datetime import date
from pathlib import Path
from urllib.parse import unquote_to_bytes, urlsplit

import pytest
from annotate_fixture import EXAMPLE, example, finding, hostile, report_of, said
from hypothesis import given
from hypothesis import strategies as st
from jsonschema import Draft4Validator

from calccheck import check_text
from calccheck.annotate.remarks import REMARK_RULES
from calccheck.annotate.to_sarif import to_sarif, uri_of
from calccheck.cli import main
from calccheck.model import Waiver
from calccheck.rules import RULES
from calccheck.source import Span

SCHEMA = json.loads((Path(__file__).parent / "schemas" / "sarif-2.1.0-rtm.5.json").read_bytes())
VALIDATOR = Draft4Validator(SCHEMA, format_checker=Draft4Validator.FORMAT_CHECKER)
ROOT = Path(__file__).parents[1]
SHEETS = sorted(ROOT.glob("sheets/**/*.md"))
CIRCUIT = "```circuit\nreference g\nV1: 10 V, a to g\nR1: 1 kΩ, a to b\nR2: 3 kΩ, b to g\n```\n\n"


def run_of(*reports, problems=()):
    """The only run of the log, after the schema has had its say."""
    log = json.loads(to_sarif(reports, "0.1.0", problems), parse_constant=pytest.fail)
    VALIDATOR.validate(log)
    assert log["version"] == "2.1.0"
    (run,) = log["runs"]
    return run


def region(result):
    return result["locations"][0]["physicalLocation"]["region"]


def text_at(text, region, ends):
    """What stands in a region, by the line ends and the half-open columns that 3.30 describes."""
    starts = [0] + [m.end() for m in re.finditer("|".join(map(re.escape, ends)), text)]
    begin = starts[region["startLine"] - 1] + region["startColumn"] - 1
    end = starts[region["endLine"] - 1] + region["endColumn"] - 1
    return text[begin:end]


def plain(message):
    """A message without arguments as a viewer shows it: doubled braces stand for single ones (3.11.5)."""
    text = message["text"]
    assert not re.search(r"\{|\}", text.replace("{{", "").replace("}}", ""))
    assert not re.search(r"\[[^\]\[]*\]\([^)]*\)", text)  # an embedded link (3.11.6)
    return text.replace("{{", "{").replace("}}", "}")


def test_the_schema_is_one_and_refuses_what_is_wrong():
    Draft4Validator.check_schema(SCHEMA)
    log = json.loads(to_sarif([example()], "0.1.0"))
    assert VALIDATOR.is_valid(log)
    for spoil in (
        lambda run: run["results"][0].update(kind="wrong"),
        lambda run: region(run["results"][0]).update(startLine=0),
        lambda run: run["results"][0].pop("message"),
        lambda run: run["results"][0].update(line=3),
        lambda run: run.update(columnKind="characters"),
    ):
        spoilt = json.loads(json.dumps(log))
        spoil(spoilt["runs"][0])
        assert not VALIDATOR.is_valid(spoilt)


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.stem)
def test_sheets_of_the_register(path):
    text = path.read_bytes().decode()
    report = check_text(str(path.relative_to(ROOT)), text)
    run = run_of(report)
    listed = Counter(r["ruleId"] for r in run["results"])
    for verdict in ("differs", "unchecked", "accepted", "given"):
        assert listed[verdict] == report.counts[verdict] == run["properties"]["summary"][verdict]
    assert not listed["agrees"] and not listed["rounded"]
    for result in run["results"]:
        assert text_at(text, region(result), run["newlineSequences"]) == region(result)["snippet"]["text"]
        place = result["locations"][0]["physicalLocation"]["artifactLocation"]
        assert run["artifacts"][place["index"]]["location"]["uri"] == place["uri"]
    assert run["artifacts"][0]["properties"]["verdict"] == report.verdict


@pytest.mark.parametrize("report", [example(), hostile()], ids=["every verdict", "hostile text"])
def test_kinds_levels_and_rules_agree(report):
    """3.27.10: the level is none where the kind is not fail. 3.27.6: ruleIndex is the place of the rule in the driver's rules."""
    run = run_of(report)
    rules = run["tool"]["driver"]["rules"]
    assert {r["id"] for r in rules} >= set(RULES)
    for result in run["results"]:
        assert rules[result["ruleIndex"]]["id"] == result["ruleId"]
        assert (result["kind"] == "fail") == (result["level"] != "none")
        assert plain(result["message"]).endswith((".", "?", "!"))


def test_kinds_by_verdict_and_the_worst_first():
    results = run_of(example())["results"]
    found = [(r["ruleId"], r["kind"], r["level"]) for r in results]
    assert found == [
        ("differs", "fail", "error"),  # 50 % off
        ("differs", "fail", "error"),  # 17 % off
        ("unchecked", "open", "none"),
        ("structure", "fail", "error"),
        ("letter", "fail", "warning"),
        ("claim", "fail", "warning"),
        ("accepted", "fail", "note"),
        ("given", "review", "none"),
    ]
    assert "I_R1 is not what the circuit gives. " in plain(results[0]["message"])
    assert "Recomputed: 1 A." in plain(results[0]["message"])
    assert "Likely: The number follows if R2 is left out." in plain(results[0]["message"])


def test_the_worst_first_over_several_sheets():
    one = check_text("a.md", CIRCUIT + "`V_b = 7.6 V`, `V_q = 1 V`\n")
    two = check_text("b.md", CIRCUIT + "`V_b = 75 V`\n")
    results = run_of(one, two)["results"]
    places = [r["locations"][0]["physicalLocation"]["artifactLocation"]["uri"] for r in results]
    assert [r["ruleId"] for r in results] == ["differs", "differs", "unchecked"] and places == ["b.md", "a.md", "a.md"]


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_columns_count_code_points_and_lines_every_line_end(end):
    """3.14.27: columnKind. One sign beyond the Basic Multilingual Plane is one column."""
    text = (CIRCUIT + "\U0001f600 e\u0301 漢字 `V_b = 7.6 V`\n").replace("\n", end)
    run = run_of(check_text("a.md", text))
    assert run["columnKind"] == "unicodeCodePoints"
    (result,) = run["results"]
    assert region(result)["startLine"] == 8
    assert text_at(text, region(result), run["newlineSequences"]) == "7.6 V"
    assert region(result)["startColumn"] == 1 + len("\U0001f600 e\u0301 漢字 `V_b = ")


def test_fingerprints_stay_when_lines_move_and_tell_like_claims_apart():
    """3.27.17: partial fingerprints let a result be recognized after the artifact has changed elsewhere."""
    claims = "`V_b = 7.6 V` and `I_R1 = 3 mA`, again `V_b = 7.6 V`, `V_q = 1 V`\n"

    def prints(text):
        found = run_of(check_text("a.md", text))["results"]
        return Counter(r["partialFingerprints"]["sheetText/v1"] for r in found)

    before = prints(CIRCUIT + claims)
    assert len(before) == 4 and set(before.values()) == {1}
    assert prints("# Title\n\nSome words.\n\n" + CIRCUIT + "More words.\n\n" + claims) == before
    assert len(before & prints(CIRCUIT + claims.replace("3 mA", "4 mA"))) == 3


def test_steps_of_a_chain_that_fail_are_related_places():
    text = CIRCUIT + "```working\nP_R2 = R2 × I_R2²\n     = 3.00 kΩ × (2.90 mA)²\n     = 99 mW\n```\n"
    (result,) = [r for r in run_of(check_text("a.md", text))["results"] if r["ruleId"] == "differs"]
    assert region(result)["startLine"] == 10
    (related,) = result["relatedLocations"]
    assert related["physicalLocation"]["region"]["startLine"] == 11 and plain(related["message"])


@pytest.mark.parametrize(
    ("name", "uri"),
    [  # RFC 3986: 2.1 percent-encoding of UTF-8 bytes, 4.2 a colon in the first segment would read as a scheme
        ("sheets/a b.md", "sheets/a%20b.md"),
        ("50%#1?.md", "50%25%231%3F.md"),
        ("a:b.md", "a%3Ab.md"),
        ("Ω.md", "%CE%A9.md"),
        ("odd\udcff.md", "odd%FF.md"),
        ("-", "-"),
        ("/srv/calc sheets/a.md", "file:///srv/calc%20sheets/a.md"),
    ],
)
def test_locations_are_uri_references(name, uri):
    assert uri_of(name) == uri
    run = run_of(report_of("`I_R = 2 A`\n", said("`I_R = 2 A`\n", "I_R = 2 A", "differs"), name=name))
    assert run["results"][0]["locations"][0]["physicalLocation"]["artifactLocation"]["uri"] == uri


@given(st.text(st.characters(exclude_categories=["Cs"], exclude_characters="\0"), min_size=1))
def test_any_name_comes_back_from_its_uri(name):
    parts = urlsplit(uri_of(name.lstrip("/")))
    assert not parts.scheme and not parts.query and not parts.fragment
    assert Path(unquote_to_bytes(parts.path).decode()) == Path(name.lstrip("/"))


@given(st.text())
def test_no_message_is_read_as_more_than_plain_text(words):
    text = "`I_R = 2 A`\n"
    (result,) = run_of(report_of(text, said(text, "I_R = 2 A", "differs", message=f"x {words} y")))["results"]
    assert plain(result["message"]).isprintable()


def test_an_accepted_claim_is_a_suppressed_result():
    """3.35: suppression inSource, accepted, with its justification."""
    text = "`V_a = 8.8 V`\n"
    judged = said(text, "V_a = 8.8 V", "accepted", message="measured")
    waiver = Waiver(None, None, "measured, TR-7", "QD", date(2027, 3, 1), Span(0, 3), "")
    report = report_of(text, replace(judged, claim=replace(judged.claim, waiver=waiver)))
    (result,) = run_of(report)["results"]
    (suppression,) = result["suppressions"]
    assert suppression == {"kind": "inSource", "status": "accepted", "justification": "measured, TR-7 (by QD)"}


def test_what_could_not_be_read_and_what_is_no_sheet():
    other = replace(example(), reading=replace(example().reading, is_calc=False), claims=())
    run = run_of(example(), other, problems=["x{0}.md: not UTF-8\nTraceback"])
    (invocation,) = run["invocations"]
    assert invocation["executionSuccessful"] is False
    assert plain(invocation["toolExecutionNotifications"][0]["message"]) == "x{0}.md: not UTF-8"
    assert run["properties"]["summary"]["not_sheets"] == 1 and len(run["artifacts"]) == 1
    assert run_of()["results"] == [] and run_of()["invocations"][0]["executionSuccessful"] is True


def test_every_severity_and_mark_has_its_rule():
    """A finding of each rule comes out as a result of that rule."""
    text = EXAMPLE
    report = report_of(text, findings=tuple(finding(text, "R1: 6 Ω", key, f"of {key}", "R9") for key in RULES))
    results = run_of(report)["results"]
    assert {r["ruleId"] for r in results} == set(RULES)
    levels = {"error": "error", "caution": "warning"}
    assert all(r["level"] == levels[REMARK_RULES[r["ruleId"]].severity] for r in results)
    assert all(plain(r["message"]) == f"of {r['ruleId']}. Write: R9." for r in results)


def test_the_command_writes_it_and_keeps_its_status(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "a b.md").write_text(CIRCUIT + "`V_b = 7.6 V`\n", encoding="utf-8")
    assert main(["check", "--format", "sarif"]) == 1
    log = json.loads(capsys.readouterr().out)
    VALIDATOR.validate(log)
    assert len(log["runs"][0]["results"]) == 1
    (tmp_path / "bad.md").write_bytes(b"```circuit\n\xff\n")
    assert main(["check", "--format", "sarif"]) == 2
    shown = capsys.readouterr()
    (run,) = json.loads(shown.out)["runs"]
    assert "bad.md" in shown.err and len(run["invocations"][0]["toolExecutionNotifications"]) == 1
    assert len(run["results"]) == 1
