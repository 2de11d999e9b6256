"""``calccheck sign``: a signature put into a sheet's front matter, every other byte left as it is."""

from __future__ import annotations

import argparse
import re
import sys
from dataclasses import replace
from datetime import date
from pathlib import Path

from calccheck.annotate.to_terminal import sheet_lines
from calccheck.annotate.visible import visible
from calccheck.command.citing import Run
from calccheck.command.files import MARKED, Source, Unusable, read_text, write_whole
from calccheck.command.reports import report_on
from calccheck.command.sheets import settings_for
from calccheck.command.terminal import MEND, STANDS, in_colour
from calccheck.document import Block
from calccheck.edits import newline, stray, unmark
from calccheck.model import ROLES, Reading, Report, Role
from calccheck.read.sheet import read_sheet
from calccheck.read.signatures import NAME, ROLE, signature_lines
from calccheck.signatures import alike, digest_of, is_originator, signature_line, why_void
from calccheck.source import Sheet

_LONGEST = 80


def sign(options: argparse.Namespace) -> int:
    """The command; its exit status. Raises ``Unusable``."""
    name, day = _name(options.by), options.on or date.today()
    if options.sheet == "-":
        raise Unusable("sign", "standard input cannot be signed; name a file")
    source = Source(Path(options.sheet), Path(Path(options.sheet).name))
    text = read_text(source.path)
    _refuse_marked(source, text)
    report = report_on(replace(source, text=text), Run((options.sheet,), day))
    if not report.reading.is_calc:
        raise Unusable(source.name, "not a calc sheet; there is nothing to sign")
    why = _why_not(report, options.role, name)
    if why:
        for line in sheet_lines(report, colour=in_colour(sys.stdout)):
            print(line)
        print(f"{visible(source.name)}: not signed: {why}")
        return MEND
    signed = _signed(report.reading, source, options.role, name, day)
    if signed != text:
        write_whole(source.path, signed.encode("utf-8"), True, text.encode("utf-8"))
    print(f"{visible(source.name)}: signed as {options.role} by {name}, {day.isoformat()}")
    return STANDS


def _name(text: str) -> str:
    name = " ".join(text.split())
    if len(name) > _LONGEST or not re.fullmatch(NAME, name):
        why = f"{name!r} is no name for a signature: a letter, then letters, digits, spaces and . , ' & ( ) / + -"
        raise Unusable("sign", f"{why}, {_LONGEST} characters at most")
    return name


def _refuse_marked(source: Source, text: str) -> None:
    """A copy that the program wrote is not the sheet: the signature would be lost with the next copy."""
    if source.path.stem.endswith(MARKED) or unmark(text) != text or stray(text):
        raise Unusable(source.name, "a marked copy is not signed; sign the sheet itself, without marks")


def _why_not(report: Report, role: Role, name: str) -> str:
    """Why a sheet is not to be signed by this person in this role; nothing where it may be.

    Signatures that are void stand in nobody's way: they are there to be signed anew.
    """
    sheet = replace(report, findings=tuple(f for f in report.findings if f.kind != "signature"))
    if not sheet.clean:
        counts, errors = sheet.counts, sum(f.severity == "error" for f in sheet.findings)
        failing = {"claims that differ": counts["differs"], "unchecked": counts["unchecked"], "errors": errors}
        return "the sheet is not clean (" + ", ".join(f"{what}: {n}" for what, n in failing.items() if n) + ")"
    checkers = [s.name for s in report.reading.signatures if s.role == "checker"]
    if role == "checker" and is_originator(name, report.reading):
        return f"{name} is the originator of this sheet; somebody else checks it"
    if role == "originator" and alike(name) in map(alike, checkers):
        return f"{name} is the checker of this sheet; originator and checker are two people"
    return ""


def _signed(reading: Reading, source: Source, role: Role, name: str, day: date) -> str:
    """The sheet's text with the signature, read again to be sure that it says what it should."""
    now = digest_of(reading)
    front = next((b for b in reading.page[:1] if b.kind == "front matter"), None)
    text = put_signature(reading.sheet.text, front, role, signature_line(name, day, now))
    again = read_sheet(Sheet(source.name, text), settings_for(source))
    own = [s for s in again.signatures if s.role == role and (s.name, s.on) == (name, day) and not why_void(s, now)]
    others = [s.role for s in reading.signatures if s.role != role]
    kept = [s.role for s in again.signatures if s.role != role]
    if len(own) != 1 or digest_of(again) != now or kept != others or again.title != reading.title:
        why = "the front matter is written in a way that takes no signature; write it as fields, one a line"
        raise Unusable(source.name, f"{why} (and signatures as calccheck sign writes them)")
    return text


# --- the edit -------------------------------------------------------------------------------------------------------


def put_signature(text: str, front: Block | None, role: Role, line: str) -> str:
    """The text with this signature line below its role, in place of one that stands there; all else as it was.

    ``front``: the sheet's front matter, created where there is none.
    """
    end = newline(text)
    if front is None:
        mark = "\ufeff" if text.startswith("\ufeff") else ""  # a byte order mark stays first
        return mark + end.join(["---", *_new_block(role, line), "---", ""]) + text.removeprefix("\ufeff")
    starts = Sheet("", text).line_starts
    lines = [text[a:b] for a, b in zip(starts, [*starts[1:], len(text)], strict=True)]
    block = signature_lines(front.lines)
    if block is None:
        at, replaced, new = len(front.lines), 0, _new_block(role, line)
    else:
        at, replaced, new = _place(front, block, role, line)
    at += 1  # behind the opening line
    return "".join([*lines[:at], *(n + end for n in new), *lines[at + replaced :]])


def _new_block(role: Role, line: str) -> list[str]:
    """All three roles, so that whoever signs next adds a line of their own between two that stand already."""
    rows = ["signatures:"]
    for r in ROLES:
        rows += [f"  {r}:", *([f"    {line}"] if r == role else [])]
    return rows


def _place(front: Block, block: range, role: Role, line: str) -> tuple[int, int, list[str]]:
    """Where in the front matter to put which lines, and how many they replace."""
    headings = {m["role"]: k for k in block if (m := ROLE.fullmatch(front.lines[k].text))}
    if role not in headings:
        later = [headings[r] for r in ROLES[ROLES.index(role) :] if r in headings]
        first = front.lines[min(headings.values())].text if headings else "  "
        indent = first[: len(first) - len(first.lstrip())]
        return (min(later) if later else block.stop), 0, [f"{indent}{role}:", f"{indent}  {line}"]
    at = headings[role] + 1
    heading = front.lines[at - 1].text
    indent = heading[: len(heading) - len(heading.lstrip())]
    below = front.lines[at].text if at < block.stop and at not in headings.values() else ""
    stands = below.startswith(indent + " ") and not below.lstrip().startswith("#")
    return at, int(stands), [f"{indent}  {line}"]
