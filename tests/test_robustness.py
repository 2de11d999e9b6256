"""Any text gets an answer in seconds: never a traceback, a hang, a span outside of the text, or a claim passed over in silence."""

from __future__ import annotations

import json
import re
import signal
from collections.abc import Iterator
from contextlib import contextmanager

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calccheck import check_text
from calccheck.annotate.to_html import to_html
from calccheck.annotate.to_json import to_json
from calccheck.annotate.to_markdown import to_markdown
from calccheck.annotate.to_terminal import to_terminal
from calccheck.document import blocks, inlines
from calccheck.edits import unmark
from calccheck.formula import walk
from calccheck.model import Report
from calccheck.source import Span

LIMIT = 10  # seconds for one sheet: a promise to people, not a benchmark

CIRCUIT = "```circuit\nreference com\nVb: 12 V, a to com\nR1: 1 kΩ, a to b\nR2: 2 kΩ, b to com\n```\n\n"


def working(*statements: str) -> str:
    return CIRCUIT + "\n".join(["```working", *statements, "```", ""])


@contextmanager
def within(seconds: int) -> Iterator[None]:
    """A limit on the work done, which also ends a hang, where the system has such a signal; other programs do not count."""

    def late(*_: object) -> None:
        raise AssertionError(f"no answer within {seconds} s")

    if not hasattr(signal, "SIGPROF"):
        yield
        return
    before = signal.signal(signal.SIGPROF, late)
    signal.setitimer(signal.ITIMER_PROF, seconds)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_PROF, 0)
        signal.signal(signal.SIGPROF, before)


def answered(text: str, seconds: int = LIMIT) -> Report:
    """The report, its bookkeeping held against the text."""
    with within(seconds):
        report = check_text("sheet.md", text)
    length = len(report.reading.sheet.text)
    assert report.reading.sheet.text == unmark(text)
    assert sum(report.counts.values()) == len(report.claims) == len(report.reading.claims)
    for span in spans(report):
        assert 0 <= span.start <= span.end <= length
    for judged in report.claims:
        assert judged.verdict in ("agrees", "given") or judged.message, "a verdict that is not simply right says why"
    assert report.clean == (
        not any(j.verdict in ("differs", "unchecked") for j in report.claims)
        and not any(f.severity == "error" for f in report.findings)
    )
    return report


def spans(report: Report) -> Iterator[Span]:
    """Every place that a report names."""
    for judged in report.claims:
        yield judged.claim.span
        yield from (s.span for s in judged.steps)
        for m in judged.claim.members:
            yield m.span
            yield from (n.span for n in walk(m.node))
        if judged.claim.problem:
            yield judged.claim.problem.span
    yield from (f.span for f in report.findings)
    for block in blocks(report.reading.page):
        yield block.span
        yield from (i.span for i in inlines(block.inlines))
    for c in report.reading.circuits:
        yield c.span
        yield from (e.span for e in c.elements)


def verdicts(report: Report) -> set[str]:
    return {j.verdict for j in report.claims}


# --- what is too much for anyone --------------------------------------------------------------------------------------

TALL = "(" * 48 + "1" + ("+1" * 49 + ")") * 48
EXPRESSIONS = {
    "powers of powers": ("x = 9^9^9^9", "floating-point"), "a power of a name": ("V_b^99999999999 = 8", "floating-point"),
    "ten thousand brackets": ("x = " + "(" * 10_000 + "1" + ")" * 10_000, "longer than"), "three thousand brackets": ("x = " + "(" * 3000 + "1" + ")" * 3000, "deeper"),
    "brackets that never close": ("x = " + "(" * 4000, "deeper"), "signs": ("x = " + "-" * 9000 + "1", "deeper"), "signs of an exponent": ("x = 2^" + "-" * 9000 + "1", "deeper"),
    "roots": ("x = " + "√" * 9000 + "1", "deeper"), "bars": ("x = " + "|" * 9000 + "1", "deeper"), "powers in a row": ("x = 1" + "^1" * 4000, "deeper"),
    "a long sum": ("x = " + "1+" * 4900 + "1", "operations"), "sums in brackets": ("x = " + TALL, "within one another"), "a long product": ("x = " + "R1 " * 1500, "operations"),
    "a long chain": ("x = " + "1+1 = " * 1500 + "2", "members"), "bounds in a row": ("x" + " < 1" * 2400, "members"), "a line of ten megabytes": ("x = " + "1+" * 5_000_000, None),
    "a huge exponent": ("V_b = 1e400 V", "out of range"), "an exponent of twenty digits": ("V_b = 1e99999999999999999999 V", "out of range"),
    "a power in five thousand superscripts": ("x = 2" + "⁹" * 5000, "floating-point"), "a unit to a huge power": ("x = 3 m" + "⁹" * 5000, "floating-point"),
    "a number of five thousand figures": ("x = " + "8" * 5000 + " V", "out of range"), "a unit of many words": ("x = 1 m" + "/m" * 4000, None), "qualifiers": ("V_b" + " without R1" * 900 + " = 8 V", None),
    "a name of ten thousand characters": ("x" * 9900 + " = 8 V", None), "primes": ("V" + "′" * 9000 + " = 8 V", None), "braces": ("V_{" + "a," * 4000 + "b} = 8 V", None),
    "sources": ("V_b due to Vb" + " and Vb" * 1300 + " = 8 V", None), "case words": ("V_b in case" + " hot" * 2000 + " = 8 V", None), "units in brackets": ("x = 3 J/(kg" + "·K" * 3000 + ")", None),
}  # fmt: skip


@pytest.mark.parametrize("name", EXPRESSIONS)
def test_a_statement_out_of_all_bounds_is_unchecked_with_its_reason(name: str) -> None:
    statement, fragment = EXPRESSIONS[name]
    report = answered(working(statement, "V_b = 8 V"))
    if fragment is not None:
        assert report.claims[0].verdict == "unchecked"
        assert fragment in report.claims[0].message
        assert report.claims[1].verdict == "agrees", "what stands beside it is still checked"
    assert not report.clean or name == "sources"


def test_figures_without_end_are_judged_like_any() -> None:
    right, wrong = "7." + "9" * 5000, "7." + "9" * 2500 + "1" + "9" * 2499
    report = answered(
        working(
            f"V_b = {right} V",
            f"R1 = 1000.{'0' * 5000} Ω",
            f"V_b = {'0' * 5000}9 V",
            f"I_R1 = 0.004{'0' * 4000}1 A",
            f"V_b = {wrong} V",
        )
    )
    assert [j.verdict for j in report.claims[:3]] == ["agrees", "agrees", "differs"]


def test_rationals_that_grow_with_every_definition() -> None:
    """Each formula multiplies the ones before it: numerators and denominators double in length at every step."""
    chain = [f"a{k} = a{k - 1} × a{k - 1} + 1/7 = {0.1:g}" for k in range(1, 60)]
    slower = [f"b{k} = b{k - 1}/1.0000001 + 1/{k + 2} = 1" for k in range(1, 300)]
    report = answered(working("given a0 = 1/3", *chain, "given b0 = 1/3", *slower))
    assert len(report.claims) == 2 + len(chain) + len(slower)


# --- sheets out of all bounds -----------------------------------------------------------------------------------------


def ladder(nodes: int) -> str:
    """A ladder of resistances, 10 Ω in line and 10 MΩ across."""
    parts = [f"R{k}: 10 Ω, n{k} to n{k + 1}\nS{k}: 10 MΩ, n{k + 1} to com" for k in range(nodes)]
    return "\n".join(["```circuit", "reference com", "V1: 10 V, n0 to com", *parts, "```", "", ""])


def star(sources: int) -> str:
    """Equal currents into twenty nodes that hang on one."""
    parts = [f"I{k}: 1 mA, com to n{k % 20}" for k in range(sources)]
    parts += [f"R{k}: 1 kΩ, n{k} to mid" for k in range(20)]
    return "\n".join(["```circuit", "reference com", "Rm: 1 kΩ, mid to com", *parts, "```", "", ""])


@pytest.mark.parametrize(
    ("text", "verdict", "count"),
    [(CIRCUIT + "| | total |\n|---|---|\n" + "| `V_b` | 8 V |\n" * 10_000, "agrees", 10_000),
     (CIRCUIT + "|" + " |" * 3001 + "\n|" + "---|" * 3001 + "\n|" + " `V_b` |" * 3001 + "\n", "agrees", 3000),
     (working(*["V_b = 8 V"] * 10_000), "agrees", 10_000), (working(*["I_R1 = 4.01 mA"] * 3000), "differs", 3000),
     (working(*[f"x{k} = Vb × {k} = {12 * k} V" for k in range(3000)]), "agrees", 3000),
     (working(*["V_b = Vb × R2/(R1 + R2) = 12 V × 2 kΩ/(3 kΩ) = 8.0 V"] * 3000), "agrees", 3000),
     (ladder(1000) + "`V_n0 = 10 V`\n", "agrees", 1), (star(300) + "`V_mid = 0.3 kV`\n", "agrees", 1),
     (star(300) + "".join(f"`V_mid due to I{k} = 1.0 V`\n" for k in range(300)), "agrees", 300)],
    ids=["table of 10,000 rows", "table of 3,000 columns", "10,000 claims", "3,000 wrong claims", "3,000 names", "3,000 substitutions",
         "1,000 nodes", "300 sources", "300 sources one by one"],
)  # fmt: skip
@pytest.mark.undisturbed
def test_a_large_sheet_is_checked_in_seconds(text: str, verdict: str, count: int) -> None:
    report = answered(text)
    assert [j.verdict for j in report.claims] == [verdict] * count


@pytest.mark.parametrize(
    "text",
    ["word " * 2_000_000, "V_b " * 2_500_000 + "= 3", "V_b" + "_" * 10_000_000, "`" + "V_b = 3 V, " * 900_000 + "`", "[" * 10_000_000, "$a " * 3_000_000],
    ids=["words", "names", "underscores", "one code", "brackets", "dollars"],
)  # fmt: skip
@pytest.mark.undisturbed
def test_a_line_of_ten_megabytes_is_a_clear_limit(text: str) -> None:
    report = answered(CIRCUIT + text)
    assert [f.kind for f in report.findings] == ["limit"]
    assert not report.clean


@pytest.mark.parametrize("text", ["word " * 2_000_000, "a\n" * 3_000_000], ids=["one line", "many lines"])
def test_a_large_page_that_is_no_calc_sheet_passes(text: str) -> None:
    report = answered(text)
    assert not report.reading.is_calc
    assert report.clean


DENSE = {  # what Markdown parsers are slow at, up to the longest line that is read
    "brackets": "[" * 90_000, "stars": "*a " * 30_000, "underscores": "_a_ " * 20_000, "backticks": " ".join("`" * k for k in range(400)), "angles": "<" * 90_000,
    "ampersands": "&" * 90_000, "dollars": "$a " * 30_000, "double dollars": "$$a " * 20_000, "footnotes": "[^a]" * 20_000, "quotes": ">" * 90_000, "lists": "- " * 45_000,
    "tildes": "~a~ " * 20_000, "backslashes": "\\" * 90_000, "bangs": "![" * 40_000, "pipes": "|" * 90_000, "name and blanks": "V_b" + " " * 90_000 + "x",
    "name and underscores": "V_b" + "_" * 90_000, "relations": "=" * 90_000, "claims": "V_b = 3 V " * 9000, "entities": "&le;" * 20_000, "hashes": "#" * 90_000,
}  # fmt: skip


@pytest.mark.parametrize("name", DENSE)
@pytest.mark.undisturbed
def test_dense_mark_up_is_read_in_seconds(name: str) -> None:
    report = answered(CIRCUIT + DENSE[name] + "\n\n`V_b = 8 V`\n")
    assert "agrees" in verdicts(report)


@pytest.mark.parametrize(
    "text",
    ["\n".join("  " * k + "- x" for k in range(300)) + "\n", "\n".join("> " * k + "x" for k in range(300)), "- " * 200 + "`V_b = 9 V`",
     "\n".join("$$" for _ in range(3000)), "\n".join("$$ a" for _ in range(3000)), "```\n" * 3001, "<!--\n" * 3000, "\n".join(f"[^{k}]: x" for k in range(3000)),
     "\n".join("| `V_b` |" for _ in range(3000)), "---\n" * 3000, "x\n=\n" * 3000],
    ids=["lists", "quotes", "items in a line", "display maths", "unclosed maths", "fences", "comments", "notes", "rows", "rules", "headings"],
)  # fmt: skip
@pytest.mark.undisturbed
def test_blocks_without_end_are_read_in_seconds(text: str) -> None:
    answered(CIRCUIT + text + "\n\n`V_b = 8 V`\n")


def test_nesting_beyond_what_the_page_keeps_loses_no_claim() -> None:
    for lead in ("> " * 100, "- " * 100, "> - " * 60, "**" * 100, "*_" * 60):
        assert verdicts(answered(CIRCUIT + f"{lead}`V_b = 9 V` and more\n")) == {"differs"}


# --- front matter ----------------------------------------------------------------------------------------------------

BOMB = "a: &a [x,x,x,x,x,x,x,x,x]\n" + "".join(
    f"{chr(98 + k)}: &{chr(98 + k)} [{','.join(['*' + chr(97 + k)] * 9)}]\n" for k in range(9)
)


@pytest.mark.parametrize(
    "front",
    [BOMB, "a: " + "[" * 20_000 + "]" * 20_000, "a: " + "{b: " * 5000, "a: b: c", "- a\n- b", "just words", "a: 'open",
     "a: 1\na: 2", "\ta: b", "check: [1, 2]", "check:\n  carry: many", "check:\n  nothing: 1", "? [a]\n: b", "a: \x07", "a: \ud800", "<<: *a", "a: *nobody", "%YAML 9.9"],
    ids=lambda v: repr(v)[:30],
)  # fmt: skip
def test_front_matter_that_cannot_be_read_is_a_finding_with_its_place_and_the_rest_is_checked(front: str) -> None:
    report = answered(f"---\n{front}\n---\n\n{CIRCUIT}`V_b = 8 V` and `V_b = 9 V`\n")
    told = [f for f in report.findings if f.kind in ("front-matter", "setting")]
    assert told and all(4 <= f.span.start <= 4 + len(front) for f in told)
    assert not report.clean
    assert [j.verdict for j in report.claims] == ["agrees", "differs"]


def test_a_field_of_megabytes_in_many_lines() -> None:
    answered("---\nsheet: X\nremark: >\n" + "  words and words\n" * 50_000 + "---\n\n" + CIRCUIT)


# --- circuits --------------------------------------------------------------------------------------------------------


def circuit(*lines: str, reference: str = "com") -> str:
    return "\n".join(
        [
            "```circuit",
            f"reference {reference}",
            *lines,
            "```",
            "",
            "`V_a = 3 V`, `I_R1 = 2 A`, `P_R1 = 1 W`, `R_{a,com} = 1 Ω`, `Isc_{a,com} = 1 A`",
            "",
        ]
    )


BROKEN = {
    "nothing": "```circuit\n```\n`V_a = 3 V`\n", "only a reference": circuit(), "all open": circuit(*(f"O{k}: open, n{k} to com" for k in range(300)), "R1: open, a to com"),
    "all short": circuit(*(f"K{k}: short, n{k} to n{k + 1}" for k in range(300)), "R1: short, a to n0"), "no reference": "```circuit\nR1: 1 Ω, a to b\n```\n`V_a = 3 V`\n",
    "a line that does not parse": circuit("R1: 1 Ω, a to com", "V1: 3 V, a to com", "R2 1 Ω a com"), "a loop of sources": circuit("V1: 3 V, a to com", "V2: 4 V, a to com", "R1: 1 Ω, a to com"),
    "to itself": circuit("R1: 1 Ω, a to a", "V1: 3 V, a to com"), "a name twice": circuit("R1: 1 Ω, a to com", "R1: 2 Ω, a to com"),
    "a control that is not there": circuit("V1: 3 V, a to com", "R1: 1 Ω, a to b", "E1: 2 * V_{x,y}, b to com"), "a singular control": circuit("E1: 1 * V_{a,com}, a to com", "R1: 1 Ω, a to com"),
    "values out of bounds": circuit("V1: 1e300 V, a to com", "R1: 1e-300 Ω, a to com"),
    "a value of many powers": circuit("V1: 9^9^9^9 V, a to com", "R1: 1 Ω, a to com"), "brackets": circuit("V1: 1 V, a to com", "R1: " + "(" * 900 + "1" + ")" * 900 + " Ω, a to com"),
    "a name of nine thousand letters": circuit("V1: 1 V, a to com", "R" * 9000 + ": 1 Ω, a to com"),
    "commas": circuit("V1: 3 V" + "," * 1500, "R1: 1 Ω, a to com"), "colons": circuit("R1" + ":" * 1500), "not closed": circuit("R1: 1 Ω, a to com").replace("```\n\n`", "\n`"),
     "a strange name": circuit("V1: 3 V, a to com").replace("```circuit", "```circuit 9 <b>"),
    "two thousand wrong lines": circuit(*["R1 = 4k7 between a and b"] * 2000),
}  # fmt: skip


@pytest.mark.parametrize("name", BROKEN)
def test_a_circuit_that_cannot_be_read_or_solved_leaves_its_claims_unchecked(name: str) -> None:
    report = answered(BROKEN[name])
    assert verdicts(report) == (
        {"unchecked"} if name != "not closed" else set()
    )  # its claims are lines of the block then
    assert any(f.severity == "error" for f in report.findings)
    assert not report.clean


@pytest.mark.parametrize(
    "text",
    [circuit("V1: 1e30 V, a to com", "R1: 1e-30 Ω, a to com"), circuit("I1: 1 A, com to a", "R1: 1 Ω, b to com"),
     circuit("V1: 3 V, a to com", "R1: 1 Ω, a to " + "n" * 900), circuit("V1: 3 V, a to com", "R1: 1 Ω, a to com") * 200],
    ids=["values far apart", "a cut of sources", "a node of nine hundred letters", "two hundred circuits"],
)  # fmt: skip
def test_odd_circuits_are_answered(text: str) -> None:
    report = answered(text)
    assert len(report.claims) == 5 * text.count("```circuit")


# --- strange characters ------------------------------------------------------------------------------------------------

STRANGE = {
    "nul": "\0", "bell": "\a", "escape": "\x1b[31m", "carriage return": "\r", "override": "\u202e", "isolate": "\u2066", "zero width": "\u200b", "mark": "\ufeff", "surrogate": "\ud800",
    "replacement": "\ufffd", "private": "\ue000", "astral": "\U0001f50c", "combining": "e\u0301", "noncharacter": "\uffff", "line separator": "\u2028", "next line": "\x85", "form feed": "\f",
    "arabic digit": "\u0663", "fullwidth": "３", "soft hyphen": "\u00ad", "html": "<script>alert(1)</script>", "typst": "#panic() ]] $", "entity": "&lt;", "backslash": "\\", "percent": "%s {0} %(x)s",
}  # fmt: skip


@pytest.mark.parametrize("name", STRANGE)
def test_strange_characters_anywhere_are_text_in_every_output(name: str) -> None:
    c = STRANGE[name]
    text = (
        f"---\nsheet: X-1\nsubject: a {c} b\n---\n\n# A {c} heading\n\n```circuit{c}\nreference com\nV1: 3 V, a to com\nR1: 1 Ω, a to com\n```\n\n"
        f"```circuit n{c}\nreference com\nV1: 3 V, a{c} to com\nR{c}1: 1 Ω, a{c} to com # {c}\n```\n\n"
        f"Text {c} `V_a{c} = 3 V` and `V_{{a{c}}} = 4 V {c}`, V_a = 3 V{c}.\n\n| {c} | total {c} |\n|---|---|\n| `V_a` | 3 {c} V |\n| `V_{c}` | 9 V |\n\n"
        f'```working\ngiven x{c} = 3 V from {c}\nx = {c}\ny{c} = 2 V + 2 V = 4 V # {c} accept 3 V for 4 V "{c}" by {c}\n```\n'
    )  # fmt: skip
    report = answered(text)
    every_output(report)
    page = to_html(report)
    assert "<script>alert" not in page
    if name != "carriage return":
        assert "\x1b[31m" not in to_terminal([report])
    assert "\u202e" not in to_terminal([report])


def every_output(report: Report) -> None:
    """No output fails on a report, and each is what it says it is."""
    with within(3 * LIMIT):
        assert json.loads(to_json([report], "0"))["sheets"] or not report.reading.is_calc
        assert isinstance(to_terminal([report], verbose=True), str)
        assert to_html(report).startswith("<!DOCTYPE html>")
        marked = to_markdown(report)
        assert unmark(marked) == report.reading.sheet.text
        again = check_text("sheet.md", marked)
        assert [j.verdict for j in again.claims] == [j.verdict for j in report.claims]


def test_line_ends_of_every_kind_give_the_same_answer() -> None:
    text = (
        working("V_b = 8 V", "V_b = 9 V", "  = 8 V")
        + "\nText `V_b = 8 V`.\n\n| | total |\n|---|---|\n| `V_b` | 7 V |\n"
    )
    expected = [j.verdict for j in answered(text).claims]
    assert expected == ["agrees", "differs", "agrees", "differs"]
    for end in ("\r\n", "\r"):
        report = answered(text.replace("\n", end))
        assert [j.verdict for j in report.claims] == expected
        assert [report.reading.sheet.line_column(j.claim.span.start) for j in report.claims] == [
            answered(text).reading.sheet.line_column(j.claim.span.start) for j in answered(text).claims
        ]
    assert [j.verdict for j in answered("\ufeff" + text).claims] == expected


def test_empty_and_nearly_empty_sheets() -> None:
    for text in (
        "",
        "\n",
        "\ufeff",
        "\0",
        "---",
        "---\n---",
        "---\nsheet: X\n---",
        "```circuit",
        "```working",
        "```working\n```",
        "`=`",
        "$$",
        "|",
        "a\n-\n",
        "\r",
        "sheet: x",
    ):
        every_output(answered(text))


# --- laws over any text ----------------------------------------------------------------------------------------------

LINES = [
    "```circuit", "```circuit two", "```working", "```", "~~~", "reference com", "Vb: 12 V, a to com", "R1: 1 kΩ, a to b", "R2: 2 kΩ ±5 %, b to com, max 1 W", "Ia: 3 mA, com to b",
    "E1: 2 * V_{a,b}, c to com", "R1: 4k7, b to c", "U1: op-amp, plus a, minus b, out c", "case hot: R1 open", "given x = 3 V ±2 %", "given y = x + 1 V from TS-1", "V_b = 8 V", "= 8 V",
    "I_R1 = V_a/R1", "  = 12 V/1 kΩ = 12 mA", "P_R1 ≤ 1 W # accept 1 W for 2 W \"x\" by Q", "x = y", "| | due to `Vb` | total |", "|---|---|---|", "| `V_b` | 8 V | 9 V |", "| `I_R1` (mA) | 4 | — |",
    "- `V_b = 8 V`", "> `V_b ≈ 8 V`", "V_b = 8 V in prose", "$V_b = 8\\,\\mathrm{V}$", "$$", "<!-- calccheck: accept 8 V for 9 V \"r\" by Q until 2030-01-01 -->", "---", "sheet: X-1", "# Title `R1 = 1 kΩ`",
    "*`V_{a,b}` = 4 V*", "[link `V_b = 1 V`](x)", "[^1]: `V_b = 8 V`", "text[^1]", "", "    indented = 3", "1. one", "   two `V_b = 8.0 V`", "\\`V_b = 8 V`", "``V_b = `8 V``", "V\\_b = 8 V",
]  # fmt: skip
PAGES = st.lists(st.one_of(st.sampled_from(LINES), st.text(max_size=20)), max_size=25).map("\n".join)


@settings(max_examples=120, deadline=None)
@given(st.one_of(PAGES, st.text(max_size=200)))
def test_any_text_gets_a_report(text: str) -> None:
    answered(text)


@settings(max_examples=25, deadline=None)
@given(PAGES)
def test_any_report_goes_into_every_output(text: str) -> None:
    every_output(answered(text))


CODE_ATOMS = [
    "V_b", "V_{a,b}", "R1", "x", "12", "3.3", "1e-3", " V", " kΩ", "°C", "%", "+", "−", "×", "/", "^2", "²", "∥", "(", ")", "=", " = ", "≈", "<", "≥", "…", "±", " due to Vb", " without R1", "given ",
    "accept ", "#", "\\", "*", "_", "{", "}", "<b>", "&lt;", "$", "[", "]", "~", "!", "5",
]  # fmt: skip
CODES = st.lists(st.sampled_from(CODE_ATOMS), min_size=1, max_size=10).map(lambda parts: "".join(parts).strip()).filter(
    lambda code: re.search(r"[=≈<≥]", code) is not None
)  # fmt: skip
PLACES = [
    "Words {} more words.",
    "# Heading {}",
    "- item {}",
    "> quote {}",
    "1. > deep {}",
    "*emphasis {} ends*",
    "**{}**",
    "[link {}](target)",
    "| {} | x |\n|---|---|\n| y | z |",
    "| a | b |\n|---|---|\n| c | {} |",
]


@settings(max_examples=120, deadline=None)
@given(st.lists(st.tuples(CODES, st.sampled_from(PLACES)), min_size=1, max_size=5))
def test_every_code_with_a_relation_is_a_claim(placed) -> None:
    """Not one is passed over, wherever it stands and whatever it says."""
    text = CIRCUIT + "\n\n".join(place.format(f"`` {code} ``") for code, place in placed) + "\n"
    report = answered(text)
    found = [j.claim for j in report.claims if j.claim.place == "code"]
    assert [c.text for c in found] == [code for code, _ in placed]
    assert [text[c.span.start : c.span.end] for c in found] == [f"`` {code} ``" for code, _ in placed]
