"""calccheck: checks the hand calculations in engineering calc sheets.

``check_text`` and ``check_file`` give the report of a sheet as frozen records (``Report``); the command line is a thin face
over them.
"""

from __future__ import annotations

from collections.abc import Mapping
from os import PathLike
from pathlib import Path

from calccheck.model import Report, Settings
from calccheck.source import Sheet

__version__ = "0.1.0"
__all__ = ["Report", "Settings", "__version__", "check_file", "check_text"]


def check_text(
    name: str, text: str, settings: Settings | None = None, others: Mapping[str, Report] | None = None
) -> Report:
    """The report on a sheet's text. ``name`` is what the report calls it; nothing is read from disk.

    ``others``: reports on other sheets by sheet number, for ``given … from NUMBER``; without it such values raise a caution.
    """
    from calccheck.pipeline import check  # late: the package is imported for its version alone too

    if others is None:
        return check(Sheet(name, text), settings)
    return check(Sheet(name, text), settings, lambda number: [others[number]] if number in others else [])


def check_file(
    path: str | PathLike[str], settings: Settings | None = None, others: Mapping[str, Report] | None = None
) -> Report:
    """The report on a sheet's file, UTF-8. Raises ``OSError`` or ``UnicodeDecodeError`` where it cannot be read."""
    with Path(path).open(encoding="utf-8", newline="") as file:
        return check_text(str(path), file.read(), settings, others)
