"""The commands that only read, and what all commands share: sheets gathered, reports made, complaints, exit status."""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence
from dataclasses import replace
from functools import partial
from pathlib import Path
from typing import TextIO

from calccheck import __version__
from calccheck.batch import run
from calccheck.citing import Run, find_sheets
from calccheck.files import Source, Unusable, decoded, read_text, settings_table, sources
from calccheck.model import Report, Settings
from calccheck.source import Sheet

STANDS, MEND, FAILED = 0, 1, 2


def check(options: argparse.Namespace) -> int:
    """``calccheck check``: findings on standard output, problems with files on standard error."""
    found, problems = gathered(options.paths)
    reports = []
    for outcome in run(partial(brief_report_on, within=run_of(options)), found, _name, options.jobs):
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


def working(options: argparse.Namespace) -> int:
    """``calccheck working``: the table of one quantity."""
    from calccheck.annotate.working_table import working_table
    from calccheck.arithmetic import Doubt
    from calccheck.pipeline import work_out

    source = standard_input() if options.sheet == "-" else Source(Path(options.sheet), Path(options.sheet))
    try:
        worked = work_out(sheet_of(source), options.quantity, settings_for(source))
    except Doubt as doubt:
        hint = f"; write {doubt.suggestion}" if doubt.suggestion and doubt.suggestion not in doubt.reason else ""
        raise Unusable(source.name, f"{doubt.reason}{hint}") from None
    sys.stdout.write(working_table(worked))
    return STANDS


# --- what the commands share ----------------------------------------------------------------------------------------


def gathered(paths: Sequence[str]) -> tuple[list[Source], list[str]]:
    """The sheets meant by the arguments, standard input among them, and the problems met."""
    found, problems = sources([p for p in paths if p != "-"])
    said = [str(p) for p in problems]
    if "-" in paths:
        try:
            found.insert(0, standard_input())
        except Unusable as problem:
            said.append(str(problem))
    return found, said


def standard_input() -> Source:
    """The sheet on standard input. Raises ``Unusable`` where it is not UTF-8."""
    return Source(Path("-"), Path("-"), decoded(sys.stdin.buffer.read(), "-"))


def sheet_of(source: Source) -> Sheet:
    """The sheet as it stands. Raises ``Unusable`` where it cannot be read."""
    return Sheet(source.name, read_text(source.path) if source.text is None else source.text)


def run_of(options: argparse.Namespace) -> Run:
    """The run of a command over several sheets."""
    return Run(tuple(options.paths), options.on)


def report_on(source: Source, within: Run) -> Report:
    """The report on one sheet. Raises ``Unusable`` where a sheet or its repository's settings cannot be read."""
    from calccheck.history import earlier_versions  # late: as the next
    from calccheck.pipeline import check as checked  # late: --help and --version need no solver

    find = partial(find_sheets, citing=source.path, run=within)
    history = partial(earlier_versions, source.path) if source.text is None else tuple
    return checked(sheet_of(source), replace(settings_for(source), on=within.on), find, history)


def brief_report_on(source: Source, within: Run) -> Report:
    """The report without its page and solutions, for outputs that walk neither: so it travels light between processes."""
    return brief(report_on(source, within))


def brief(report: Report) -> Report:
    """The report without its page and solutions."""
    return replace(report, reading=replace(report.reading, page=()), solutions=())


def settings_for(source: Source) -> Settings:
    """The repository's settings, found from the sheet's folder upward. Raises ``Unusable``."""
    from calccheck.read.settings import SettingFault, read_repo_settings

    name, table = settings_table(source.path.parent.resolve())
    try:
        return read_repo_settings(table)
    except SettingFault as fault:
        raise Unusable(name, f"[tool.calccheck]: {fault}") from None


def _name(source: Source) -> str:
    return source.name


def status(reports: Sequence[Report], problems: Sequence[str]) -> int:
    """The exit status: whether the work could be done, then whether every claim stands."""
    if problems:
        return FAILED
    return STANDS if all(r.clean for r in reports) else MEND


def complain(problems: Sequence[str]) -> None:
    """Problems on standard error, behind everything that was said on standard output."""
    from calccheck.annotate.visible import visible

    sys.stdout.flush()
    for problem in dict.fromkeys(problems):
        first, *rest = problem.split("\n")  # a traceback that was asked for keeps its lines
        print("\n".join([f"calccheck: {visible(first)}", *rest]), file=sys.stderr)


def in_colour(stream: TextIO) -> bool:
    """Whether to colour: on a terminal, unless NO_COLOR is set to something or the terminal is called dumb."""
    return stream.isatty() and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"


def speak_utf8() -> None:
    """Standard output in UTF-8 with plain line ends, whatever the terminal speaks (JSON: RFC 8259, 8.1)."""
    if hasattr(sys.stdout, "reconfigure"):
        sys.stdout.reconfigure(encoding="utf-8", newline="")
