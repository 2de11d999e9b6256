"""What the commands say to a terminal or a script: exit status, complaints, colour, encoding."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from typing import TextIO

from calccheck.model import Report

STANDS, MEND, FAILED = 0, 1, 2


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
