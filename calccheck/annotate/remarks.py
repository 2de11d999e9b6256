"""Everything there is to say about a sheet as single remarks, worst first, for outputs that other programs read."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

from calccheck.annotate.marks import MARKS
from calccheck.annotate.record import Entry, entries, value_apart
from calccheck.annotate.visible import one_line
from calccheck.model import Judged, Report
from calccheck.rules import RULES, Rule
from calccheck.source import Span

WRITE = "Write: "  # begins the sentence of a record's entry that says what to write instead
BESIDE = "claim"  # the rule of what is said beside a verdict that stands

REMARK_RULES: dict[str, Rule] = {
    "differs": Rule("error", "A claim differs from what was recomputed", "how-it-checks.md#verdicts"),
    "unchecked": Rule("error", "A claim could not be checked", "how-it-checks.md#verdicts"),
    "accepted": Rule("note", "A claim that differs is accepted under a waiver", "sheet-language.md#waivers"),
    "rounded": Rule("note", "A claim stands within what its own rounding explains", "how-it-checks.md#verdicts"),
    "agrees": Rule("note", "A claim stands", "how-it-checks.md#verdicts"),
    "given": Rule("note", "A value is given and was held against nothing", "sheet-language.md#givens"),
    BESIDE: Rule("caution", "A claim that stands gives cause for a caution", "how-it-checks.md#cautions"),
    **RULES,
}
"""The kinds of remark: the verdicts of claims, what is said beside them, and every kind of finding."""

_ORDER = {kind: k for k, kind in enumerate(MARKS)}


@dataclass(frozen=True, slots=True)
class Remark:
    """One thing to say; every text is one line without a full stop, safe to show.

    ``rule``: a key of ``REMARK_RULES``; ``kind``: a key of ``MARKS``. ``span``: of a chain that differs, its first step that
    fails; ``further``: the others. ``title``: the quantity of a claim, the rule of a finding. ``recomputed``: the value, where
    the message does not bear it. ``likely``: slips, likeliest first. ``write``: what to write instead. ``judged``: the claim
    that it is about, if it is about one.
    """

    rule: str
    kind: str
    span: Span
    title: str
    message: str
    entry: Entry
    recomputed: str = ""
    likely: tuple[str, ...] = ()
    write: str = ""
    further: tuple[tuple[Span, str], ...] = ()
    judged: Judged | None = None

    @property
    def stands(self) -> bool:
        """Whether it says of a claim that it stands."""
        return self.kind in ("agrees", "rounded")

    @property
    def rank(self) -> tuple[int, float]:
        """What to sort by: the worst first, among what differs the largest deviation first."""
        return _ORDER[self.kind], -self.entry.size if self.kind == "differs" else 0.0


def remarks(report: Report) -> list[Remark]:
    """The remarks on one sheet, worst first; a finding that says what a claim's message says already is left out."""
    rows = entries(report)
    split = len(report.claims)
    found = [r for row, judged in zip(rows[:split], report.claims, strict=True) for r in _on_claim(row, judged)]
    for row, finding in zip(rows[split:], report.findings, strict=True):
        if not row.echo:
            message, write = one_line(finding.message), one_line(finding.suggestion)
            found.append(Remark(finding.kind, row.kind, row.span, one_line(row.text), message, row, write=write))
    return sorted(found, key=lambda r: (r.rank, r.span.start))


def ranked(reports: Sequence[Report]) -> list[tuple[Report, Remark]]:
    """The remarks on all sheets, worst first, each with the report it belongs to."""
    every = [(report, remark) for report in reports for remark in remarks(report)]
    return sorted(every, key=lambda pair: pair[1].rank)


def _on_claim(row: Entry, judged: Judged) -> Iterator[Remark]:
    """The verdict, and each caution beside it as a remark of its own."""
    title = one_line(judged.quantity or row.text)
    alone = replace(row, cautions=())
    failing = [s for s in judged.steps if s.verdict == "differs"] if judged.verdict == "differs" else []
    failing.sort(key=lambda s: s.span.start)
    yield Remark(
        rule=row.kind,
        kind=row.kind,
        span=failing[0].span if failing else row.span,
        title=title,
        message=_said(row),
        entry=alone,
        recomputed=one_line(row.computed) if value_apart(alone) else "",
        likely=tuple(one_line(slip.text) for slip in judged.slips) if judged.verdict == "differs" else (),
        write=next((one_line(t.removeprefix(WRITE)) for t in row.told if t.startswith(WRITE)), ""),
        further=tuple((s.span, one_line(s.message)) for s in failing[1:]),
        judged=judged,
    )
    for caution in judged.cautions:
        yield Remark(BESIDE, "caution", row.span, title, one_line(caution), alone, judged=judged)


def _said(row: Entry) -> str:
    """The message; of an assumption the claim before it; of a verdict that came without a sentence the claim and its rule."""
    rule = REMARK_RULES[row.kind].title
    said = row.message or f"{rule[0].lower()}{rule[1:]}"
    return one_line(f"{row.text}: {said}" if row.kind == "given" or not row.message else said)
