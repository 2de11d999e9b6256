"""``calccheck register``: the calc register of the sheets under some paths."""

from __future__ import annotations

import argparse
import sys
from datetime import date
from functools import partial

from calccheck import __version__
from calccheck.annotate import to_register
from calccheck.annotate.register import register_rows
from calccheck.command.batch import run
from calccheck.command.files import Source
from calccheck.command.reports import brief_report_on, gathered, run_of
from calccheck.command.terminal import FAILED, MEND, STANDS, complain, speak_utf8


def register(options: argparse.Namespace) -> int:
    """The command; its exit status: 1 where something in a row is to be mended, 0 where at most something is open."""
    found, problems = gathered(options.paths)
    day = options.on or date.today()
    reports = []
    for outcome in run(partial(brief_report_on, within=run_of(options)), found, _name, options.jobs):
        if outcome.value is not None:
            reports.append(outcome.value)
        else:
            problems.append(outcome.problem)
    rows = register_rows(reports, day)
    if options.format == "json":
        speak_utf8()
        sys.stdout.write(to_register.register_json(rows, day, __version__))
    elif options.format == "markdown":
        speak_utf8()
        sys.stdout.write(to_register.register_markdown(rows, day))
    else:
        sys.stdout.write(to_register.register_text(rows, day))
    complain(problems)
    if problems:
        return FAILED
    return MEND if any(row.to_mend for row in rows) else STANDS


def _name(source: Source) -> str:
    return source.name
