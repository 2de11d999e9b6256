"""``calccheck blank``: empty tables for a sheet that holds its circuit."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from calccheck.annotate.to_blank import blank_page
from calccheck.annotate.visible import one_line, visible
from calccheck.command.files import Source, Unusable
from calccheck.command.sheets import settings_for, sheet_of, standard_input
from calccheck.command.terminal import MEND, STANDS, speak_utf8
from calccheck.edits import unmark
from calccheck.model import Reading
from calccheck.read.sheet import read_sheet
from calccheck.source import Sheet


def blank(options: argparse.Namespace) -> int:
    """The command; its exit status: 1 where a circuit cannot be read, which is then told in place of the tables."""
    source = standard_input() if options.sheet == "-" else Source(Path(options.sheet), Path(options.sheet))
    sheet = sheet_of(source)
    reading = read_sheet(Sheet(sheet.name, unmark(sheet.text)), settings_for(source))
    if not reading.circuits:
        raise Unusable(source.name, "no circuit stands in this sheet; put one into a circuit fence")
    faults = _faults(reading)
    if faults:
        print("\n".join(faults))
        return MEND
    speak_utf8()
    sys.stdout.write(blank_page(reading))
    return STANDS


def _faults(reading: Reading) -> list[str]:
    """What is wrong with the circuits, each as a line that editors make a link."""
    found = []
    for problem in (p for c in reading.circuits for p in c.problems):
        line, column = reading.sheet.line_column(problem.span.start)
        hint = f"; write {problem.suggestion}" if problem.suggestion else ""
        found.append(f"{visible(reading.sheet.name)}:{line}:{column}: error: {one_line(problem.message + hint)}")
    return found
