"""Sheets that other sheets take values from: found by number among the sheets of the run, else in the repository.

Nothing is searched before a sheet names another one. Then every file is looked into once a run, and only a file that has the
number in its front matter is read.
"""

from __future__ import annotations

import re
import time
from dataclasses import dataclass, field, replace
from datetime import date
from functools import lru_cache
from pathlib import Path

from calccheck.command.files import Source, sources
from calccheck.command.sheets import brief, settings_for, sheet_of
from calccheck.model import Report

_HEAD = 64 * 1024  # bytes in which front matter ends


@dataclass(frozen=True, slots=True)
class Run:
    """One run of a command: the paths it was given and the day it judges by. What was found in it holds until it ends."""

    paths: tuple[str, ...] = ()
    on: date | None = None
    started: int = field(default_factory=time.monotonic_ns)


def find_sheets(number: str, citing: Path, run: Run) -> list[Report]:
    """The calc sheets of a number, each judged by itself. Raises ``Unusable`` where one cannot be read."""
    return _numbered(number, run.paths, run) or _numbered(number, (str(_home(citing.parent)),), run)


def _home(folder: Path) -> Path:
    """The folder of the repository that a folder is in; itself outside of any."""
    absolute = folder.resolve()
    return next((f for f in (absolute, *absolute.parents) if (f / ".git").exists()), absolute)


def _numbered(number: str, places: tuple[str, ...], run: Run) -> list[Report]:
    whole = re.compile(rf"(?<![\w-]){re.escape(number)}(?![\w-])")  # TS-10 is not looked for in TS-101
    named = [source for source, front in _fronts(places, run) if number in front and whole.search(front)]
    found = [_alone(source, run) for source in named]
    return [r for r in found if r.reading.is_calc and r.reading.title.get("sheet") == number]


@lru_cache(maxsize=8)
def _fronts(places: tuple[str, ...], run: Run) -> list[tuple[Source, str]]:
    """Every file under some places that has front matter, with it. What cannot be looked into has none."""
    found = [(source, _front(source.path)) for source in sources([p for p in places if p != "-"])[0]]
    return [(source, front) for source, front in found if front]


def _front(path: Path) -> str:
    try:
        with path.open("rb") as file:
            head = file.read(_HEAD)
    except OSError:
        return ""
    text = head.decode("utf-8", "replace").removeprefix("\ufeff")
    return text.partition("\n---")[0] if text.startswith("---") else ""


@lru_cache(maxsize=1024)
def _alone(source: Source, run: Run) -> Report:
    """The report on a sheet that another one names, without what that one takes from elsewhere."""
    from calccheck.pipeline import check  # late: most sheets name no other

    sheet = sheet_of(source)
    return brief(check(replace(sheet, name=source.within.as_posix()), replace(settings_for(source), on=run.on)))
