"""Measures how well slips are named: claims right, wrong by one known slip, and wrong for no reason, in random and real sheets.

    python tests/bench/slips.py [--seed N] [--each N]

prints a Markdown table for each number of printed figures. By kind: claims; detected: said to differ; first: the slip stands
first among those named; two: among the first two.
"""

from __future__ import annotations

import argparse
import random
import re
import sys
import time
from collections import Counter, defaultdict
from dataclasses import dataclass, field
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))

import hand
import hand_ac
import hand_models
import seeds
import seeds_ac
import seeds_ac_circuit
import seeds_symbols
import seeds_working
from seeding import Bench
from seeding_ac import AcBench

from calccheck.model import Settings
from calccheck.pipeline import check
from calccheck.source import Sheet

DC = (
    "sign", "prefix", "decimal-point", "digits-swapped", "digit-slip", "reciprocal", "factor-two", "percent",
    "source-missing", "source-reversed", "source-twice", "source-zeroed-wrongly", "controlled-source-zeroed",
    "power-superposed", "swapped-values", "element-absent", "element-shorted", "divider-complement", "series-parallel",
    "other-quantity", "stale", "neighbour-value", "working-slip", "early-rounding",
)  # fmt: skip
AC = (
    "sign", "prefix", "decimal-point", "digits-swapped", "digit-slip", "reciprocal", "factor-two", "peak-rms",
    "degrees-radians", "omega-frequency", "magnitudes-added", "conjugate", "log-ten-twenty", "line-phase", "source-missing",
    "source-reversed", "source-twice", "source-zeroed-wrongly", "controlled-source-zeroed", "power-superposed",
    "swapped-values", "element-absent", "element-shorted", "divider-complement", "series-parallel", "other-quantity",
    "stale", "neighbour-value", "stage-kind", "working-slip", "early-rounding",
)  # fmt: skip
SYMBOLS = (
    "sign", "factor-two", "source-missing", "source-reversed", "source-twice", "source-zeroed-wrongly",
    "controlled-source-zeroed", "swapped-values", "element-absent", "element-shorted", "divider-complement",
    "series-parallel", "other-quantity", "stage-kind",
)  # fmt: skip
MODELS = ("drop-forgotten", "stage-kind")


@dataclass
class Score:
    """What came of the claims of one kind."""

    claims: int = 0
    detected: int = 0
    first: int = 0
    two: int = 0
    taken_for: Counter = field(default_factory=Counter)


class DirectCurrent:
    """Random circuits and those of the sheets, at direct current."""

    title, kinds, figures = "Direct current", DC, (3, 4, 5)
    without_slip = "Wrong numbers without a slip, within 20 % of the truth"
    modules = (seeds, seeds_working)

    def __init__(self, rng):
        self.rng, self.real = rng, list(real_circuits(Path(__file__).parents[2] / "sheets"))

    def draw(self, turn, figures):
        rng, real = self.rng, self.real
        parts = real[turn // 4 % len(real)] if turn % 4 == 0 else hand.random_circuit(rng, turn % 4 == 1)
        return Bench(parts, rng, figures), hand.circuit_block(parts)

    def seed(self, kind, bench):
        name = kind.replace("-", "_")
        seed = next(getattr(m, name) for m in self.modules if hasattr(m, name))(bench)
        return None if seed is None or min(abs(seed.truth), abs(seed.value)) < 1e-11 else seed

    def wrong(self, seed):
        """Whether a number is wrong by the language's rules: beyond its last place, and beyond the carry of a working."""
        text, shown, unit = seed.claim()
        off = abs(shown - seed.truth)
        may_be_rounded = text.count(" = ") > 1 or text.split()[-2].endswith("0")
        return off > 1.001 * unit and not (may_be_rounded and off <= 0.005001 * abs(seed.truth))

    def claim(self, seed):
        return seed.claim()[0]

    def block(self, circuit):
        return hand.circuit_block(circuit)


class HandModels(DirectCurrent):
    """Diodes, transistors and op-amp stages at direct current."""

    title, kinds = "Op-amps and hand models at direct current", MODELS
    modules = (hand_models, seeds, seeds_working)

    def draw(self, turn, figures):
        parts = hand_models.stage(self.rng) if turn % 2 else hand_models.with_drops(self.rng)
        return Bench(parts, self.rng, figures), hand_models.circuit_block(parts)


class AlternatingCurrent:
    """Random circuits of one frequency, op-amp stages and three-phase loads."""

    title, kinds, figures = "Alternating current", AC, (3, 4, 5)
    without_slip = "Wrong numbers without a slip, magnitudes within 20 % and angles within 20° of the truth"

    def __init__(self, rng):
        self.rng = rng

    def draw(self, turn, figures):
        rng = self.rng
        special = {3: hand_ac.stage, 7: hand_ac.three_phases}.get(turn % 8)
        net = special(rng) if special else hand_ac.random_net(rng, turn % 4 == 1)
        return AcBench(net, rng, figures), hand_ac.circuit_block(net)

    def seed(self, kind, bench):
        name = kind.replace("-", "_")
        return next(getattr(m, name) for m in (seeds_ac, seeds_ac_circuit) if hasattr(m, name))(bench)

    def wrong(self, seed):
        """Whether a figure is off by more than its last place, and no rounding of a whole number with zeros at its end."""
        may_be_rounded = re.search(r"= [−-]?\d+0 ", seed.claim()) and seed.form in ("mag", "real")
        carry = max(seed.carry, 0.005 if may_be_rounded else 0.0) * 1.0002
        return seed.off() > 1.001 and not (carry and seed.off() * seed.place() <= carry * abs(seed.truth))

    def claim(self, seed):
        return seed.claim()

    def block(self, circuit):
        return hand_ac.circuit_block(circuit)


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


class Symbols:
    """Small circuits in free symbols, claims by formula."""

    title, kinds, figures = "By formula", SYMBOLS, (4,)
    without_slip = "Wrong formulas without a slip, one coefficient changed"

    def __init__(self, rng):
        self.rng = rng

    def draw(self, turn, figures):
        rng = self.rng
        parts = seeds_symbols.stage_parts(rng) if turn % 4 == 3 else seeds_symbols.random_parts(rng, turn % 4 == 1)
        return seeds_symbols.SymbolBench(parts, rng), seeds_symbols.circuit_block(parts)

    def seed(self, kind, bench):
        return getattr(seeds_symbols, kind.replace("-", "_"))(bench)

    def wrong(self, seed):
        return seeds_symbols.sympy.cancel(seed.value - seed.truth) != 0

    def claim(self, seed):
        return seed.claim()

    def block(self, circuit):
        return seeds_symbols.circuit_block(circuit)


def seeds_of(kind, domain, bench, wanted):
    """Up to so many seeds of a kind that this circuit has a place for."""
    found = []
    for _ in range(4 * wanted):
        seed = domain.seed(kind, bench) if len(found) < wanted else None
        if seed is not None and (kind == "right") != domain.wrong(seed):
            found.append(seed)
    return found


def judged(domain, block, claims):
    """The judgement of each seed's claim, all on one sheet."""
    text = "\n\n".join([block, *(f"`{domain.claim(s)}`" for s in claims)])
    versions = [(f"version {k}", domain.block(s.earlier)) for k, s in enumerate(claims) if s.earlier]
    report = check(Sheet("bench.md", text), Settings(), earlier=lambda: versions)
    assert len(report.claims) == len(claims), text
    return report.claims


def measured(make, seed, figures, each, unexplained, right):
    """Scores by kind, and the right claims judged and said to differ, over circuits until every kind has its number."""
    rng = random.Random(f"{seed} {figures}")
    domain = make(rng)
    scores = defaultdict(Score)
    alarms = [0, 0]
    wanted = dict.fromkeys(domain.kinds, each) | {"unexplained": unexplained}
    for turn in range(100 * each):
        short = [kind for kind, number in wanted.items() if scores[kind].claims < number]
        if not short and alarms[0] >= right:
            break
        bench, block = domain.draw(turn, figures)
        pairs = [(kind, s) for kind in short for s in seeds_of(kind, domain, bench, 8 if kind == "unexplained" else 2)]
        rng.shuffle(pairs)
        for (kind, s), j in zip(pairs, judged(domain, block, [s for _, s in pairs]), strict=True):
            _score(scores[kind], kind, j)
            if (kind in LOUD and [x.key for x in j.slips][:1] != [kind]) or (
                "missed" in LOUD and j.verdict != "differs"
            ):
                print(
                    block, domain.claim(s), j.verdict, j.message, *(f"  {x.key}: {x.text}" for x in j.slips), sep="\n"
                )
        if alarms[0] < right:
            claims = seeds_of("right", domain, bench, 30)
            found = judged(domain, block, claims)
            wrong = [(s, j) for s, j in zip(claims, found, strict=True) if j.verdict not in ("agrees", "rounded")]
            alarms = [alarms[0] + len(claims), alarms[1] + len(wrong)]
            for s, j in wrong if LOUD else ():
                print(block, domain.claim(s), j.verdict, j.message, sep="\n")
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


def table(domain, scores, figures):
    """One table in Markdown."""
    what = domain.title + (f", {figures} printed figures" if domain is not Symbols else "")
    lines = [f"### {what}", "", "| slip | claims | detected | named first | among first two | most often taken for |",
             "|---|---|---|---|---|---|"]  # fmt: skip
    total = Score()
    for kind in domain.kinds:
        s = scores[kind]
        for name in ("claims", "detected", "first", "two"):
            setattr(total, name, getattr(total, name) + getattr(s, name))
        taken = ", ".join(f"`{k}` {n}" for k, n in s.taken_for.most_common(2))
        lines.append(f"| `{kind}` | {_row(s)} | {taken} |")
    lines.append(f"| **all** | {_row(total)} | |")
    u = scores["unexplained"]
    lines += ["", f"{domain.without_slip}: {u.claims}, detected {_share(u.detected, u.claims)}, "
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
    options.add_argument("--of", choices=[*DOMAINS], action="append", help="which circuits (default: all)")
    options.add_argument(
        "--show", nargs="*", default=[], help="print the claims of these kinds that are not named first"
    )
    chosen = options.parse_args()
    LOUD.update(chosen.show)
    start = time.perf_counter()
    for name in chosen.of or DOMAINS:
        domain = DOMAINS[name]
        for figures in domain.figures:
            share = 1 if figures == 4 and domain is not Symbols else 3
            numbers = (n // share for n in (chosen.each, chosen.unexplained, chosen.right))
            scores, (claims, alarms) = measured(domain, chosen.seed, figures, *numbers)
            print("\n".join(table(domain, scores, figures)))
            print(f"\nRight claims: {claims}, false alarms: {alarms}.\n")
    print(f"Seed {chosen.seed}, {time.perf_counter() - start:.0f} s.")


LOUD = set()
DOMAINS = {"dc": DirectCurrent, "ac": AlternatingCurrent, "models": HandModels, "symbols": Symbols}


if __name__ == "__main__":
    main()
