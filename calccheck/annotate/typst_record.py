"""The front summary and the closing check record, as typst source."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from calccheck.annotate.marks import MARKS
from calccheck.annotate.pictures import Shown, totals
from calccheck.annotate.record import BESIDE, LIMITS, Entry, headline, note_lines, worst_first
from calccheck.annotate.record_parts import (
    BASES,
    MEANINGS,
    SIGNATORIES,
    TITLE_FIELDS,
    counts,
    digest,
    figure_cells,
    given_notes,
    settings_line,
    signature_rows,
    waiver_line,
)
from calccheck.annotate.typst_pictures import glance, large_drawings
from calccheck.annotate.typst_text import literal, shown
from calccheck.model import Report

_MOST_IN_SUMMARY = 14


@dataclass(frozen=True, slots=True)
class Words:
    """What the two parts are made of. ``placed``: keys of the entries that have a mark on the page."""

    report: Report
    rows: tuple[Entry, ...]
    placed: set[str]
    missing: frozenset[str]
    pictures: Mapping[int, Sequence[Shown]] = field(default_factory=dict)

    def say(self, text: str) -> str:
        """Text as typst markup."""
        return shown(text, self.missing)


# --- summary --------------------------------------------------------------------------------------------------------


def summary(w: Words) -> str:
    """Verdict, counts by basis, the worst first."""
    worst = worst_first(w.rows)
    listed = "".join(_worst_row(w, e) for e in worst[:_MOST_IN_SUMMARY])
    more = len(worst) - _MOST_IN_SUMMARY
    rest = f"[{w.say(f'{more} more: see the check record.')}]" if more > 0 else "none"
    table = "".join(
        f"({literal(verdict)}, {_numbers(row)}, [{w.say(MEANINGS[verdict])}])," for verdict, row in counts(w.report)
    )
    return (
        f"#summary({literal(w.report.verdict)}, [{w.say(headline(w.report))}], ({table}), ({_others(w)}), "
        f"({listed}), {rest}, {w.report.reading.not_read})\n\n"
    )


def _numbers(row: Sequence[int]) -> str:
    return "(" + "".join(f"{literal(str(n) if n else '–')}," for n in row) + ")"


def _others(w: Words) -> str:
    """Front matter that the title block does not show."""
    lines = [(k, v) for k, v in w.report.reading.title.items() if k not in TITLE_FIELDS]
    return "".join(f"([{w.say(k)}], [{w.say(v)}])," for k, v in lines)


def _worst_row(w: Words, e: Entry) -> str:
    kind = "caution" if e.cautions and e.kind not in BESIDE else e.kind
    target = literal(e.key if e.key in w.placed else "r-" + e.key)
    message = e.message or (e.cautions[0] if e.cautions else "")
    return (
        f"({literal(kind)}, {literal(e.number)}, {target}, {literal(str(e.line))}, [{w.say(e.text)}], "
        f"[{w.say(e.computed)}], [{w.say(e.deviation)}], [{w.say(message)}]),"
    )


# --- record ---------------------------------------------------------------------------------------------------------


def record(w: Words) -> str:
    """All entries, the circuits' figures, givens, waivers, what the check cannot show, and boxes to sign."""
    claims = "".join(_record_row(w, e) for e in w.rows if e.key[0] == "c")
    findings = "".join(_finding_row(w, e) for e in w.rows if e.key[0] == "f")
    opening, points, closing = LIMITS
    listed = "".join(f"[{w.say(p)}]," for p in points)
    signatories = "".join(f"{literal(s)}," for s in SIGNATORIES)
    return (
        f"#record-head({literal(digest(w.report))}, [{w.say(settings_line(w.report.reading.settings))}])\n"
        f"#record-claims(({claims}))\n#record-findings(({findings}))\n"
        f"{glance(totals(w.report, w.missing), {e.key: e.number for e in w.rows}, w.missing)}"
        f"#record-circuits(({_circuits(w)}))\n#record-givens(({_givens(w)}))\n#record-waivers(({_waivers(w)}))\n"
        f"#record-limits([{w.say(opening)}], ({listed}), [{w.say(closing)}])\n#signatures(({_signed(w)}), ({signatories}))\n"
        + large_drawings(w.pictures, w.missing)
    )


def _record_row(w: Words, e: Entry) -> str:
    told = "".join(f"[{w.say(t)}]," for t in e.told if e.kind != "given")  # the list of givens says it
    cautions = "".join(f"[{w.say(t)}]," for t in e.cautions)
    basis = BASES.get(e.basis, e.basis)
    return (
        f"({literal(e.key)}, {_bool(e.key in w.placed)}, {literal(e.kind)}, {literal(e.number)}, {literal(str(e.line))}, "
        f"[{w.say(e.text)}], [{w.say(e.printed)}], [{w.say(e.computed)}], [{w.say(e.deviation)}], {literal(basis)}, "
        f"({told}), ({cautions})),"
    )


def _finding_row(w: Words, e: Entry) -> str:
    told = "".join(f"[{w.say(t)}]," for t in e.told)
    return (
        f"({literal(e.key)}, {_bool(e.key in w.placed)}, {literal(e.kind)}, {literal(e.number)}, {literal(str(e.line))}, "
        f"[{w.say(e.text)}], ({told})),"
    )


def _circuits(w: Words) -> str:
    rows = ""
    for f in w.report.figures:
        cells = [f.name or "(unnamed)", str(f.line), str(f.nodes), str(f.elements), *figure_cells(f)]
        rows += "(" + "".join(f"[{w.say(c)}]," for c in cells) + "),"
    return rows


def _givens(w: Words) -> str:
    rows = ""
    for judged, e in zip(w.report.claims, w.rows, strict=False):
        if judged.verdict == "given":
            rows += f"([{w.say(str(e.line))}], [{w.say(e.text)}], [{w.say(given_notes(judged.claim))}]),"
    return rows


def _waivers(w: Words) -> str:
    rows = ""
    for judged, e in zip(w.report.claims, w.rows, strict=False):
        if judged.claim.waiver is not None:
            state = "stands" if judged.verdict == "accepted" else "does not apply"
            cells = [str(e.line), judged.claim.waiver.text, waiver_line(judged.claim), state]
            rows += "(" + "".join(f"[{w.say(c)}]," for c in cells) + "),"
    return rows


def _signed(w: Words) -> str:
    return "".join("(" + "".join(f"[{w.say(c)}]," for c in row) + ")," for row in signature_rows(w.report))


def _bool(value: bool) -> str:
    return "true" if value else "false"


def notes(w: Words) -> str:
    """The notes that stand in the margin, as a dictionary by key."""
    found = "".join(_note(w, e) for e in w.rows if e.beside)
    return f"({found})" if found else "(:)"


def _note(w: Words, e: Entry) -> str:
    kind = e.kind if e.kind in MARKS else "note"
    said = "".join(f"[{w.say(t)}]," for t in note_lines(e))
    brief = e.computed or e.deviation or f"line {e.line}"
    return f"{literal(e.key)}: (kind: {literal(kind)}, number: {literal(e.number)}, brief: [{w.say(brief)}], lines: ({said})),"
