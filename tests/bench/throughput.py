"""Many sheets in one process: time against plain Markdown parsing of the same texts, where the time goes, peak memory.

    python tests/bench/throughput.py [--sheets N] [--rounds N]

prints the figures as JSON; ``run.py`` starts it in a process of its own, so that the peak memory is that of this work alone.
"""

from __future__ import annotations

import argparse
import json
import resource
import statistics
import sys
import time
from collections import Counter
from dataclasses import dataclass, field
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))

import generated
from markdown_it import MarkdownIt

import calccheck.pipeline
import calccheck.read.sheet
from calccheck.pipeline import check
from calccheck.source import Sheet

CLOCK = time.process_time  # of this process alone: others may share the machine
APART = 50  # sheets in the loops that run one kind of work alone

# What is timed apart: the module in which the function is called, its name there, the row of the table.
STAGES = (
    (calccheck.read.sheet, "read_page", "read: the page as Markdown"),
    (calccheck.read.sheet, "read_circuit", "read: circuits"),
    (calccheck.read.sheet, "read_claims", "read: claims"),
    (calccheck.pipeline, "read_sheet", "read: title block, assumptions"),
    (calccheck.pipeline, "solve", "solve"),
    (calccheck.pipeline, "judge_sheet", "judge"),
)
REST = "the rest: cautions, ratings, figures, order of findings"


@dataclass
class Stopwatch:
    """Time by stage, each moment counted for the innermost stage alone."""

    spent: Counter = field(default_factory=Counter)
    running: list[str] = field(default_factory=list)
    since: float = 0.0

    def switch(self):
        now = CLOCK()
        if self.running:
            self.spent[self.running[-1]] += now - self.since
        self.since = now

    def timed(self, stage, function):
        def wrapped(*arguments, **named):
            self.switch()
            self.running.append(stage)
            try:
                return function(*arguments, **named)
            finally:
                self.switch()
                self.running.pop()

        return wrapped


def round_of(texts, together):
    """Seconds to check and to parse all texts, so many of one kind together before the other kind takes its turn.

    One sheet at a time, both meet the machine in the same state, busy or not. Many together, the small parser has the
    processor's caches to itself, and is faster.
    """
    parser = MarkdownIt("commonmark").enable("table")
    checked = parsed = 0.0
    for k in range(0, len(texts), together):
        start = CLOCK()
        for text in texts[k : k + together]:
            check(Sheet("bench.md", text))
        middle = CLOCK()
        for text in texts[k : k + together]:
            parser.parse(text)
        checked, parsed = checked + middle - start, parsed + CLOCK() - middle
    return checked, parsed


def stages_of(texts):
    """Share of the time by stage; the stages are timed in place, which costs a little itself."""
    watch = Stopwatch()
    for module, name, stage in STAGES:
        setattr(module, name, watch.timed(stage, getattr(module, name)))
    whole = watch.timed(REST, check)
    for text in texts:
        whole(Sheet("bench.md", text))
    return {stage: seconds / watch.spent.total() for stage, seconds in watch.spent.most_common()}


def main():
    options = argparse.ArgumentParser(description=__doc__.partition("\n")[0])
    options.add_argument("--sheets", type=int, default=1000)
    options.add_argument("--rounds", type=int, default=3)
    chosen = options.parse_args()
    texts = [generated.sheet(n) for n in range(chosen.sheets)]
    reports = [check(Sheet("bench.md", text)) for text in texts[:100]]
    verdicts = sum((Counter(j.verdict for j in r.claims) for r in reports), Counter())
    found = [round_of(texts, 1) for _ in range(chosen.rounds)]
    apart = [round_of(texts, APART) for _ in range(chosen.rounds)]
    figures = {
        "sheets": len(texts),
        "lines": statistics.mean(len(text.splitlines()) for text in texts),
        "claims": statistics.mean(len(r.claims) for r in reports),
        "verdicts": verdicts,
        "milliseconds": min(checked for checked, _ in found) / len(texts) * 1000,
        "ratios": [checked / parsed for checked, parsed in found],
        "apart": [checked / parsed for checked, parsed in apart],
        "megabytes": resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024,  # counted in kilobytes on Linux
        "stages": stages_of(texts[:200]),
    }
    print(json.dumps(figures))


if __name__ == "__main__":
    main()
