"""The check record and the notes in the margin, as typst source."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field

from calccheck.annotate.pictures import Shown, moved, totals
from calccheck.annotate.record import Entry, note_lines
from calccheck.annotate.record_parts import BASES, digest, figure_cells, nearest_rating, settings_line
from calccheck.annotate.sentences import code_pieces
from calccheck.annotate.typst_pictures import glance, large_drawings, sensitivities
from calccheck.annotate.typst_text import literal, shown
from calccheck.annotate.typst_working import formula
from calccheck.model import Report


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

    def tell(self, text: str) -> str:
        """Text of our own as typst markup: what stands between backticks as code."""
        pieces = ((code, self.say(piece)) for code, piece in code_pieces(text))
        return "".join(f"#code[{piece}];" if code else piece for code, piece in pieces)

    def told(self, entry: Entry, phrases: Iterable[str]) -> str:
        """Phrases about an entry as a list of sentences in markup."""
        return "".join(f"[{self.tell(t)}]," for t in entry.sentences(phrases))

    def written(self, entry: Entry) -> str:
        """A claim as written; one in dollar maths as the formula that was read, which is what its markup means."""
        k = int(entry.key[1:]) - 1
        members = self.report.claims[k].claim.members if entry.key[0] == "c" and "\\" in entry.text else ()
        read = formula(self.report.reading.sheet, members)
        return f"#as-read[{read}];" if read else f"#code[{self.say(entry.text)}];"

    def target(self, entry: Entry) -> str:
        """The label of an entry's mark on the page, or else of its row in the record."""
        return literal(entry.key if entry.key in self.placed else "r-" + entry.key)


# --- record ---------------------------------------------------------------------------------------------------------


def record(w: Words) -> str:
    """All entries, the superposition at a glance and the circuits' figures."""
    claims = "".join(_record_row(w, e) for e in w.rows if e.key[0] == "c")
    findings = "".join(_finding_row(w, e) for e in w.rows if e.key[0] == "f")
    judged = ". ".join(t for t in (settings_line(w.report), nearest_rating(w.report)) if t)
    return (
        f"#record-head({literal(digest(w.report))}, [{w.say(judged)}])\n"
        f"#record-claims(({claims}))\n#record-findings(({findings}))\n"
        f"{glance(totals(w.report, w.missing), {e.key: e.number for e in w.rows}, w.missing)}"
        f"{sensitivities(moved(w.report, w.missing), {e.key: e.number for e in w.rows}, w.missing)}"
        f"#record-circuits(({_circuits(w)}))\n" + large_drawings(w.pictures, w.missing)
    )


def _record_row(w: Words, e: Entry) -> str:
    told = w.told(e, e.told if e.kind != "given" else ())  # the list of givens says it
    cautions = w.told(e, e.cautions)
    basis = BASES.get(e.basis, e.basis)
    return (
        f"({literal(e.key)}, {_bool(e.key in w.placed)}, {literal(e.kind)}, {literal(e.number)}, {literal(str(e.line))}, "
        f"[{w.written(e)}], [{w.say(e.printed)}], [{w.say(e.computed)}], [{w.say(e.deviation)}], {literal(basis)}, "
        f"({told}), ({cautions})),"
    )


def _finding_row(w: Words, e: Entry) -> str:
    told = w.told(e, e.told)
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


def _bool(value: bool) -> str:
    return "true" if value else "false"


def notes(w: Words) -> str:
    """The notes that stand in the margin, as a dictionary by key."""
    found = "".join(_note(w, e) for e in w.rows if e.beside)
    return f"({found})" if found else "(:)"


def _note(w: Words, e: Entry) -> str:
    said = "".join(f"[{w.tell(t)}]," for t in note_lines(e))
    brief = e.computed or e.deviation or f"line {e.line}"
    return f"{literal(e.key)}: (kind: {literal(e.note_kind)}, number: {literal(e.number)}, brief: [{w.say(brief)}], lines: ({said})),"
