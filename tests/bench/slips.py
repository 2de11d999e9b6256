"""Measures how well slips are named: claims right, wrong by one known slip, and wrong for no reason, in random and real sheets.

    python tests/bench/slips.py [--seed N] [--each N]

prints a Markdown table for each number of printed figures. By kind: claims; detected: said to differ; first: the slip stands
first among those named; two: among the first two.
"""

from __future__ import annotations

import argparse
import random
import sys
import time
from collections import Counter, defaultdict
from dataclasses import dataclass, field
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))

import hand
import seeds
import seeds_working
from seeding import Bench

from calccheck.model import Settings
from calccheck.pipeline import check
from calccheck.source import Sheet

KINDS = (
    "sign", "prefix", "decimal-point", "digits-swapped", "digit-slip", "reciprocal", "factor-two", "percent",
    "source-missing", "source-reversed", "source-twice", "source-zeroed-wrongly", "controlled-source-zeroed",
    "power-superposed", "swapped-values", "element-absent", "element-shorted", "divider-complement", "series-parallel",
    "other-quantity", "stale", "neighbour-value", "working-slip", "early-rounding",
)  # fmt: skip


@dataclass
class Score:
    """What came of the claims of one kind."""

    claims: int = 0
    detected: int = 0
    first: int = 0
    two: int = 0
    taken_for: Counter = field(default_factory=Counter)


def real_circuits(folder):
    """The circuits of the sheets in a folder that the bench can solve, as read by the program's reading stage."""
    from calccheck.read.sheet import read_sheet

    letters = {"resistor": "R", "voltage source": "V", "current source": "I"}
    for path in sorted(folder.glob("*.md")):
        for c in read_sheet(Sheet(path.name, path.read_text(encoding="utf-8")), Settings()).circuits:
            if c.reference != "com" or any(e.kind not in letters or e.value is None for e in c.elements):
                continue
            parts = [hand.Part(letters[e.kind], e.name, e.plus, e.minus, float(e.value)) for e in c.elements]
            if hand.solved(parts) is not None and hand.sources(parts) and len(hand.resistors(parts)) > 1:
                yield parts


def wrong(seed):
    """Whether a seed's number is wrong by the language's rules: beyond its last place, and beyond the carry of a working."""
    text, shown, unit = seed.claim()
    off = abs(shown - seed.truth)
    may_be_rounded = text.count(" = ") > 1 or text.split()[-2].endswith("0")
    return off > 1.001 * unit and not (may_be_rounded and off <= 0.005001 * abs(seed.truth))


def seeds_of(kind, bench, wanted):
    """Up to so many seeds of a kind that this circuit has a place for."""
    name = kind.replace("-", "_")
    make = getattr(seeds, name, None) or getattr(seeds_working, name)
    found = []
    for _ in range(4 * wanted):
        seed = make(bench)
        if seed is None or len(found) == wanted or min(abs(seed.truth), abs(seed.value)) < 1e-11:
            continue
        if (kind == "right") != wrong(seed):
            found.append(seed)
    return found


def judged(parts, claims):
    """The judgement of each seed's claim, all on one sheet."""
    text = "\n\n".join([hand.circuit_block(parts), *(f"`{s.claim()[0]}`" for s in claims)])
    versions = [(f"version {k}", hand.circuit_block(s.earlier)) for k, s in enumerate(claims) if s.earlier]
    report = check(Sheet("bench.md", text), Settings(), earlier=lambda: versions)
    assert len(report.claims) == len(claims), text
    return report.claims


def measured(seed, figures, each, unexplained, right):
    """Scores by kind, and the right claims judged and said to differ, over circuits until every kind has its number."""
    rng = random.Random(f"{seed} {figures}")
    real = list(real_circuits(Path(__file__).parents[2] / "sheets"))
    scores = defaultdict(Score)
    alarms = [0, 0]
    wanted = dict.fromkeys(KINDS, each) | {"unexplained": unexplained}
    for turn in range(100 * each):
        short = [kind for kind, number in wanted.items() if scores[kind].claims < number]
        if not short and alarms[0] >= right:
            break
        parts = real[turn // 4 % len(real)] if turn % 4 == 0 else hand.random_circuit(rng, turn % 4 == 1)
        bench = Bench(parts, rng, figures)
        pairs = [(kind, s) for kind in short for s in seeds_of(kind, bench, 8 if kind == "unexplained" else 2)]
        rng.shuffle(pairs)
        for (kind, _), j in zip(pairs, judged(parts, [s for _, s in pairs]), strict=True):
            _score(scores[kind], kind, j)
        if alarms[0] < right:
            claims = judged(parts, seeds_of("right", bench, 30))
            alarms = [alarms[0] + len(claims), alarms[1] + sum(j.verdict not in ("agrees", "rounded") for j in claims)]
    return scores, alarms


def _score(score, kind, j):
    keys = [s.key for s in j.slips]
    score.claims += 1
    score.detected += j.verdict == "differs"
    if kind == "unexplained":
        score.first += bool(keys)
        score.taken_for.update(keys[:1])
        return
    score.first += keys[:1] == [kind]
    score.two += kind in keys[:2]
    if keys[:1] != [kind]:
        score.taken_for[keys[0] if keys else "nothing"] += 1


def table(scores, figures):
    """One table in Markdown."""
    lines = [f"### {figures} printed figures", "", "| slip | claims | detected | named first | among first two | most often taken for |",
             "|---|---|---|---|---|---|"]  # fmt: skip
    total = Score()
    for kind in KINDS:
        s = scores[kind]
        for name in ("claims", "detected", "first", "two"):
            setattr(total, name, getattr(total, name) + getattr(s, name))
        taken = ", ".join(f"`{k}` {n}" for k, n in s.taken_for.most_common(2))
        lines.append(f"| `{kind}` | {_row(s)} | {taken} |")
    lines.append(f"| **all** | {_row(total)} | |")
    u = scores["unexplained"]
    lines += ["", f"Wrong numbers without a slip, within 20 % of the truth: {u.claims}, detected {_share(u.detected, u.claims)}, "
              f"given a name {_share(u.first, u.claims)} ({', '.join(f'`{k}` {n}' for k, n in u.taken_for.most_common(6))})."]  # fmt: skip
    return lines


def _row(s):
    return f"{s.claims} | {_share(s.detected, s.claims)} | {_share(s.first, s.claims)} | {_share(s.two, s.claims)}"


def _share(n, total):
    return f"{100 * n / total:.4g} %" if total else "–"


def main():
    options = argparse.ArgumentParser(description=__doc__.partition("\n")[0])
    options.add_argument("--seed", type=int, default=1)
    options.add_argument("--each", type=int, default=150, help="claims of each kind at four figures (default 150)")
    options.add_argument("--unexplained", type=int, default=1200, help="wrong numbers without a slip (default 1200)")
    options.add_argument("--right", type=int, default=3000, help="right claims at four figures (default 3000)")
    chosen = options.parse_args()
    start = time.perf_counter()
    for figures in (3, 4, 5):
        share = 1 if figures == 4 else 3
        numbers = (n // share for n in (chosen.each, chosen.unexplained, chosen.right))
        scores, (claims, alarms) = measured(chosen.seed, figures, *numbers)
        print("\n".join(table(scores, figures)))
        print(f"\nRight claims: {claims}, false alarms: {alarms}.\n")
    print(f"Seed {chosen.seed}, {time.perf_counter() - start:.0f} s.")


if __name__ == "__main__":
    main()
