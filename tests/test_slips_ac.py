"""Slips of alternating current, of hand models and by formula: phasors by their figures, several frequencies, workings, time."""

from __future__ import annotations

import cmath
import math
import random
import sys
import time
from pathlib import Path

import pytest

from calccheck import check_text
from calccheck.annotate.to_markdown import to_markdown
from calccheck.judge.say import percent
from calccheck.model import Settings
from calccheck.pipeline import check
from calccheck.source import Sheet

sys.path.insert(0, str(Path(__file__).parent / "bench"))

import hand
import hand_ac
import slips as bench
from hand_ac import Net, Phasor, worth

# At 1 kHz X_C1 = 1591.55 Ω, |Z| = 1879.64 Ω, I = 5.32018 mA ∠ 57.858°, V_b = 8.46733 V ∠ −32.142° (tests/cases/slips/conjugate.md)
RC = "```circuit\nreference com\nV1: 10 V ∠ 0°, a to com, 1 kHz\nR1: 1 kΩ, a to b\nC1: 100 nF, b to com\n```\n\n"


def keys(text, sheet=RC, **more):
    (j,) = check(Sheet("s.md", sheet + text), Settings(), **more).claims[-1:]
    assert j.verdict == "differs", j.message
    return [s.key for s in j.slips]


def says(text, sheet=RC):
    (j,) = check_text("s.md", sheet + text).claims[-1:]
    return j.slips[0].text


# --- phasors by their figures ---------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("claim", "key"),
    [
        ("`V_b = 8.467 V ∠ −31.24°`", "digits-swapped"),  # in the angle alone
        ("`V_b = 8.647 V ∠ −32.14°`", "digits-swapped"),  # in the magnitude alone
        ("`V_b = 84.67 V ∠ −32.14°`", "decimal-point"),
        ("`V_b = 8.467 V ∠ −3.214°`", "decimal-point"),
        ("`V_b = 8.467 mV ∠ −32.14°`", "prefix"),
        ("`V_b = 8.467 V ∠ 147.86°`", "sign"),  # half a turn
        ("`arg V_b = 147.86°`", "sign"),
        ("`V_b = 8.467 V ∠ −42.14°`", "digit-slip"),
        ("`V_b = (7.170 + j4.505) V`", "conjugate"),  # 8.46733 V · (cos, sin) 32.142° = 7.16951 V, 4.50480 V
        ("`V_b = (−7.170 − j4.505) V`", "sign"),
        ("`V_b = (−7.170 − j4.505) V`", "sign"),
        ("`V_b = 5.320 V ∠ 57.86°`", "divider-complement"),  # V_R1
        ("`I_R1 = 5.320 A ∠ 57.86°`", "prefix"),
        ("`im V_b = 4.505 V`", "conjugate"),
        ("`Q_C1 = 45.05 mvar`", "conjugate"),  # (5.32018 mA)² · 1591.55 Ω = 45.0479 mvar, negative for a capacitor
    ],
)
def test_a_slip_in_one_figure_or_in_both(claim, key):
    if claim == "`V_b = (7.170 + j4.505) V`":
        assert cmath.isclose(cmath.rect(8.46733, math.radians(-32.1419)), 7.16951 - 4.50480j, rel_tol=1e-5)
    assert keys(claim)[0] == key


def test_both_figures_count_together():
    """Two figures in either of two say as much as four: with f for ω V_b = 10 V/(1 + j0.1) = 9.95 V ∠ −5.7°."""
    assert keys("`V_b = 9.95 V ∠ −5.7°`")[0] == "omega-frequency"
    assert keys("`V_b = 9.5 V ∠ −11°`") == []


def test_a_magnitude_is_explained_by_magnitudes():
    """V_R1 = 5.32018 V taken in the place of V_b."""
    assert "other-quantity" in keys("`|V_b| = 5.320 V`")
    assert keys("`|I_R1| = 5.320 A`")[0] == "prefix"


# --- in workings ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("claim", "key", "told"),
    [
        ("`Xc = 1 / (2 π × 1 kHz × C1) = 10.00 kΩ`", "omega-frequency", "f taken for ω"),
        # cos 30° = 0.866025 and cos(30 rad) = 0.154251, of 100 W
        ("`Px = 10 V × 10 A × cos(30°) = 15.43 W`", "degrees-radians", "degrees taken for radians in cos()"),
        ("`Zx = √((3 Ω)² + (4 Ω)²) = 7.000 Ω`", "magnitudes-added", "added without their angles"),
        ("`Vl = √3 × 230 V = 230.0 V`", "line-phase", "the phase value for the line's"),
        ("`V_b / V_a = −0.7225 dB`", "log-ten-twenty", "10 log taken where 20 log belongs"),
    ],
)
def test_slips_in_formulas(claim, key, told):
    assert keys(claim)[0] == key
    assert told in says(claim)


def test_a_wrong_formula_is_mended():
    assert keys("`Z_{a,com} without V1 = R1 + 1/(j × 1 kHz × C1)`")[0] == "omega-frequency"
    assert keys("`|Z_{a,com} without V1| = R1 + 1/(2 π × 1 kHz × C1)`")[0] == "magnitudes-added"


def test_names_that_belong_to_other_circuits_are_not_given():
    """√3 and lost stages of an amplifier say nothing where there are no three phases and no amplifier."""
    assert "line-phase" not in keys("`|V_b| = 14.67 V`")
    assert "stage-kind" not in keys("`|V_b| = 14.67 V`")
    direct = RC.replace("10 V ∠ 0°, a to com, 1 kHz", "10 V, a to com").replace("C1: 100 nF", "C1: 2.2 kΩ")
    assert "peak-rms" not in keys("`V_b = 9.723 V`", direct)  # 6.875 V · √2


# --- several frequencies --------------------------------------------------------------------------------------------

# parts of V_d: 12 V/(1 + 0.1) = 10.9091 V; at 50 Hz 2 V · 10 mS/(11 mS + j3.14159 mS) = 1.74828 V ∠ −15.939°;
# at 400 Hz 1 V · 10 mS/(11 mS + j25.1327 mS) = 0.364505 V ∠ −66.36°; rms √(10.9091² + 1.74828² + 0.364505²) V = 11.0543 V
RIPPLE = """```circuit
reference com
V1: 12 V, a to com
V2: 2 V ∠ 0°, b to a, 50 Hz
V3: 1 V ∠ 0°, c to b, 400 Hz
R1: 100 Ω, c to d
C1: 10 µF, d to com
R2: 1 kΩ, d to com
```

"""


@pytest.mark.parametrize(
    ("claim", "key"),
    [
        ("`rms V_d = 11.0483 V`", "source-missing"),  # √(10.9091² + 1.74828²)
        ("`rms V_d = 13.0219 V`", "magnitudes-added"),  # 10.9091 + 1.74828 + 0.364505
        ("`rms V_d = 10.9819 V`", "peak-rms"),  # √(10.9091² + (1.74828² + 0.364505²)/2)
        ("`P_R2 = 125.387 mW`", "peak-rms"),  # 119.008 mW + 2 · (3.05648 + 0.132864) mW
        ("`V_d at 50 Hz = 0.3645 V ∠ −66.36°`", "other-quantity"),
        ("`|V_d at 50 Hz| = 1.236 V`", "peak-rms"),
    ],
)
def test_slips_over_several_frequencies(claim, key):
    assert keys(claim, RIPPLE)[0] == key


# --- the sheet's history --------------------------------------------------------------------------------------------


def test_a_frequency_that_has_changed():
    """At 500 Hz X_C1 = 3183.10 Ω, V_b = 10 V · 3183.10/√(1000² + 3183.10²) = 9.54027 V."""
    before = RC.replace("1 kHz", "500 Hz")
    (j,) = check(
        Sheet("s.md", RC + "`|V_b| = 9.540 V`"), Settings(), earlier=lambda: [("commit 1a2b3c4, 2026-11-18", before)]
    ).claims
    assert j.slips[0].key == "stale"
    assert "right until V1 went from 500 Hz to 1 kHz" in j.slips[0].text


def test_a_symbol_that_has_changed():
    circuit = "```circuit\nreference com\nV1: Vin V, a to com\nR1: Ra Ω, a to b\nR2: Rb Ω, b to com\n```\n\n"
    before = circuit.replace("R2: Rb", "R2: 2*Rb")
    claim = "`V_b = Vin × 2 × Rb/(Ra + 2 × Rb)`"
    (j,) = check(
        Sheet("s.md", circuit + claim), Settings(), earlier=lambda: [("commit 1a2b3c4, 2026-11-18", before)]
    ).claims
    assert j.slips[0].key == "stale"
    assert "R2 went from 2*Rb Ω to Rb Ω" in j.slips[0].text


# --- measured -------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["ac", "models", "symbols"])
def test_a_small_run_of_the_bench(name):
    """Full figures stand in docs/slips.md; here only that nothing is missed and nothing right is called wrong."""
    domain = bench.DOMAINS[name]
    scores, (right, alarms) = bench.measured(domain, seed=7, figures=4, each=3, unexplained=20, right=40)
    every = [scores[kind] for kind in domain.kinds]
    assert all(s.detected == s.claims >= 3 for s in every)
    assert scores["unexplained"].detected == scores["unexplained"].claims >= 20
    assert (right >= 40, alarms) == (True, 0)
    claims = sum(s.claims for s in every)
    assert sum(s.first for s in every) >= 0.8 * claims
    assert sum(s.two for s in every) >= 0.9 * claims
    assert scores["unexplained"].first <= 0.2 * scores["unexplained"].claims


def large_net(rng):
    """Twenty nodes of resistors, coils and capacitors of like impedances, with three sources."""
    nodes = ["com", *(f"n{k}" for k in range(1, 18))]
    tree = [(n, rng.choice(nodes[max(0, k - 3) : k])) for k, n in enumerate(nodes) if k]
    links = tree + [tuple(rng.sample(nodes, 2)) for _ in range(12)] + [("sa", "n5"), ("sb", "n9")]
    parts = []
    for a, b in links:
        kind, ohms, omega = rng.choice("RRLC"), rng.choice(hand.E24) * 10.0, 2 * math.pi * 400
        value = {"R": ohms, "L": ohms / omega, "C": 1 / (omega * ohms)}[kind]
        parts.append(hand.Part(kind, "", a, b, hand_ac.preferred(value)))
    sources = [hand.Part("V", "Va", "sa", "com", 12.0), hand.Part("V", "Vb", "sb", "com", cmath.rect(5.0, 0.5))]
    return Net([*hand_ac.named(parts), *sources, hand.Part("I", "Ia", "com", "n12", 0.01)], 400)


@pytest.mark.undisturbed
def test_a_hundred_wrong_claims_stay_within_their_time():
    """Twenty nodes: no more than three times the time of the right claims, and 50 ms for each wrong one."""
    rng = random.Random(20)
    net = large_net(rng)
    forms = (("V", "polar"), ("I", "polar"), ("V", "mag"), ("P", "real"), ("Q", "real"))
    quantities = [Phasor(letter, (p.name,), form) for p in net.parts for letter, form in forms]
    wanted = rng.sample([q for q in quantities if abs(worth(q, net)) > 1e-9], 100)
    right, wrong = (sheet_of(net, wanted, factor) for factor in (1.0, 1.07))
    check(right, Settings())
    start = time.process_time()
    standing = check(right, Settings())
    middle = time.process_time()
    failing = check(wrong, Settings())
    end = time.process_time()
    assert (standing.counts["agrees"], failing.counts["differs"]) == (100, 100)
    assert end - middle <= 3 * (middle - start) + 0.05 * failing.counts["differs"]


def sheet_of(net, wanted, factor):
    claims = []
    for q in wanted:
        texts, unit, _ = hand_ac.texts_of(worth(q, net) * factor, q.form, 4, hand_ac.UNITS[q.letter])
        claims.append(f"`{q.text()} = {hand_ac.joined(texts, unit, q.form)}`")
    return Sheet("large.md", "\n\n".join([hand_ac.circuit_block(net), *claims]))


# --- as it is said --------------------------------------------------------------------------------------------------


def test_slips_are_sentences_in_a_marked_copy():
    marked = to_markdown(check_text("s.md", RC + "`V_b = 8.467 V ∠ 32.14°`"))
    assert "of its magnitude). Consistent with the angle, or the imaginary part, with the other sign" in marked


@pytest.mark.parametrize(("deviation", "said"), [(999.0, "a factor of 1000"), (99.0, "a factor of 100"), (1e9, "a factor of 1.00e+09"),
                                                 (0.111, "+11.1 %"), (-0.0017, "−0.17 %")])  # fmt: skip
def test_a_large_deviation_is_a_factor(deviation, said):
    assert percent(deviation) == said
