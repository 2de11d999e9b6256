"""What an editor shows of a claim under the pointer: the claim, its verdict, the recomputed value and its parts by source."""

from __future__ import annotations

from dataclasses import replace

from calccheck.annotate.marks import MARKS
from calccheck.annotate.record import entries
from calccheck.annotate.remarks import Remark, remarks
from calccheck.annotate.visible import one_line
from calccheck.annotate.working_table import working_table
from calccheck.arithmetic import Value
from calccheck.model import Judged, Report, WorkedQuantity

_AGAINST = {"circuit": "held against the circuit", "working": "held against the sheet's own working", "": ""}


def claim_at(report: Report, offset: int) -> Judged | None:
    """The claim that the character at an offset of the report's sheet belongs to, the shortest where several do."""
    here = [j for j in report.claims if j.claim.span.start <= offset < j.claim.span.end]
    return min(here, key=lambda j: j.claim.span.end - j.claim.span.start, default=None)


def to_hover(report: Report, judged: Judged) -> str:
    """Lines of plain text in columns, safe to show; at the end what each source brings, where several bring it about."""
    entry = entries(report)[report.claims.index(judged)]
    label = MARKS[judged.verdict].label
    against = _AGAINST[judged.basis]
    lines = [one_line(entry.text), f"{label}, {against}" if against else label]
    if entry.computed:
        lines.append(_row("recomputed", entry.computed))
    if entry.deviation:
        lines.append(_row("deviation", entry.deviation))
    for remark in (r for r in remarks(report) if r.judged is judged):
        lines += _told(remark)
    return "\n".join([*lines, *_by_source(judged)])


def _by_source(judged: Judged) -> list[str]:
    """The table of the parts and their sum."""
    if not judged.parts:
        return []
    total: Value = sum((a.value for _, a in judged.parts[1:]), judged.parts[0][1].value)
    worked = WorkedQuantity(judged.quantity, judged.parts, replace(judged.parts[0][1], value=total), None, 0.0)
    return ["", *working_table(worked).rstrip("\n").split("\n")]


def _told(remark: Remark) -> list[str]:
    """What the verdict's sentence says, what may have gone wrong and what to write instead; a caution as such."""
    if remark.kind == "caution":
        return [_row("caution", remark.message)]
    said = [] if remark.stands and not remark.entry.message else [remark.message]
    likely = [_row("likely", slip) for slip in remark.likely]
    return [*said, *likely, *([_row("write", remark.write)] if remark.write else [])]


def _row(name: str, text: str) -> str:
    return f"{name:<12}{one_line(text)}"
