"""``calccheck working``: the independent working of one quantity."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from calccheck.annotate.working_table import working_table
from calccheck.arithmetic import Doubt
from calccheck.command.files import Source, Unusable
from calccheck.command.sheets import settings_for, sheet_of, standard_input
from calccheck.command.terminal import STANDS
from calccheck.pipeline import work_out


def working(options: argparse.Namespace) -> int:
    """The command; its exit status. Raises ``Unusable``."""
    source = standard_input() if options.sheet == "-" else Source(Path(options.sheet), Path(options.sheet))
    try:
        worked = work_out(sheet_of(source), options.quantity, settings_for(source))
    except Doubt as doubt:
        hint = f"; write {doubt.suggestion}" if doubt.suggestion and doubt.suggestion not in doubt.reason else ""
        raise Unusable(source.name, f"{doubt.reason}{hint}") from None
    sys.stdout.write(working_table(worked))
    return STANDS
