"""``calccheck check``: every claim recomputed, findings printed."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Sequence
from functools import partial

from calccheck import __version__
from calccheck.command.batch import run
from calccheck.command.files import Source
from calccheck.command.reports import findings_report_on, gathered, run_of
from calccheck.command.terminal import complain, in_colour, speak_utf8, status
from calccheck.model import Report


def check(options: argparse.Namespace) -> int:
    """The command; its exit status: findings on standard output, problems with files on standard error."""
    found, problems = gathered(options.paths)
    reports = []
    for outcome in run(partial(findings_report_on, within=run_of(options)), found, _name, options.jobs):
        if outcome.value is not None:
            reports.append(outcome.value)
        else:
            problems.append(outcome.problem)
    _write(options, reports, list(dict.fromkeys(problems)))
    complain(problems)
    return status(reports, problems)


def _write(options: argparse.Namespace, reports: Sequence[Report], problems: Sequence[str]) -> None:
    """The reports on standard output; each form loads only itself."""
    if options.format == "text":
        from calccheck.annotate.to_terminal import to_terminal

        sys.stdout.write(to_terminal(reports, options.verbose, in_colour(sys.stdout)))
        return
    speak_utf8()
    if options.format == "json":
        from calccheck.annotate.to_json import to_json

        sys.stdout.write(to_json(reports, __version__))
    elif options.format == "sarif":
        from calccheck.annotate.to_sarif import to_sarif

        sys.stdout.write(to_sarif(reports, __version__, problems))
    else:
        from calccheck.annotate.to_junit import to_junit

        sys.stdout.write(to_junit(reports, __version__, problems))


def _name(source: Source) -> str:
    return source.name
