"""Slips: hand-made sheets with the arithmetic beside them, the sheet's git history, and a small run of the bench."""

from __future__ import annotations

import json
import os
import random
import re
import subprocess
import sys
import time
from fractions import Fraction
from pathlib import Path

import pytest
from test_standards import E24, by_formula

from calccheck import check_text, pipeline
from calccheck.command.history import LOOK_BACK, earlier_versions
from calccheck.judge.slips.table import SLIPS
from calccheck.model import Settings
from calccheck.pipeline import check
from calccheck.preferred_values import SERIES, neighbours
from calccheck.solve import solve_batch
from calccheck.source import Sheet

sys.path.insert(0, str(Path(__file__).parent / "bench"))

import hand
import slips as bench
from seeding import quantities

CASES = sorted((Path(__file__).parent / "cases" / "slips").glob("*.md"))
KEYS = {
    "sign", "prefix", "decimal-point", "digits-swapped", "digit-slip", "source-missing", "source-reversed", "source-twice",
    "source-zeroed-wrongly", "controlled-source-zeroed", "power-superposed", "swapped-values", "element-absent",
    "element-shorted", "divider-complement", "series-parallel", "other-quantity", "stale", "neighbour-value", "reciprocal",
    "factor-two", "percent", "working-slip", "early-rounding", "peak-rms", "degrees-radians", "omega-frequency",
    "magnitudes-added", "conjugate", "log-ten-twenty", "line-phase", "drop-forgotten", "stage-kind",
    "tolerance-combined",
}  # fmt: skip


def written(word, text):
    """What a case's comment says behind a word."""
    found = re.search(rf"^\W*{word}: (.*)$", text, re.MULTILINE)
    return found[1] if found else ""


@pytest.mark.parametrize("path", CASES, ids=lambda p: p.stem)
def test_the_slip_of_a_hand_made_sheet_stands_first(path):
    text = path.read_text(encoding="utf-8")
    slip, says, part = (written(word, text) for word in ("slip", "says", "earlier"))
    before = re.sub(rf"^{part.partition(':')[0]}: .*$", part, text, flags=re.MULTILINE) if part else text
    report = check(Sheet(path.name, text), Settings(), earlier=lambda: [("commit 1a2b3c4, 2026-11-18", before)])
    assert {j.verdict for j in report.claims} == {"differs"}
    for j in report.claims:
        if slip == "none":
            assert j.slips == ()
        else:
            assert j.slips[0].key == slip
            assert j.slips[0].text.startswith("consistent with ")
    assert slip == "none" or says in report.claims[0].slips[0].text


def test_every_slip_has_a_hand_made_sheet_and_a_row():
    assert (
        {kind.key for kind in SLIPS}
        == KEYS
        == {written("slip", p.read_text(encoding="utf-8")) for p in CASES} - {"none"}
    )
    assert len(SLIPS) == len(KEYS)


DIVIDER = """```circuit
reference com
V1: 10 V, a to com
R1: 1 kΩ, a to b
R2: 2.2 kΩ, b to com
```

"""
TWO_SOURCES = """```circuit
reference com
V1: 12.6 V, a to com
R1: 2 Ω, a to n
V2: 9.41 V, b to com
R2: 3 Ω, b to n
RL: 6 Ω, n to com
```

"""


def slips_of(text, number=0):
    return check_text("sheet.md", text).claims[number].slips


def test_more_than_three_kinds_do_not_decide_and_all_are_listed():
    """Four equal resistors side by side take 2.5 mA each of 10 mA; half, twice, exchanged and left out meet in many numbers."""
    circuit = "```circuit\nreference com\nV1: 10 V, a to com\nR1: 1 kΩ, a to b\nR2: 1 kΩ, b to com\nR3: 1 kΩ, b to com\n```\n\n"
    j = check_text("sheet.md", circuit + "`V_b = 6.667 V`").claims[0]  # R2 ∥ R3 = 500 Ω: 3.333 V
    assert len(j.slips) > 3
    assert j.message.endswith(f"{len(j.slips)} kinds of slip give this number, so it does not decide between them")


def test_a_value_cut_off_is_still_named():
    """V2 alone gives 9.41 V / 3 Ω / 1 S = 3.13667 V: 3.137 rounded, 3.136 cut off."""
    assert [s.key for s in slips_of(TWO_SOURCES + "`V_n = 3.136 V`")] == ["source-missing"]
    assert slips_of(TWO_SOURCES + "`V_n = 3.135 V`") == ()


def test_what_stands_or_cannot_be_read_has_no_slips():
    report = check_text("sheet.md", DIVIDER + "`V_b = 6.875 V` `V_q = 3 V`")
    assert [(j.verdict, j.slips) for j in report.claims] == [("agrees", ()), ("unchecked", ())]


def test_the_first_value_that_fails_is_explained():
    j = check_text("sheet.md", DIVIDER + "`V_b = V1 × R2 / (R1 + R2) = 6.875 V = 6.857 V`").claims[0]
    assert j.slips[0].key == "digits-swapped"


def test_a_part_restated_wrongly():
    """R2 = 1 kΩ is R1's value."""
    assert [s.key for s in slips_of(DIVIDER + "`R2 = 1.00 kΩ`")] == ["swapped-values", "other-quantity"]
    assert [s.key for s in slips_of(DIVIDER + "`R2 = 2.20 Ω`")] == ["prefix"]


def test_a_wrong_formula_is_explained_exactly():
    """R1 and R2 exchanged in the divider's formula: 3.125 V to nine figures, whatever is printed behind it."""
    assert slips_of(DIVIDER + "`V_b = V1 × R1 / (R1 + R2)`")[0].key == "divider-complement"


def test_free_symbols_get_no_invented_numbers():
    text = DIVIDER.replace("1 kΩ", "Ra Ω").replace("2.2 kΩ", "Rb Ω") + "`V_b = V1 × Ra / (Ra + Rb)`"
    found = slips_of(text)
    assert found[0].key == "divider-complement"
    assert not any(re.search(r": [\d.]+ V$", s.text) for s in found)


def test_parts_with_several_terminals_and_alternating_sources_do_not_stop_it():
    """Without RE no emitter current flows and so none into the base: V_b = 12 V × 10 / 57 = 2.105 V."""
    transistor = """```circuit
reference com
Vcc: 12 V, s to com
R1: 47 kΩ, s to b
R2: 10 kΩ, b to com
RC: 2.2 kΩ, s to c
RE: 1 kΩ, e to com
Q1: npn, base b, collector c, emitter e, V_BE 0.65 V, beta 150
```

`V_b = 2.105 V`
"""
    assert [s.key for s in slips_of(transistor)] == ["element-absent"]
    alternating = (
        DIVIDER.replace("V1: 10 V, a to com", "V1: 10 V ∠ 0°, a to com, 400 Hz")
        + "`|V_b| = 6.857 V` `V_b = 6.9 V ∠ 3°`"
    )
    report = check_text("sheet.md", alternating)
    assert [j.verdict for j in report.claims] == ["differs", "differs"]
    assert [s.key for s in report.claims[0].slips] == ["digits-swapped"]


# --- preferred values -----------------------------------------------------------------------------------------------


def test_the_series_are_those_of_the_standard():
    assert list(SERIES["E24"]) == E24
    assert list(SERIES["E96"]) == by_formula(96)
    assert 920 in SERIES["E192"] and 919 not in SERIES["E192"]
    assert [len(SERIES[name]) for name in ("E3", "E6", "E12", "E48", "E192")] == [3, 6, 12, 48, 192]


@pytest.mark.parametrize(
    ("value", "expected"),
    [("4700", {"3900", "5600", "4300", "5100"}), ("5.1", {"4.7", "5.6"}), ("10", {"8.2", "12", "9.1", "11"}),
     ("0.91", {"0.82", "1"}), ("4990", {"4870", "5110"}), ("1234", set())],
)  # fmt: skip
def test_neighbours(value, expected):
    assert {*neighbours(Fraction(value))} == {Fraction(x) for x in expected}


# --- the sheet's history --------------------------------------------------------------------------------------------


@pytest.fixture
def repository(tmp_path, monkeypatch):
    """An empty git repository, and git as a hook or a terminal would run it."""
    for name in [n for n in os.environ if n.startswith("GIT_")]:
        monkeypatch.delenv(name)
    monkeypatch.setenv("GIT_CEILING_DIRECTORIES", str(tmp_path.parent))
    monkeypatch.setenv("GIT_CONFIG_GLOBAL", os.devnull)
    monkeypatch.setenv("GIT_CONFIG_NOSYSTEM", "1")
    folder = tmp_path / "calcs"
    folder.mkdir()

    def git(*arguments, **more):
        who = ("-c", "user.name=IK", "-c", "user.email=ik@example.org")
        return subprocess.run(["git", *who, *arguments], cwd=folder, capture_output=True, text=True, **more)

    git("init", "-q")
    return folder, git


def commit(repository, text, message="more", name="sheet.md"):
    folder, git = repository
    (folder / name).write_text(text, encoding="utf-8")
    git("add", name)
    assert git("commit", "-q", "-m", message).returncode == 0
    return git("log", "-1", "--format=%h, %cs").stdout.strip()


def run_check(folder, name="sheet.md", **environment):
    command = [sys.executable, "-m", "calccheck", "check", "--format", "json", name]
    done = subprocess.run(command, cwd=folder, capture_output=True, text=True, env={**os.environ, **environment})
    assert done.returncode == 1, done.stderr
    return [s for c in json.loads(done.stdout)["sheets"][0]["claims"] for s in c["slips"]], done.stderr


STALE = DIVIDER + "`V_b = 6.875 V`\n"  # 10 V × 2.2 / 3.2
CHANGED = STALE.replace("2.2 kΩ", "3.3 kΩ")


def test_a_value_right_at_an_earlier_commit(repository):
    commit(repository, STALE)
    label = commit(repository, CHANGED)
    commit(repository, CHANGED + "\nA later remark.\n")
    found, problems = run_check(repository[0])
    assert found[0]["slip"] == "stale"
    assert f"right until R2 went from 2.2 kΩ to 3.3 kΩ (commit {label})" in found[0]["text"]
    assert problems == ""


def test_a_change_that_is_not_committed_yet(repository):
    label = commit(repository, STALE)
    (repository[0] / "sheet.md").write_text(CHANGED, encoding="utf-8")
    found, _ = run_check(repository[0])
    assert f"right until R2 went from 2.2 kΩ to 3.3 kΩ (since commit {label})" in found[0]["text"]


def test_staged_content_against_the_last_commit_inside_a_hook(repository):
    folder, git = repository
    label = commit(repository, STALE)
    hook = folder / ".git" / "hooks" / "pre-commit"
    hook.parent.mkdir(exist_ok=True)
    hook.write_text(f'#!/bin/sh\nexec "{sys.executable}" -m calccheck check sheet.md\n', encoding="utf-8")
    hook.chmod(0o755)
    (folder / "sheet.md").write_text(CHANGED, encoding="utf-8")
    done = git("commit", "-q", "-a", "-m", "R2 raised")
    assert done.returncode == 1
    assert f"right until R2 went from 2.2 kΩ to 3.3 kΩ (since commit {label})" in done.stdout + done.stderr


def test_a_renamed_sheet_keeps_its_history(repository):
    folder, git = repository
    commit(repository, STALE, name="älter 1.md")
    git("mv", "älter 1.md", "sheet.md")
    commit(repository, CHANGED)
    assert [s["slip"] for s in run_check(folder)[0]] == ["stale"]


def test_other_changes_of_a_circuit_are_told(repository):
    commit(
        repository, DIVIDER.replace("\nR2", "\nR9: 4.7 kΩ, b to com\nR2") + "`V_b = 5.998 V`\n"
    )  # 2.2 ∥ 4.7 = 1.49855
    commit(repository, DIVIDER + "`V_b = 5.998 V`\n")
    assert "right until R9 was taken out (" in run_check(repository[0])[0][0]["text"]


def test_silent_without_repository_history_or_git(repository, tmp_path):
    folder, _ = repository
    (folder / "sheet.md").write_text(CHANGED, encoding="utf-8")
    assert run_check(folder) == ([], "")  # no commit yet
    commit(repository, STALE, name="other.md")
    assert run_check(folder) == ([], "")  # commits, but none of this sheet
    commit(repository, STALE)
    (folder / "sheet.md").write_text(CHANGED, encoding="utf-8")
    assert run_check(folder, PATH=str(tmp_path)) == ([], "")  # no git
    (tmp_path / "sheet.md").write_text(CHANGED, encoding="utf-8")
    assert run_check(tmp_path) == ([], "")  # no repository


def test_the_look_back_is_bounded(repository):
    folder, _ = repository
    for k in range(LOOK_BACK + 2):
        commit(repository, f"{STALE}\nRemark {k}.\n")
    texts = earlier_versions(folder / "sheet.md")
    assert len(texts) == LOOK_BACK
    assert "Remark 21." in texts[0][1] and "Remark 2." in texts[-1][1]


def test_history_is_not_read_where_every_claim_stands():
    def never():
        raise AssertionError("read")

    assert check(Sheet("sheet.md", STALE), Settings(), earlier=never).clean


# --- measured -------------------------------------------------------------------------------------------------------


def test_a_small_run_of_the_bench():
    """Full figures stand in docs/slips.md; here only that nothing is missed and nothing right is called wrong."""
    scores, (right, alarms) = bench.measured(bench.DirectCurrent, seed=7, figures=4, each=6, unexplained=60, right=120)
    every = [scores[kind] for kind in bench.DC]
    assert all(s.detected == s.claims >= 6 for s in [*every, scores["unexplained"]])
    assert (right >= 120, alarms) == (True, 0)
    claims = sum(s.claims for s in every)
    assert sum(s.first for s in every) >= 0.85 * claims
    assert sum(s.two for s in every) >= 0.93 * claims
    assert scores["unexplained"].first <= 0.15 * scores["unexplained"].claims


@pytest.mark.undisturbed
def test_a_hundred_wrong_claims_stay_within_their_time():
    """Twenty nodes: no more than three times the time of the right claims, and 50 ms for each wrong one."""
    rng = random.Random(20)
    parts = large_circuit(rng)
    assert len({n for p in parts for n in (p.plus, p.minus)}) == 20
    wanted = rng.sample(quantities(parts), 100)
    right, wrong = (sheet_of(parts, wanted, factor) for factor in (1.0, 1.07))
    check(right, Settings())
    start = time.process_time()
    standing = check(right, Settings())
    middle = time.process_time()
    failing = check(wrong, Settings())
    end = time.process_time()
    assert standing.counts["agrees"] == 100
    assert failing.counts["differs"] >= 95  # of a current of nothing 7 % is nothing
    assert end - middle <= 3 * (middle - start) + 0.05 * failing.counts["differs"]


def test_the_hypotheses_of_a_claim_are_one_batch_of_bounded_size(monkeypatch):
    """A ladder of 120 nodes has thousands of variants; no more are solved than the bound on work allows."""
    batches = []

    def counting(circuits, frequency):
        batches.append([2 * len(c.elements) for c in circuits])
        return solve_batch(circuits, frequency)

    monkeypatch.setattr(pipeline, "solve_batch", counting)
    rungs = [hand.Part("R", f"R{k}", f"n{k}", f"n{k - 1}" if k > 1 else "com", 10.0 + k) for k in range(1, 121)]
    posts = [hand.Part("R", f"P{k}", f"n{k}", "com", 470.0 + k) for k in range(2, 121, 2)]
    large = [*rungs, *posts, hand.Part("I", "Ia", "com", "n120", 0.01), hand.Part("I", "Ib", "com", "n60", 0.01)]
    report = check(Sheet("large.md", hand.circuit_block(large) + "\n\n`V_n3 = 1.234 V`"), Settings())
    assert [j.verdict for j in report.claims] == ["differs"]
    assert len(batches) == 1
    assert 0 < sum(size**3 for size in batches[0]) <= 5e8


def large_circuit(rng):
    nodes = ["com", *(f"n{k}" for k in range(1, 18))]
    tree = [(n, rng.choice(nodes[max(0, k - 3) : k])) for k, n in enumerate(nodes) if k]
    links = tree + [tuple(rng.sample(nodes, 2)) for _ in range(12)] + [("sa", "n5"), ("sb", "n9")]
    parts = [
        hand.Part("R", f"R{k}", a, b, rng.choice(hand.E24) * rng.choice((1.0, 10.0))) for k, (a, b) in enumerate(links)
    ]
    return [*parts, hand.Part("V", "Va", "sa", "com", 12.0), hand.Part("V", "Vb", "sb", "com", 5.0),
            hand.Part("I", "Ia", "com", "n12", 0.01)]  # fmt: skip


def sheet_of(parts, wanted, factor):
    claims = []
    for q in wanted:
        text, unit, _ = hand.printed(hand.worth(q, parts) * factor, 4, hand.UNITS[q.letter])
        claims.append(f"`{q.text()} = {text} {unit}`")
    return Sheet("large.md", "\n\n".join([hand.circuit_block(parts), *claims]))
