"""All benchmarks of speed and memory, as ratios that do not depend on the machine; prints docs/performance.md's tables.

    python tests/bench/run.py [--quick]

Each part runs in a process of its own. How well slips are named is measured by slips.py, what tolerances cost by tolerance.py.
"""

from __future__ import annotations

import argparse
import json
import math
import os
import statistics
import subprocess
import sys
from pathlib import Path

HERE = Path(__file__).parent
PROCESSES = {
    "bare": "python -c pass", "numpy": "python -c 'import numpy'", "check": "calccheck check TS-101",
    "plain": "calccheck check GENERATED", "pdf": "calccheck mark --to pdf TS-101",
}  # fmt: skip
LIMITS = {"check": 2.2, "plain": 2.2, "pdf": 6.0, "throughput": 6.0, "megabytes": 150.0, "sheets": 1.1, "claims": 1.1}


def figures(part, *arguments):
    """What a part prints, run by this interpreter in a process of its own."""
    done = subprocess.run(
        [sys.executable, str(HERE / f"{part}.py"), *arguments], check=True, stdout=subprocess.PIPE, text=True
    )
    return json.loads(done.stdout)


def row(what, value, limit):
    return f"| {what} | {value:.3g} | {limit:g} | {'holds' if value <= limit else '**does not hold**'} |"


def starting(runs):
    seconds = figures("starting", "--runs", str(runs))
    yield f"Whole processes, {runs} runs of each in turn; medians, and × importing numpy:\n"
    yield "| process | by the clock | | by the processor | |\n|---|---|---|---|---|"
    middle = {name: {by: statistics.median(s) for by, s in found.items()} for name, found in seconds.items()}
    for name, what in PROCESSES.items():
        cells = [f"{s * 1000:.0f} ms | {s / middle['numpy'][by]:.2f}" for by, s in middle[name].items()]
        yield f"| `{what}` | {' | '.join(cells)} |"
    for name in ("check", "plain", "pdf"):
        for by in ("clock", "processor"):
            ratio = middle[name][by] / middle["numpy"][by]
            RESULTS.append(row(f"`{PROCESSES[name]}`, × importing numpy, by the {by}", ratio, LIMITS[name]))


def throughput(sheets):
    found = figures("throughput", "--sheets", str(sheets))
    yield (
        f"{found['sheets']} generated sheets, on average {found['lines']:.0f} lines and {found['claims']:.0f} claims "
        f"({', '.join(f'{n} {v}' for v, n in found['verdicts'].items())} in the first hundred), checked in one process: "
        f"{found['milliseconds']:.1f} ms a sheet. × plain Markdown parsing of the same texts, sheet by sheet in turn, by round: "
        f"{', '.join(f'{r:.2f}' for r in found['ratios'])}; in loops of fifty sheets each: "
        f"{', '.join(f'{r:.2f}' for r in found['apart'])}. Peak memory {found['megabytes']:.0f} MB.\n"
    )
    ratio = statistics.median(found["ratios"])
    yield "| where the time goes | share | × plain Markdown parsing |\n|---|---|---|"
    for stage, share in found["stages"].items():
        yield f"| {stage} | {share:.0%} | {share * ratio:.2f} |"
    RESULTS.append(row("many sheets, × plain Markdown parsing, sheet by sheet", ratio, LIMITS["throughput"]))
    apart = statistics.median(found["apart"])
    RESULTS.append(row("many sheets, × plain Markdown parsing, in loops of their own", apart, LIMITS["throughput"]))
    RESULTS.append(row("peak memory for them, MB", found["megabytes"], LIMITS["megabytes"]))


def exponent(points):
    """The k of ``seconds = c·number^k``, by least squares, over the larger half of the numbers: there the number outweighs what
    every sheet costs.
    """
    half = points[len(points) // 2 :] if len(points) > 3 else points
    xs, ys = [math.log(n) for n, _ in half], [math.log(s) for _, s in half]
    x, y = sum(xs) / len(xs), sum(ys) / len(ys)
    return sum((a - x) * (b - y) for a, b in zip(xs, ys, strict=True)) / sum((a - x) ** 2 for a in xs)


def growth():
    yield "Time by size, processor time of the whole check:\n"
    for name, points in figures("growth").items():
        shown = ", ".join(f"{n}: {seconds * 1000:.3g} ms" for n, seconds in points)
        yield f"- {name}: {shown}; exponent {exponent(points):.2f}"
        if name in LIMITS:
            RESULTS.append(row(f"growth with {name}, exponent", exponent(points), LIMITS[name]))


RESULTS: list[str] = []


def main():
    options = argparse.ArgumentParser(description=__doc__.partition("\n")[0])
    options.add_argument("--quick", action="store_true", help="fewer runs and sheets")
    quick = options.parse_args().quick
    print(
        f"Python {sys.version.split()[0]}, {os.cpu_count()} processors, load {os.getloadavg()[0]:.1f} at the start.\n"
    )
    for part in (starting(5 if quick else 15), throughput(200 if quick else 1000), growth()):
        print("\n".join(part), end="\n\n", flush=True)
    print("| measured | ratio | at most | |\n|---|---|---|---|\n" + "\n".join(RESULTS))


if __name__ == "__main__":
    main()
