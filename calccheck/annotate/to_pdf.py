"""The reviewer's document: the sheet marked, with margin notes, PDF comments and a closing check record.

Set by typst from bytes, in an empty folder, with typst's own fonts only: the same sheet gives the same file anywhere.
Archivable and accessible: PDF/A-3a (ISO 19005-3) with the source sheet attached, and PDF/UA-1 (ISO 14289-1).
"""

from __future__ import annotations

import re
from datetime import UTC, date, datetime
from importlib import import_module
from pathlib import Path, PurePath
from tempfile import TemporaryDirectory
from threading import Thread

from calccheck import __version__
from calccheck.annotate.characters import told
from calccheck.annotate.headings import heading_levels
from calccheck.annotate.marks import MARKS
from calccheck.annotate.pictures import behind
from calccheck.annotate.places import places
from calccheck.annotate.record import Entry, comment_text, entries
from calccheck.annotate.record_parts import TITLE_FIELDS, digest
from calccheck.annotate.typst_checker import checker
from calccheck.annotate.typst_page import Setting, typeset
from calccheck.annotate.typst_record import Words, notes, record
from calccheck.annotate.typst_summary import summary
from calccheck.annotate.typst_text import literal
from calccheck.model import Report

_LOOK = ("sheet.typ", "record.typ", "checker.typ")
_TRIES = 3
_NO_DATE = date(1970, 1, 1)  # an archivable file must bear a date; this one says that the sheet has none
_NOT_SHOWN = re.compile(r"the text `\"(.*?)\"` could not be displayed")
_CODE = re.compile(r"\\u\{([0-9a-f]+)\}")
_LONGEST_FIELD = 180


def to_pdf(report: Report, sheet_number: int = 1, of: int = 1) -> bytes:
    """The marked sheet as a PDF file.

    ``sheet_number``, ``of``: its place in the set that was marked together.
    """
    rows = entries(report)
    to_mend = [e for e in rows if e.to_mend]
    if (
        to_mend
    ):  # pypdf is imported while typst, which leaves the interpreter free, sets the page: a fifth of the time saved
        Thread(target=import_module, args=("calccheck.annotate.pdf_comments",)).start()
    pdf = _compile(report, rows, f"sheet {sheet_number} of {of}")
    if not to_mend:
        return pdf
    from calccheck.annotate.pdf_comments import Comment, add_comments

    comments = {e.key: Comment(MARKS[e.kind].word, told(comment_text(e)), MARKS[e.kind].tint) for e in to_mend}
    return add_comments(pdf, comments, sheet_date(report))


def sheet_date(report: Report) -> date:
    """The date in the sheet's title block, else the day of the check, else the first of 1970."""
    try:
        return date.fromisoformat(report.reading.title.get("date", "").strip())
    except ValueError:
        return report.reading.settings.on or _NO_DATE


def _compile(report: Report, rows: tuple[Entry, ...], place_in_set: str) -> bytes:
    """Set the page; where fonts lack characters, once more with these as code points."""
    import typst

    day = sheet_date(report)
    stamp = int(datetime(day.year, day.month, day.day, tzinfo=UTC).timestamp())
    missing: frozenset[str] = frozenset()
    with TemporaryDirectory() as empty:
        for _ in range(_TRIES):
            source = typst_source(report, rows, place_in_set, missing).encode("utf-8")
            compiler = typst.Compiler(
                source, root=empty, ignore_system_fonts=True, package_path=empty, package_cache_path=empty
            )
            try:
                pdf = compiler.compile(format="pdf", pdf_standards=["a-3a", "ua-1"], timestamp=stamp)
            except typst.TypstError as fault:
                found = missing_characters(fault.diagnostic)
                if found <= missing:
                    raise
                missing |= found
            else:
                assert isinstance(pdf, bytes)
                return pdf
    raise RuntimeError(f"no font shows {''.join(sorted(missing))}, and boxes in their places do not help")


def missing_characters(diagnostic: str) -> frozenset[str]:
    """The characters that no font shows, as typst names them; letters that a mark stands on stay."""
    named = "".join(_CODE.sub(lambda c: chr(int(c[1], 16)), m) for m in _NOT_SHOWN.findall(diagnostic))
    return frozenset(c for c in named if not c.isascii())


def typst_source(report: Report, rows: tuple[Entry, ...], place_in_set: str, missing: frozenset[str]) -> str:
    """The whole document as typst source."""
    reading = report.reading
    where = places(reading.page, reading.sheet, rows)
    judged = dict(zip((e.key for e in rows), report.claims, strict=False))
    pictures = behind(report, missing)
    setting = Setting(reading.sheet, where, judged, heading_levels(reading.page), missing, pictures)
    words = Words(report, rows, where.placed(), missing, pictures)
    head = "\n".join((_marks(), *(Path(__file__).with_name(name).read_text("utf-8") for name in _LOOK)))
    return (
        f"{head}\n{_paper(words, place_in_set)}\n{_attachment(report)}\n"
        f"{summary(words)}\n{typeset(setting, reading.page)}\n#record-pages[\n{record(words)}{checker(words)}]\n"
    )


def _marks() -> str:
    rows = "".join(
        f"{literal(kind)}: (sign: {literal(m.sign)}, word: {literal(m.word)}, "
        f"ink: rgb({literal(m.ink)}), tint: rgb({literal(m.tint)})),"
        for kind, m in MARKS.items()
    )
    return f"#let marks = ({rows})\n"


def _paper(w: Words, place_in_set: str) -> str:
    title = w.report.reading.title
    fields = "".join(f"{literal(key)}: [{w.say(_short(title.get(key, '')))}]," for key in TITLE_FIELDS)
    name = told(
        _short(" ".join(filter(None, (title.get("sheet"), title.get("subject")))) or w.report.reading.sheet.name)
    )
    day = sheet_date(w.report)
    return (
        f"#show: paper.with(title: {literal(name or 'Calc sheet')}, fields: ({fields}), "
        f"place-in-set: {literal(place_in_set)}, date: datetime(year: {day.year}, month: {day.month}, day: {day.day}), "
        f"foot: [Checked by calccheck {__version__}: arithmetic and circuit laws, not an approval. Source SHA-256 "
        f"{digest(w.report)[:12]}…], notes: {notes(w)})\n"
    )


def _short(text: str) -> str:
    one_line = " ".join(text.split())
    return one_line if len(one_line) <= _LONGEST_FIELD else one_line[: _LONGEST_FIELD - 1] + "…"


def _attachment(report: Report) -> str:
    """The source sheet, byte for byte, inside the file."""
    sheet = report.reading.sheet
    name = re.sub(r"[^\w.-]+", "-", PurePath(sheet.name.replace("\\", "/")).name).strip("-.") or "sheet.md"
    return (
        f'#pdf.attach({literal(name)}, bytes({literal(sheet.text)}), relationship: "source", '
        f'mime-type: "text/markdown", description: "The calc sheet as checked")'
    )
