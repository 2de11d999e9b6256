"""How time grows with the number of sheets, claims, nodes and sources.

    python tests/bench/growth.py

prints seconds by number as JSON; ``run.py`` fits the exponents.
"""

from __future__ import annotations

import json
import math
import os
import sys
import time
from pathlib import Path

os.environ.setdefault("OMP_NUM_THREADS", "1")  # as the command does, before numpy is loaded
sys.path.insert(0, str(Path(__file__).parent))

import generated

from calccheck.pipeline import check
from calccheck.source import Sheet

CLOCK = time.process_time
REPEATS = 3  # the fastest counts


def checked(*texts):
    """Seconds to check texts one after the other."""
    best = math.inf
    for _ in range(REPEATS):
        start = CLOCK()
        for text in texts:
            assert check(Sheet("bench.md", text)).clean, text
        best = min(best, CLOCK() - start)
    return best


def sheets(number):
    return checked(*(generated.sheet(n) for n in range(number)))


def ladder(rungs, extra=""):
    """A ladder of 1 kΩ and 2 kΩ that is closed by 2 kΩ: every node has half the voltage of the one before it."""
    lines = ["reference g", "V1: 1.024 V, n0 to g"]
    for k in range(1, rungs + 1):
        lines += [f"Rs{k}: 1 kΩ, n{k - 1} to n{k}", f"Rp{k}: 2 kΩ, n{k} to g"]
    return "\n".join(["```circuit", *lines, f"Rt: 2 kΩ, n{rungs} to g", "```", "", extra])


def claims(number):
    """One circuit; chains with a formula, numbers put in and a value, on each of its nodes in turn."""
    worked = []
    for n in range(number):
        k = n % 8 + 1
        above, here = 1024 / 2 ** (k - 1), 1024 / 2**k
        worked.append(f"V_n{k} = V_n{k - 1} / 2 = {above:g} mV / 2 = {here:g} mV")
    return checked(ladder(8, "\n".join(["```working", *worked, "```", ""])))


def nodes(number):
    """A ladder of so many nodes; the claim on the first rung costs next to nothing."""
    return checked(ladder(number - 2, "`V_n1 = 512 mV`\n"))


def sources(number):
    """So many voltages over equal resistors on one bus: their mean; one claim about it."""
    lines = ["reference g", f"RL: {number} MΩ, bus to g"]
    for k in range(1, number + 1):
        lines += [f"V{k}: {k} V, a{k} to g", f"R{k}: 1 Ω, a{k} to bus"]
    mean = (number + 1) / 2
    return checked("\n".join(["```circuit", *lines, "```", "", f"`V_bus = {mean:.1f} V`", ""]))


MEASURED = {
    "sheets": (sheets, (50, 100, 200, 400, 800)),
    "claims": (claims, (20, 40, 80, 160, 320, 640)),
    "nodes": (nodes, (5, 10, 20, 40, 80, 160, 300)),
    "sources": (sources, (1, 2, 4, 8, 11, 16, 32, 64)),
}


def main():
    print(json.dumps({name: [(n, measure(n)) for n in numbers] for name, (measure, numbers) in MEASURED.items()}))


if __name__ == "__main__":
    main()
