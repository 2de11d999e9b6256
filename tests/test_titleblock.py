"""The title block and the settings. PyYAML is the reference for what a field's text is; its BaseLoader keeps all as text."""

from __future__ import annotations

import subprocess
import sys
from fractions import Fraction

import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from calccheck.document import Block
from calccheck.model import Finding, Settings
from calccheck.read.markdown import read_page
from calccheck.read.settings import SERIES, SettingFault, read_repo_settings
from calccheck.read.titleblock import read_titleblock
from calccheck.source import Sheet, Span, whole


def front_of(text: str) -> tuple[Sheet, Block]:
    """Front matter that holds this text; its first line is line 2 of the sheet."""
    sheet = Sheet("sheet.md", f"---\n{text}\n---\n")
    lines, offset = [], 4
    for line in text.split("\n"):
        lines.append(whole(line, offset))
        offset += len(line) + 1
    return sheet, Block("front matter", Span(0, len(sheet.text)), lines=tuple(lines))


def title(text: str) -> dict[str, str]:
    fields, _, findings = read_titleblock(front_of(text)[1], Settings())
    assert findings == ()
    return fields


def trouble(text: str) -> tuple[Finding, tuple[int, int], str]:
    """The one finding, its line and column in the sheet, and the text under it."""
    sheet, front = front_of(text)
    _, _, (finding,) = read_titleblock(front, Settings())
    return finding, sheet.line_column(finding.span.start), sheet.text[finding.span.start : finding.span.end]


# --- fields ---------------------------------------------------------------------------------------------------------


def test_a_sheet_without_front_matter() -> None:
    repository = Settings(carry=Fraction(1, 100))
    assert read_titleblock(None, repository) == ({}, repository, ())


def test_the_title_block_of_a_page() -> None:
    page = read_page(
        "---\nproject: Gannet Skerry tide station\nsheet: TS-101\nrevision: B\ndate: 2026-11-18\n---\n\n# Bus\n"
    )
    fields, found, findings = read_titleblock(page[0], Settings())
    assert list(fields.items()) == [
        ("project", "Gannet Skerry tide station"), ("sheet", "TS-101"), ("revision", "B"), ("date", "2026-11-18"),
    ]  # fmt: skip
    assert (found, findings) == (Settings(), ())


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("revision: 010", "010"), ("revision: 1.10", "1.10"), ("revision: 1e3", "1e3"), ("date: 2026-11-18", "2026-11-18"),
        ("time: 12:30:45", "12:30:45"), ("by: no", "no"), ("by: null", "null"), ("by: ~", "~"), ("by:", ""), ("by: 'QD'", "QD"),
        ('by: "Q: D"', "Q: D"), ("hazard: 48 V # on the rail", "48 V"), ("by: !!python/object:os.system ls", "ls"),
        ("by: [QD, AB]", "QD, AB"), ("by:\n- QD\n- AB", "QD, AB"), ("checked:\n  by: AB\n  date: 010", "by: AB; date: 010"),
        ("note: >\n  two\n  lines", "two lines"), ("note: two\n  lines", "two lines"), ("ü: Müller – Straße", "Müller – Straße"),
        ("limit: 5 % ± 1", "5 % ± 1"), ("a b: c", "c"),
    ],
)  # fmt: skip
def test_values_stay_as_written(text: str, value: str) -> None:
    assert list(title(text).values()) == [value]


@pytest.mark.parametrize("text", ["", "# only a remark", "\n\n"])
def test_no_fields(text: str) -> None:
    assert title(text) == {}


@pytest.mark.parametrize(
    ("text", "place", "under", "says"),
    [
        ("project: x\nproject: y", (3, 1), "project", "the field project stands twice"),
        ("a:\n  b: 1\n  b: 2", (4, 3), "b", "the field b stands twice"),
        ("a: &x [1, 2]\nb: *x", (3, 4), "*x", "not referred to by *"),
        ("- a\n- b", (2, 1), "- a\n- b", "made of fields"),
        ("just words", (2, 1), "just words", "made of fields"),
        ("a: b: c", (2, 5), ":", "no YAML"),
        ("ok: x\nx: [1", (3, 5), "1", "no YAML"),
        ("a: b\n--- c", (3, 1), "-", "one document"),
        ("? [a]\n: b", (2, 3), "[", "a field's name is plain text"),
        ("a: x\x07", (2, 5), "\x07", "U+0007"),
        ("a: " + "[" * 50 + "]" * 50, (2, 24), "[", "deeper than 20"),
    ],
)  # fmt: skip
def test_front_matter_that_cannot_be_read(text: str, place: tuple[int, int], under: str, says: str) -> None:
    finding, where, shown = trouble(text)
    assert (finding.kind, finding.severity, where) == ("front-matter", "error", place)
    assert shown.startswith(under)
    assert says in finding.message


def test_front_matter_beyond_all_measure() -> None:
    finding, _, _ = trouble("x: '" + "a" * 70_000 + "'")
    assert "longer than 65536" in finding.message


def test_a_bomb_of_aliases_is_refused_at_the_first() -> None:
    rungs = ["a0: &a0 [x, x, x, x, x, x, x, x, x]"] + [
        f"a{i}: &a{i} [{', '.join([f'*a{i - 1}'] * 9)}]" for i in range(1, 30)
    ]
    finding, where, _ = trouble("\n".join(rungs))
    assert ("not referred to" in finding.message, where) == (True, (3, 10))


def test_nothing_of_the_title_is_kept_from_front_matter_that_cannot_be_read() -> None:
    fields, found, findings = read_titleblock(front_of("sheet: A\ncheck:\n  carry: 1 %\nsheet: B")[1], Settings())
    assert (fields, found, len(findings)) == ({}, Settings(), 1)


# --- settings -------------------------------------------------------------------------------------------------------


def test_settings_of_a_sheet_stand_over_those_of_the_repository() -> None:
    text = "sheet: A\ncheck:\n  carry: 1 %\n  preferred: E24\n  derate: 0.8\n  frequency: 50 Hz\n  phasors: peak"
    fields, found, findings = read_titleblock(front_of(text)[1], Settings(approx=Fraction(1, 10)))
    assert findings == ()
    assert fields == {"sheet": "A"}
    assert found == Settings(Fraction(1, 100), Fraction(1, 10), "peak", Fraction(4, 5), "E24", "50 Hz")


@pytest.mark.parametrize(
    ("key", "text", "value"),
    [("carry", "0.5 %", Fraction(1, 200)), ("carry", "0.005", Fraction(1, 200)), ("approx", "5%", Fraction(1, 20)), ("carry", "0", 0),
     ("derate", "80 %", Fraction(4, 5)), ("derate", "1.0", 1), ("preferred", "none", ""), ("preferred", "E96", "E96"),
     ("phasors", "rms", "rms"), ("frequency", "1.5 kHz", "1.5 kHz")],
)  # fmt: skip
def test_values_of_settings(key: str, text: str, value: object) -> None:
    _, found, findings = read_titleblock(front_of(f"check:\n  {key}: {text}")[1], Settings())
    assert (getattr(found, key), findings) == (value, ())
    assert getattr(read_repo_settings({key: text}), key) == value


@pytest.mark.parametrize(
    ("lines", "place", "under", "says"),
    [
        ("  aprox: 5 %", (3, 3), "aprox: 5 %", "there is no setting aprox; is approx meant?"),
        ("  zzz: 5 %", (3, 3), "zzz: 5 %", "known are carry, approx"),
        ("  carry: 5", (3, 3), "carry: 5", "carry is a percentage such as 0.5 %"),
        ("  carry: 100 %", (3, 3), "carry: 100 %", "below 100 %"),
        ("  carry: −1 %", (3, 3), "carry: −1 %", "not −1 %"),
        ("  carry: 0,5 %", (3, 3), "carry: 0,5 %", "not 0,5 %"),
        ("  approx: 5 %\n  derate: 2", (4, 3), "derate: 2", "above 0 and up to 1"),
        ("  derate: 0", (3, 3), "derate: 0", "above 0 and up to 1"),
        ("  phasors: top", (3, 3), "phasors: top", "rms or peak"),
        ("  preferred: E25", (3, 3), "preferred: E25", "IEC 60063"),
        ("  frequency: 50", (3, 3), "frequency: 50", "such as 50 Hz"),
        ("  carry: [1 %]", (3, 3), "carry: [1 %", "one value, not several"),
    ],
)
def test_settings_that_cannot_be_set(lines: str, place: tuple[int, int], under: str, says: str) -> None:
    finding, where, shown = trouble(f"check:\n{lines}")
    assert (finding.kind, finding.severity, where) == ("setting", "error", place)
    assert shown.startswith(under)
    assert says in finding.message


@pytest.mark.parametrize("text", ["check: strict", "check:", "check: [carry]"])
def test_settings_are_a_mapping(text: str) -> None:
    assert trouble(text)[0].kind == "setting"


def test_a_good_setting_holds_beside_a_bad_one() -> None:
    _, found, findings = read_titleblock(front_of("check:\n  derate: 7\n  carry: 1 %")[1], Settings())
    assert (found.carry, len(findings)) == (Fraction(1, 100), 1)


def test_settings_of_a_repository() -> None:
    assert read_repo_settings({}) == Settings()
    assert read_repo_settings({"carry": 0.005, "derate": 1}) == Settings()
    assert read_repo_settings({"carry": 0.01}).carry == Fraction(1, 100)
    for table in ({"cary": "1 %"}, {"carry": True}, {"carry": [1]}, {"carry": "much"}, {"carry": 7}):
        with pytest.raises(SettingFault, match="carry"):
            read_repo_settings(table)


def test_the_series_are_those_of_the_standard() -> None:
    """IEC 60063:2015, from memory: 3, 6, 12, 24, 48, 96 and 192 values a decade."""
    assert [int(s[1:]) for s in SERIES] == [3 * 2**k for k in range(7)]


# --- against PyYAML -------------------------------------------------------------------------------------------------

KEYS = st.text("abcxyzABC019_- ", min_size=1, max_size=8)
VALUES = st.text("abcXYZ019 ,.;()/+%&°–—-_'\":#[]{}&*!|>?@~`=<ü\t\u00a0\u2028\x85\ufeff", max_size=14)
LINES = st.tuples(KEYS, st.sampled_from([":", ": ", ":  ", " : ", "", ":\t"]), VALUES).map("".join)


# The loader that is there: libyaml's and Python's differ in what they let a tab do, in nothing else that matters here.
LOADER = getattr(yaml, "CBaseLoader", yaml.BaseLoader)


def by_pyyaml(text: str) -> object:
    try:
        return yaml.load(text, Loader=LOADER)
    except yaml.YAMLError:
        return None


@given(st.lists(LINES, min_size=1, max_size=4).map("\n".join))
@settings(max_examples=400, deadline=None)
def test_every_field_reads_as_pyyaml_reads_it(text: str) -> None:
    """The shortcut for plain fields and the full reading alike; what PyYAML refuses, or would drop, is told."""
    fields, _, findings = read_titleblock(front_of(text)[1], Settings())
    expected = by_pyyaml(text)
    if not findings:
        flat = {k: v for k, v in (expected or {}).items() if isinstance(v, str)}
        assert {k: v for k, v in fields.items() if k in flat} == flat
        assert set(fields) == set(expected or {})
    elif "twice" not in findings[0].message and "*" not in findings[0].message and "name is" not in findings[0].message:
        assert not isinstance(expected, dict), findings


PLAIN = st.text("abcXYZ019 ,.;()/+%&°–—-_ü", max_size=12)


@given(st.dictionaries(st.text("abcxyz019_", min_size=1, max_size=6), PLAIN, min_size=1, max_size=5))
@settings(max_examples=300, deadline=None)
def test_plain_fields_read_as_pyyaml_reads_them(fields: dict[str, str]) -> None:
    text = "\n".join(f"{key}: {value}" for key, value in fields.items())
    expected = by_pyyaml(text)
    found, _, findings = read_titleblock(front_of(text)[1], Settings())
    if isinstance(expected, dict) and all(isinstance(v, str) for v in expected.values()) and "check" not in expected:
        assert (found, findings) == (expected, ())


@given(st.text(max_size=60))
@settings(max_examples=200, deadline=None)
def test_any_text_is_read_or_told(text: str) -> None:
    text = text.replace("\r", " ")
    sheet, front = front_of(text)
    _, _, findings = read_titleblock(front, Settings())
    for finding in findings:
        assert 0 <= finding.span.start <= finding.span.end <= len(sheet.text)


def test_plain_fields_do_not_load_yaml() -> None:
    """A run over plain title blocks stays quick: the library is loaded only for more than plain fields."""
    program = (
        "import sys; from calccheck.read.titleblock import read_titleblock; from calccheck.document import Block;"
        "from calccheck.source import Span, whole; from calccheck.model import Settings;"
        "lines = (whole('sheet: TS-101'), whole('date: 2026-11-18'));"
        "print(read_titleblock(Block('front matter', Span(0, 9), lines=lines), Settings())[0], 'yaml' in sys.modules)"
    )
    said = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True).stdout
    assert said == "{'sheet': 'TS-101', 'date': '2026-11-18'} False\n"
