"""The sheets that a command means, and the report on each within its run."""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from dataclasses import replace
from functools import partial
from pathlib import Path

from calccheck.command.citing import Run, find_sheets
from calccheck.command.files import Source, Unusable, sources
from calccheck.command.sheets import brief, settings_for, sheet_of, standard_input
from calccheck.formula import Range, references
from calccheck.model import Member, Report


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


def run_of(options: argparse.Namespace) -> Run:
    """The run of a command over several sheets."""
    return Run(tuple(options.paths), options.on)


def report_on(source: Source, within: Run) -> Report:
    """The report on one sheet. Raises ``Unusable`` where a sheet or its repository's settings cannot be read."""
    from calccheck.pipeline import check as checked  # late: --help and --version need no solver

    find = partial(find_sheets, citing=source.path, run=within)
    history = partial(_earlier_versions, source.path) if source.text is None else tuple
    return checked(sheet_of(source), replace(settings_for(source), on=within.on), find, history)


def _earlier_versions(path: Path) -> list[tuple[str, str]]:
    from calccheck.command.history import earlier_versions  # late: called only where a claim differs

    return earlier_versions(path)


def brief_report_on(source: Source, within: Run) -> Report:
    """The report without its page and solutions, for outputs that walk neither: so it travels light between processes."""
    return brief(report_on(source, within))


def findings_report_on(source: Source, within: Run) -> Report:
    """The brief report without the formulas in its claims, most of what it weighs, for outputs that only say what was found."""
    report = brief_report_on(source, within)
    claims = {id(c): replace(c, members=tuple(m for m in c.members if _is_shown(m))) for c in report.reading.claims}
    judged = tuple(replace(j, claim=claims.get(id(j.claim), j.claim)) for j in report.claims)
    return replace(report, reading=replace(report.reading, claims=tuple(claims.values())), claims=judged)


def _is_shown(member: Member) -> bool:
    """Whether a member is a printed value or a range."""
    return isinstance(member.node, Range) or not references(member.node)
