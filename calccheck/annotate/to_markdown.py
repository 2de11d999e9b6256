"""The sheet with every claim marked where it stands, as Markdown that is again a valid sheet (sheet-language.md, section 8)."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass

from calccheck.annotate.marks import MARKS
from calccheck.annotate.record import LIMITS, Entry, entries, headline
from calccheck.annotate.visible import one_line
from calccheck.document import Block, blocks
from calccheck.edits import Edit, put_in, unmark
from calccheck.model import Judged, Report, Step
from calccheck.printing import shown
from calccheck.source import Sheet, Span

__all__ = ["to_markdown", "unmark"]

_ENTITY = re.compile(r"&#?\w+;")
_SPECIAL = re.compile(r"[\\`*<\[\]|$~]|(?<!\w)_|_(?!\w)|&(?=#?\w+;)")


def to_markdown(report: Report) -> str:
    """The marked sheet; a file that is no calc sheet as it is.

    ``report`` is of a text from which earlier marks were taken out (``edits.unmark``). ``unmark`` of the result is that text.
    """
    sheet = report.reading.sheet
    if not report.reading.is_calc:
        return sheet.text
    rows = entries(report)
    surroundings = _surroundings(report.reading.page)
    edits: list[Edit] = []
    for judged, entry in zip(report.claims, rows, strict=False):
        edits += _edits(judged, entry, sheet, surroundings)
    return put_in(sheet.text, edits, _closing(report, rows[len(report.claims) :]))


@dataclass(frozen=True, slots=True)
class _Surroundings:
    """What a reference may not stand in the middle of: display mathematics, and links, emphasis, code and other markup."""

    maths: tuple[Span, ...]
    markup: tuple[Span, ...]


def _surroundings(page: tuple[Block, ...]) -> _Surroundings:
    every = list(blocks(page))
    maths = tuple(b.span for b in every if b.kind == "math")
    return _Surroundings(maths, tuple(i.span for b in every for i in b.inlines if i.kind != "text"))


def _edits(judged: Judged, entry: Entry, sheet: Sheet, around: _Surroundings) -> Iterator[Edit]:
    claim = judged.claim
    if claim.place in ("working", "circuit"):
        yield from _comments(judged, entry, sheet)
        return
    display = next((m for m in around.maths if m.start <= claim.span.start and claim.span.end <= m.end), None)
    if display is not None:  # whose rows may be claims of their own: all marks stand below it
        yield Edit(max(display.start, display.end - 1), escaped(claim_words(entry)), "below")
    else:
        yield Edit(_behind(claim.span, sheet.text, around.markup), escaped(claim_words(entry)))


def _behind(span: Span, text: str, markup: tuple[Span, ...]) -> int:
    """Where a reference stands: behind the claim, and behind the link, emphasis or code that it ends in."""
    at = span.start + len(text[span.start : span.end].rstrip())
    entity = _ENTITY.match(text, at - 1) if at else None
    if entity:
        at = entity.end()
    return next((m.end for m in markup if m.start < at < m.end), at)


# --- in fences ------------------------------------------------------------------------------------------------------


def _comments(judged: Judged, entry: Entry, sheet: Sheet) -> Iterator[Edit]:
    """A comment on every line on which a step ends; the claim's own words stand where its verdict was decided."""
    by_line: dict[int, list[Step]] = {}
    for step in judged.steps:
        by_line.setdefault(_last_line(step.span, sheet), []).append(step)
    last = _last_line(judged.claim.span, sheet)
    decided = [line for line, steps in by_line.items() if any(s.verdict == judged.verdict for s in steps)]
    chosen = last if last in decided or not decided else decided[0]
    if judged.verdict == "differs" and decided:
        chosen = decided[0]
    for line in sorted({*by_line, chosen}):
        words = claim_words(entry) if line == chosen else _step_words(_worst(by_line[line]))
        yield Edit(sheet.line_starts[line - 1], words, "comment")


def _last_line(span: Span, sheet: Sheet) -> int:
    return sheet.line_column(max(span.start, span.end - 1))[0]


def _worst(steps: list[Step]) -> Step:
    order = list(MARKS)
    return min(steps, key=lambda s: order.index(s.verdict))


def _step_words(step: Step) -> str:
    label = MARKS[step.verdict].label
    if step.message:
        return one_line(f"{label}: {step.message}")
    if step.amount is None:
        return label
    return one_line(f"{label}: {shown(step.amount)}")


# --- words ----------------------------------------------------------------------------------------------------------


def claim_words(entry: Entry) -> str:
    """Sign, word, the recomputed value and what is to be said, as one line of plain text."""
    said = [entry.message] if entry.kind == "accepted" else list(entry.told)
    if entry.computed and not said:
        said.append(f"recomputed {entry.computed}")
    said += [f"{MARKS['caution'].label}: {c}" for c in entry.cautions]
    said = [_begun(s) if k else s for k, s in enumerate(said)]
    sentences = [s if s.endswith((".", "!", "?")) or s == said[-1] else f"{s}." for s in said if s]
    return one_line(f"{MARKS[entry.kind].label}{': ' if sentences else ''}{' '.join(sentences)}")


def _begun(said: str) -> str:
    """A slip as a sentence of its own; what begins with a name keeps its letter."""
    return said[0].upper() + said[1:] if said.startswith("consistent with ") else said


def _closing(report: Report, findings: tuple[Entry, ...]) -> list[str]:
    """What ends the list of notes: the verdict in a sentence, and each finding with its line in the sheet."""
    summary = f"**Checked by calccheck.** {escaped(headline(report))} {LIMITS[-1]}"
    lines = [
        f"- {MARKS[f.kind].label}, line {f.line}: {escaped(one_line(' '.join(f.told)))}" for f in findings if not f.echo
    ]
    return [summary, *([""] if lines else []), *lines]


def escaped(words: str) -> str:
    """Plain words as Markdown; what stands between paired backticks stays code."""
    runs = words.split("`")
    if len(runs) % 2 == 0:
        return _SPECIAL.sub(r"\\\g<0>", words)
    return "`".join(run if k % 2 else _SPECIAL.sub(r"\\\g<0>", run) for k, run in enumerate(runs))
