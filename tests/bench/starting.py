"""Whole processes: checking one sheet, and writing it as PDF, against a bare interpreter that imports numpy.

    python tests/bench/starting.py [--runs N]

prints seconds by command as JSON, by the clock and by the processor (user and system time of the process). The commands take
turns, so that a busy moment hits all of them.
"""

from __future__ import annotations

import argparse
import json
import os
import subprocess
import sys
import tempfile
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))

import generated

ROOT = Path(__file__).parents[2]
SHEET = ROOT / "sheets" / "TS-101-instrument-bus.md"  # 28 claims; with tolerances and ratings


def commands(folder):
    """By name; the installed command where it stands beside the interpreter."""
    plain = Path(folder) / "plain.md"
    plain.write_text(generated.sheet(2), encoding="utf-8")
    installed = Path(sys.executable).with_name("calccheck")
    program = [str(installed)] if installed.exists() else [sys.executable, "-m", "calccheck"]
    return {
        "bare": [sys.executable, "-c", ""],
        "numpy": [sys.executable, "-c", "import numpy"],
        "check": [*program, "check", str(SHEET)],
        "plain": [*program, "check", str(plain)],
        "pdf": [*program, "mark", "--to", "pdf", "--replace", "--output", folder, str(SHEET)],
    }


def seconds_of(runs):
    """Seconds of every run of every command; a first run of each, which may compile modules, does not count."""
    # without it nothing compiled is kept, and every run would compile the program's modules but not numpy's
    environment = {k: v for k, v in os.environ.items() if k != "PYTHONDONTWRITEBYTECODE"}
    with tempfile.TemporaryDirectory() as folder:
        chosen = commands(folder)
        found = {name: {"clock": [], "processor": []} for name in chosen}
        for turn in range(runs + 1):
            for name, command in chosen.items():
                start = time.perf_counter()
                process = subprocess.Popen(command, stdout=subprocess.DEVNULL, env=environment, cwd=ROOT)
                _, status, used = os.wait4(process.pid, 0)
                if status:
                    raise SystemExit(f"{' '.join(command)}: exit status {os.waitstatus_to_exitcode(status)}")
                if turn:
                    found[name]["clock"].append(time.perf_counter() - start)
                    found[name]["processor"].append(used.ru_utime + used.ru_stime)
    return found


def main():
    options = argparse.ArgumentParser(description=__doc__.partition("\n")[0])
    options.add_argument("--runs", type=int, default=15)
    print(json.dumps(seconds_of(options.parse_args().runs)))


if __name__ == "__main__":
    main()
