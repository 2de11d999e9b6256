"""One sheet on its way in: its text, the settings of its repository, and its report made light."""

from __future__ import annotations

import sys
from dataclasses import replace
from pathlib import Path

from calccheck.command.files import Source, Unusable, decoded, read_text, settings_table
from calccheck.model import Report, Settings
from calccheck.source import Sheet


def standard_input() -> Source:
    """The sheet on standard input. Raises ``Unusable`` where it is not UTF-8."""
    return Source(Path("-"), Path("-"), decoded(sys.stdin.buffer.read(), "-"))


def sheet_of(source: Source) -> Sheet:
    """The sheet as it stands. Raises ``Unusable`` where it cannot be read."""
    return Sheet(source.name, read_text(source.path) if source.text is None else source.text)


def settings_for(source: Source) -> Settings:
    """The repository's settings, found from the sheet's folder upward. Raises ``Unusable``."""
    from calccheck.read.settings import SettingFault, read_repo_settings

    name, table = settings_table(source.path.parent.resolve())
    try:
        return read_repo_settings(table)
    except SettingFault as fault:
        raise Unusable(name, f"[tool.calccheck]: {fault}") from None


def brief(report: Report) -> Report:
    """The report without its page and solutions."""
    return replace(report, reading=replace(report.reading, page=()), solutions=())
