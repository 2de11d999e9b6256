"""The check record in words: one entry for every claim and finding, and what else a reviewer signs for.

Both printed outputs (page and PDF) set these rows; neither words anything by itself.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field

from calccheck.annotate.marks import MARKS
from calccheck.annotate.maths_words import plain
from calccheck.annotate.record_values import computed_value, deviation_text, printed_value
from calccheck.annotate.sentences import names_in, sentence
from calccheck.model import Finding, Judged, Report
from calccheck.rules import RULES
from calccheck.source import Span

NOTED = ("differs", "unchecked", "error")  # what is to be mended: margin note and comment
BESIDE = (*NOTED, "caution", "accepted")  # what a reviewer should see where it stands

LIMITS = (
    "Every claim listed as agreeing was recomputed from the circuit and the working as they stand in this sheet. Such a "
    "check cannot show:",
    (
        "that the circuit in the sheet is the circuit that is built or will be built;",
        "that the inputs are right: source and part values, tolerances, and everything listed as given;",
        "that the models fit: ideal sources, linear parts and a steady state, in the range where they are used;",
        "that the criteria are the right ones: limits, ratings, margins and the cases that were chosen;",
        "what the sheet leaves out: loads, faults, environments and hazards of which it says nothing.",
    ),
    "This is a check of arithmetic and circuit laws. It is not an approval. Local codes and the judgement of licensed "
    "practice decide.",
)
"""What such a check cannot show: an opening sentence, the points, and a closing one."""


@dataclass(frozen=True, slots=True)
class Entry:
    """One row of the record.

    ``key``: its anchor, unique in the sheet; ``number``: as printed beside the mark; ``kind``: a key of ``MARKS``.
    ``size``: the deviation without its sign. ``told``: ``message`` and what else is to be said, a phrase or two each.
    ``cautions``: said beside a verdict that stands. ``names``: words that are names in this sheet.
    """

    key: str
    number: str
    kind: str
    span: Span
    line: int
    text: str
    message: str
    told: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()
    printed: str = ""
    computed: str = ""
    deviation: str = ""
    size: float = 0.0
    basis: str = ""
    echo: bool = False
    names: frozenset[str] = field(default=frozenset(), repr=False)

    @property
    def beside(self) -> bool:
        """Whether a note stands beside the mark."""
        return not self.echo and (self.kind in BESIDE or bool(self.cautions))

    @property
    def to_mend(self) -> bool:
        """Whether it is commented upon, as something to be mended."""
        return not self.echo and self.kind in NOTED

    @property
    def note_kind(self) -> str:
        """What its note says: a caution beside a verdict that stands is a caution."""
        return "caution" if self.cautions and self.kind not in BESIDE else self.kind

    def sentences(self, phrases: Iterable[str]) -> list[str]:
        """Phrases about this entry as sentences."""
        return [sentence(plain(p) if "\\" in self.text else p, self.names) for p in phrases]


def entries(report: Report) -> tuple[Entry, ...]:
    """An entry for each claim, numbered in the order of the sheet, then for each finding."""
    names = names_in(report)
    claims = tuple(_claim(report, k, judged, names) for k, judged in enumerate(report.claims, 1))
    said = {e.message for e in claims}
    return claims + tuple(_finding(report, k, finding, said, names) for k, finding in enumerate(report.findings, 1))


def _claim(report: Report, k: int, judged: Judged, names: frozenset[str]) -> Entry:
    claim = judged.claim
    told = [judged.message, *(slip.text for slip in judged.slips)]
    if claim.problem and claim.problem.suggestion and claim.problem.suggestion not in judged.message:
        told.append(f"Write: {claim.problem.suggestion}")
    return Entry(
        key=f"c{k}",
        number=str(k),
        kind=judged.verdict,
        span=claim.span,
        line=report.reading.sheet.line_column(claim.span.start)[0],
        text=" ".join(claim.text.split()),
        message=judged.message,
        told=tuple(t for t in told if t),
        cautions=judged.cautions,
        printed=printed_value(judged),
        computed=computed_value(judged),
        deviation=deviation_text(judged),
        size=abs(judged.deviation or 0.0),
        basis=judged.basis,
        names=names,
    )


def _finding(report: Report, k: int, finding: Finding, said: set[str], names: frozenset[str]) -> Entry:
    title = RULES[finding.kind].title if finding.kind in RULES else finding.kind
    line = report.reading.sheet.line_column(finding.span.start)[0]
    told = (finding.message, f"Write: {finding.suggestion}") if finding.suggestion else (finding.message,)
    echo = finding.message in said
    return Entry(
        f"f{k}", f"F{k}", finding.severity, finding.span, line, title, finding.message, told, echo=echo, names=names
    )


def note_lines(entry: Entry) -> list[str]:
    """What a note beside a mark says, sentence by sentence; the recomputed value first, unless the message bears it."""
    deviation = f" ({entry.deviation})" if entry.deviation else ""
    found = [f"recomputed {entry.computed}{deviation}"] if value_apart(entry) else []
    return entry.sentences((*found, *entry.told, *entry.cautions))


def value_apart(entry: Entry) -> bool:
    """Whether the recomputed value of a claim that differs is to be said besides the message, which does not bear it."""
    borne = entry.computed in entry.message or (entry.deviation != "" and entry.deviation in entry.message)
    return entry.kind == "differs" and not borne


def comment_text(entry: Entry) -> str:
    """An entry in a few lines of plain text, for a comment."""
    found = f"recomputed {entry.computed}" if entry.computed else ""
    off = f"deviation {entry.deviation}" if entry.deviation else ""
    lines = [
        f"{MARKS[entry.kind].label} (no. {entry.number}, line {entry.line})",
        entry.text,
        ", ".join(t for t in (found, off) if t),
        *entry.sentences((*entry.told, *entry.cautions)),
    ]
    return "\n".join(line for line in lines if line)


# --- the parts around the entries -----------------------------------------------------------------------------------


def worst_first(rows: Iterable[Entry]) -> list[Entry]:
    """What is to be mended or to be weighed, worst first; among what differs the largest deviation first."""
    order = list(MARKS)
    wanted = [e for e in rows if e.beside or e.kind == "note"]
    return sorted(wanted, key=lambda e: (order.index(e.kind), -e.size, e.line))


def headline(report: Report) -> str:
    """The verdict in one sentence; what is given is no claim that could stand or fall."""
    n = report.counts
    total = len(report.claims) - n["given"]
    errors = sum(f.severity == "error" for f in report.findings)
    parts = [f"{n['differs']} of {_claims(total)} differ{'s' if n['differs'] == 1 else ''}"] if n["differs"] else []
    if n["unchecked"]:
        parts.append(f"{n['unchecked']} could not be checked")
    if errors:
        parts.append(f"{errors} error{'s' if errors > 1 else ''} in the sheet")
    if not parts:
        parts.append(_standing(total, n["accepted"]))
    if n["given"]:
        parts.append("1 value is given" if n["given"] == 1 else f"{n['given']} values are given")
        parts[-1] += ", checked against nothing"
    return "; ".join(parts) + "."


def _standing(total: int, accepted: int) -> str:
    if not total:
        return "The sheet makes no claims"
    stand = "The one claim stands" if total == 1 else f"All {total} claims stand"
    return stand + (f", {accepted} of them under a waiver" if accepted else "")


def _claims(n: int) -> str:
    return f"{n} claim{'' if n == 1 else 's'}"
