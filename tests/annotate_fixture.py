"""Reports made by hand, so that the tests of the outputs do not rest on the judging they show."""

from __future__ import annotations

from calccheck.arithmetic import Amount, Doubt
from calccheck.model import CircuitFigures, Claim, Finding, Judged, Problem, Reading, Report, Settings, Slip
from calccheck.read.expression import parse_chain
from calccheck.read.markdown import read_page
from calccheck.rules import RULES
from calccheck.source import Piece, Sheet, Span, joined, whole


def report_of(
    text: str, *judged: Judged, findings: tuple[Finding, ...] = (), name: str = "sheets/TS-101.md", **more: object
) -> Report:
    """A report on a sheet with these verdicts."""
    sheet = Sheet(name, text)
    front = text.split("---\n")[1] if text.startswith("---\n") else ""
    title = {k.strip(): v.strip() for k, _, v in (line.partition(":") for line in front.splitlines())}
    claims = tuple(j.claim for j in judged)
    reading = Reading(sheet, read_page(text), True, title, Settings(), (), claims, findings, 0)
    return Report(reading, tuple(judged), findings, **more)  # type: ignore[arg-type]


def said(text: str, needle: str, verdict: str, nth: int = 0, **more: object) -> Judged:
    """The verdict on the claim that stands at the nth occurrence of these words, which may run over lines."""
    start = -1
    for _ in range(nth + 1):
        start = text.index(needle, start + 1)
    span = Span(start, start + len(needle))
    place = more.pop("place", "working")
    chain = needle.removeprefix("given ")
    try:
        members = parse_chain(_joined_lines(chain, start + len(needle) - len(chain)))
    except Doubt as doubt:
        members, problem = (), Problem(str(doubt), span)
    else:
        problem = None
    claim = Claim(needle, span, place, 0, members, verdict == "given", problem=problem)  # type: ignore[arg-type]
    return Judged(claim, verdict, **more)  # type: ignore[arg-type]


def _joined_lines(text: str, start: int) -> Piece:
    """A claim's lines as its reader joins them, every character with its place."""
    pieces, at = [], start
    for line in text.split("\n"):
        pieces.append(whole(line, at))
        at += len(line) + 1
    return joined(pieces, " ")


def finding(text: str, needle: str, kind: str, message: str, suggestion: str = "") -> Finding:
    """A finding at the first occurrence of these words."""
    start = text.index(needle)
    return Finding(kind, RULES[kind].severity, message, Span(start, start + len(needle)), suggestion)


def amount(value: float, dimension: tuple[int, ...]) -> Amount:
    """A value in SI."""
    return Amount(value, dimension)


# An invented sheet with every kind of block and every verdict. The numbers were worked by hand: two 6 Ω and 3 Ω resistors
# across 9 V carry 1 A, so V_b = 3 V, P_R1 = 6 W, P_R2 = 3 W.
EXAMPLE = """---
project: Example project
subject: Two resistors in series
sheet: EX-7
revision: C
by: AB
date: 2026-03-04
hazard: Hot surfaces
---

# Divider & its powers

Some *plain* words **before** `V_b = 3 V` and then `I_R1 = 1.50 A`, where the wrong one stands.

```circuit
reference com
Va: 9 V,   a to com   # supply
R1: 6 Ω,   a to b
R2: 3 Ω,   b to com   # measured
```

```working
given Vmin = 2.5 V      # from the data sheet
P_R1 = I_R1² × R1
     = (1 A)² × 6 Ω
     = 7 W              # too much
```

|       | value  |
|-------|--------|
| `V_b` | 3.0 V  |
| `V_a` | 8.8 V  |

- first item
- second item, where V_b is 3.3 V in plain prose

> quoted: `P_R2 = 2.97 W`

The end.
"""


def example() -> Report:
    """The report on ``EXAMPLE``: one claim of every verdict, a caution, an error and a caution of the sheet."""
    s = EXAMPLE
    volts, amperes, watts = (1, 0, 0, 0, 0), (0, 1, 0, 0, 0), (1, 1, 0, 0, 0)
    working = "P_R1 = I_R1² × R1\n     = (1 A)² × 6 Ω\n     = 7 W"
    return report_of(
        s,
        said(s, "V_b = 3 V", "agrees", place="code", basis="circuit", computed=amount(3.0, volts), deviation=0.0),
        said(
            s, "I_R1 = 1.50 A", "differs", place="code", basis="circuit", claimed=amount(1.5, amperes),
            computed=amount(1.0, amperes), deviation=0.5, message="I_R1 is not what the circuit gives.",
            slips=(Slip("sources", "The number follows if R2 is left out."),),
        ),
        said(s, "given Vmin = 2.5 V", "given"),
        said(
            s, working, "differs", basis="circuit", claimed=amount(7.0, watts), computed=amount(6.0, watts),
            deviation=1 / 6, message="The last member is not the product before it.",
        ),
        said(s, "3.0 V", "rounded", place="table", basis="circuit", computed=amount(3.0, volts), message="carried"),
        said(s, "8.8 V", "accepted", place="table", basis="circuit", computed=amount(9.0, volts), message="measured, TR-7"),
        said(s, "V_b is 3.3 V", "unchecked", place="prose", message="put it in code"),
        said(
            s, "P_R2 = 2.97 W", "agrees", place="code", basis="working", computed=amount(2.97, watts),
            cautions=("coarse: says little",),
        ),
        findings=(
            finding(s, "R1: 6 Ω", "letter", "R1 is well named, this is an invented caution"),
            finding(s, "R2: 3 Ω", "structure", "an invented error"),
        ),
        figures=(CircuitFigures("", 15, 3, 3, 3.1e-16, 1.0e-16, 0.0),),
    )  # fmt: skip


# Everything that means something to typst, HTML, Markdown, PDF or a terminal; what is unseen; what no font shows.
HOSTILE = """---
project: "#panic(1) $x$ <b>bold</b> & 'q' \u202e\u2066bidi"
subject: "]) #let x = 1 [ 漢字 \U0001f600"
sheet: '#import "@preview/x:1"'
by: <script>alert(1)</script>
date: no date
---

# Head #emph[x] \\\\ <script>alert(1)</script> & "quotes" ] ) } \U0001f600 \u202eabc\u202c

Text #panic("x") ] [ ) ( } { `#code("x") ] $` <b onclick="x">bold</b> &amp; \\# end\u0007bell e\u0301 soft\u00ad \u200bhidden.

`V_b = 8.1 V` and `V_<i> = "]#panic()`.

[click](javascript:alert(1)) [c2](annot:c1) [c3](https://e.org/"onmouseover="x) ![i](data:text/html,<script>) <!-- c -->

```circuit #bad "info
reference com   # ] #panic() $ \\ " \U0001f600 \u202e
```

```working
x = 1 V # comment "]) #panic()
"]#panic()
```

| `V_b` | #x ] |
|---|---|
| `V_b = 9 V` | ] ) #panic() $x$ |

<div onclick="x">#panic()</div>

"""


def hostile() -> Report:
    """The report on ``HOSTILE``, hostile words in every place that a report has."""
    s = HOSTILE
    nasty = 'no "]) #panic() <b>&amp;</b> \\ $x$ \u202e \U0001f600'
    return report_of(
        s,
        said(s, "V_b = 8.1 V", "differs", place="code", message=nasty, slips=(Slip("x", nasty),)),
        said(s, 'V_<i> = "]#panic()', "unchecked", place="code", message=nasty),
        said(s, "x = 1 V", "unchecked", message=nasty, cautions=(nasty,)),
        said(s, "V_b = 9 V", "agrees", place="table", basis="circuit"),
        findings=(finding(s, "reference com", "circuit-line", f"here: {nasty}", nasty),),
        name='nasty "]#.md',
        figures=(CircuitFigures(nasty, 3, 1, 1, None, None, None),),
    )
