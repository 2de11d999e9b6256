"""Extremes within tolerances against corners and dense samples solved by the bench's own tableau, and against closed forms."""

from __future__ import annotations

import math
import random
import sys
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest

sys.path.insert(0, str(Path(__file__).parent / "bench"))

import hand
import tolerance as bench
from boxes import as_circuit, call, corners, formula, inside, name, network, op, with_values
from circuits import circuit, part

from calccheck.solve.enclosures import ENCLOSING, Enclosure, Unbounded
from calccheck.solve.tolerance import Tolerances
from calccheck.solve.workers import Families, Pole, Worker
from calccheck.toleranced import worked

READS = {
    "v": lambda s: s.potentials["n2"],
    "u": lambda s: s.potentials["n0"] - s.potentials["n2"],
    "i": lambda s: s.currents["R1"],
    "s": lambda s: s.currents["V1"],
}
FORMULAS = {
    "voltage": name("v"),
    "current": name("i"),
    "of the source": op("÷", name("v"), name("V1")),
    "difference": op("-", name("v"), name("u")),
    "size": call("abs", name("i")),
    "power of a resistor": call("power", name("R1"), name("i")),
    "power of the source": op("×", name("V1"), name("s")),
    "sum of powers": op("+", op("×", name("v"), name("i")), call("power", name("R1"), name("i"))),
}


def by_hand(kind, parts, values):
    """The same from the tableau: nothing of the program."""
    found = hand.solved(with_values(parts, values))
    if found is None:
        return None
    volts, amperes = found
    v, u, i, s = volts["n2"], volts["n0"] - volts["n2"], amperes["R1"], amperes["V1"]
    ohms, source = values["R1"], values["V1"]
    return {
        "voltage": v, "current": i, "of the source": v / source, "difference": v - u, "size": abs(i),
        "power of a resistor": ohms * i * i, "power of the source": source * s, "sum of powers": v * i + ohms * i * i,
    }[kind]  # fmt: skip


def box(kind, parts, tolerance):
    node = FORMULAS[kind]
    used = {k: r for k, r in READS.items() if k in repr(node)}
    return formula(as_circuit(parts), node, used, tolerance)


LINEAR = ("voltage", "current", "of the source", "difference")
KINDS = (*LINEAR, "size", "power of a resistor", "power of the source", "sum of powers")


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("seed", range(12))
def test_no_corner_and_no_sample_lies_beyond_the_extremes(kind, seed):
    """Up to nine values with tolerances of 2 to 50 %; every third circuit with controlled sources."""
    rng = random.Random(seed)
    parts = network(rng, rng.choice((4, 5)), rng.choice((6, 8)), controlled=seed % 3)
    boxed = box(kind, parts, rng.choice(("0.02", "0.1", "0.5")))
    try:
        low, high = (Tolerances().extreme(boxed, largest) for largest in (False, True))
    except Pole:
        signs = {np.sign(determinant(with_values(parts, p))) for p in corners(boxed.varied)}
        assert len(signs) > 1
        return
    found = [by_hand(kind, parts, p) for p in (*corners(boxed.varied), *inside(boxed.varied, 300, seed))]
    room = max(1e-7 * (max(found) - min(found)), 1e-9 * max(map(abs, found)), 1e-15)
    assert low.value <= min(found) + room
    assert high.value >= max(found) - room
    for extreme in (low, high):  # what is told lies where it is told to lie
        at = {k: float(x) for k, x in extreme.point.items()}
        assert by_hand(kind, parts, at) == pytest.approx(extreme.value, abs=room)
    if kind in LINEAR:
        ends = [by_hand(kind, parts, p) for p in corners(boxed.varied)]
        assert low.proved and high.proved
        assert (low.value, high.value) == pytest.approx((min(ends), max(ends)), abs=room)
    if kind in ("size", "power of a resistor"):
        assert high.proved


def determinant(parts):
    """Of the nodal equations with every source's current an unknown: its sign tells a pole."""
    nodes = sorted({n for p in parts for n in (p.plus, p.minus)} - {"com"})
    at = {n: k for k, n in enumerate(nodes)}
    size = len(nodes) + 1
    a = np.zeros((size, size))
    for p in parts:
        ends = [(at[n], sign) for n, sign in ((p.plus, 1), (p.minus, -1)) if n in at]
        for k, sign in ends:
            if p.kind == "V":
                a[k, -1] += sign
                a[-1, k] += sign
            across = (p.plus, p.minus) if p.kind == "R" else p.by
            factor = 1 / p.value if p.kind == "R" else p.value
            for n, other in zip(across, (1, -1), strict=True) if p.kind in "RG" else ():
                if n in at:
                    a[k, at[n]] += sign * other * factor
    return np.linalg.det(a)


@pytest.mark.parametrize(("seed", "tolerance"), [(1, "0.01"), (2, "0.05"), (3, "0.05"), (4, "0.1")])
def test_thirty_values_are_proved_and_dense_samples_lie_within(seed, tolerance):
    rng = random.Random(seed)
    parts = network(rng, 20, 30)
    boxed = box("voltage", parts, tolerance)
    assert len(boxed.varied) == 30
    low, high = (Tolerances().extreme(boxed, largest) for largest in (False, True))
    found = [by_hand("voltage", parts, p) for p in inside(boxed.varied, 500, seed)]
    assert low.value < min(found) and max(found) < high.value
    assert low.proved and high.proved
    step = {k: float(x) for k, x in high.point.items()}
    for v in boxed.varied:  # no neighbouring corner is higher
        other = float(v.low if step[v.key] == float(v.high) else v.high)
        assert by_hand("voltage", parts, step | {v.key: other}) <= high.value * (1 + 1e-12)


def test_what_cannot_be_proved_is_searched_and_called_so():
    rng = random.Random(9)
    parts = network(rng, 20, 30, controlled=4)
    boxed = box("sum of powers", parts, "0.3")
    high = Tolerances().extreme(boxed, True)
    assert not high.proved and "search" in high.how
    assert high.value >= max(by_hand("sum of powers", parts, p) for p in inside(boxed.varied, 500, 9))


def test_a_matched_load_inside_the_box():
    """P = V²·R/(Rs + R)² is largest at R = Rs, V²/(4·Rs) = 0.25 W (common practice); nominal 120 Ω ±50 % spans it."""
    made = circuit(part("V", "V1", "a", "com", 10), part("R", "Rs", "a", "b", 100), part("R", "RL", "b", "com", 120))
    boxed = formula(
        made, call("power", name("RL"), name("i")), {"i": lambda s: s.currents["RL"]},
        lambda e: "0.5" if e.name == "RL" else "0",
    )  # fmt: skip
    high = Tolerances().extreme(boxed, True)
    assert high.value == pytest.approx(0.25, rel=1e-12)
    assert float(high.point["RL"]) == pytest.approx(100, rel=1e-6)
    assert high.proved
    ends = [100 * r / (100 + r) ** 2 for r in (60, 180)]
    assert max(ends) < 0.25
    assert Tolerances().extreme(boxed, False).value == pytest.approx(min(ends), rel=1e-12)


def test_a_bridge_moves_through_zero():
    """Around balance a voltage's size is least inside the box: zero."""
    made = circuit(part("V", "V1", "a", "com", 10), part("R", "R1", "a", "p", 1000), part("R", "R2", "p", "com", 1000),
                   part("R", "R3", "a", "q", 1000), part("R", "R4", "q", "com", 1000))  # fmt: skip
    bridge = {"d": lambda s: s.potentials["p"] - s.potentials["q"]}
    size = formula(made, call("abs", name("d")), bridge, "0.01")
    assert Tolerances().extreme(size, False).value == pytest.approx(0, abs=1e-6)
    high = Tolerances().extreme(size, True)
    assert high.proved
    # two legs apart: V·(1.01 − 0.99)/2, the source 1 % high
    assert high.value == pytest.approx(10.1 * 0.01, rel=1e-12)


def test_a_pole_inside_the_tolerances_is_said():
    """A current source of −V/R across R: at −1 mS ±1 % beside 1 kΩ ±1 % the sum of conductances passes zero."""
    made = circuit(part("I", "I1", "com", "a", "0.001"), part("R", "R1", "a", "com", 1000),
                   part("F", "G1", "a", "com", "-0.000995", by=("a", "com")))  # fmt: skip
    boxed = formula(made, name("v"), {"v": lambda s: s.potentials["a"]}, "0.01")
    with pytest.raises(Pole, match="determinant changes sign"):
        Tolerances().extreme(boxed, True)
    narrow = formula(made, name("v"), {"v": lambda s: s.potentials["a"]}, "0.002")
    high = Tolerances().extreme(narrow, True)
    least = (1 / (1000 * 1.002)) - 0.000995 * 1.002
    assert high.value == pytest.approx(0.001002 / least, rel=1e-9)


def test_a_divisor_that_may_be_zero_is_a_pole():
    made = circuit(part("V", "V1", "a", "com", 10), part("R", "R1", "a", "p", 1000), part("R", "R2", "p", "com", 1000),
                   part("V", "V2", "q", "com", 5), part("R", "R3", "p", "q", 1000))  # fmt: skip
    node = op("÷", name("v"), name("d"))
    reads = {"v": lambda s: s.potentials["p"], "d": lambda s: s.potentials["p"] - s.potentials["q"]}
    with pytest.raises(Pole, match="divided by"):
        Tolerances().extreme(formula(made, node, reads, "0.05"), True)


def test_a_value_that_moves_nothing_is_free():
    made = circuit(part("V", "V1", "a", "com", 10), part("R", "R1", "a", "b", 1000), part("R", "R2", "b", "com", 1000),
                   part("R", "R9", "a", "com", 50))  # fmt: skip
    ratio = op("÷", name("b"), name("a"))
    boxed = formula(made, ratio, {"b": lambda s: s.potentials["b"], "a": lambda s: s.potentials["a"]}, "0.05")
    high = Tolerances().extreme(boxed, True)
    assert high.free == {"R9", "V1"}
    assert high.value == pytest.approx(1050 / (1050 + 950), rel=1e-12)


# --- enclosures -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("seed", range(20))
def test_enclosures_hold_values_and_slopes(seed):
    """Bounds over a box against values and slopes at points of it."""
    rng = random.Random(seed)
    parts = network(rng, 5, 8, controlled=seed % 2)
    boxed = box(rng.choice(KINDS), parts, rng.choice(("0.01", "0.1")))
    worker = Worker(boxed, Families())
    try:
        held = worker.enclosed(worker.low, worker.high)
    except Unbounded:
        pytest.skip("too wide for bounds")
    points = worker.low + (worker.high - worker.low) * np.random.default_rng(seed).random((200, len(worker.low)))
    values = worker.values(points)
    room = 1e-9 * max(abs(held.low), abs(held.high)) + 1e-15
    assert held.low - room <= values.min() and values.max() <= held.high + room
    step = 1e-6 * worker.nominal
    for k in range(len(step)):
        away = np.zeros(len(step))
        away[k] = step[k]
        slopes = (worker.values(points[:20] + away) - worker.values(points[:20] - away)) / (2 * step[k])
        rounding = 1e-8 * 10 / abs(worker.nominal[k])  # 10 V is the largest voltage
        room = 1e-5 * max(np.abs(slopes).max(), abs(held.least[k]), abs(held.most[k])) + rounding
        assert (held.least[k] - room <= slopes).all() and (slopes <= held.most[k] + room).all()


@pytest.mark.parametrize(
    ("function", "low", "high", "value", "slope"),
    [("sqrt", 1.0, 4.0, (1, 2), (0.25, 0.5)), ("exp", 0.0, 1.0, (1, math.e), (1, math.e)),
     ("ln", 1.0, math.e, (0, 1), (1 / math.e, 1)), ("abs", -1.0, 2.0, (0, 2), (-1, 1)),
     ("abs", -3.0, -1.0, (1, 3), (-1, -1)), ("log10", 1.0, 10.0, (0, 1), (0.1 / math.log(10), 1 / math.log(10)))],
)  # fmt: skip
def test_functions_of_enclosures(function, low, high, value, slope):
    x = Enclosure(low, high, np.ones(1), np.ones(1))
    found = ENCLOSING[function](x)
    assert (found.low, found.high) == pytest.approx(value)
    assert (found.least[0], found.most[0]) == pytest.approx(slope)


@pytest.mark.parametrize(
    ("exponent", "value", "slope"),
    [(2, (0, 4), (-2, 4)), (3, (-1, 8), (0, 12)), (0, (1, 1), (0, 0)), (1, (-1, 2), (1, 1))],
)
def test_powers_across_zero(exponent, value, slope):
    found = Enclosure(-1.0, 2.0, np.ones(1), np.ones(1)) ** exponent
    assert (found.low, found.high) == pytest.approx(value)
    assert (found.least[0], found.most[0]) == pytest.approx(slope)


def test_what_has_no_bounds_says_so():
    x = Enclosure(-1.0, 2.0, np.ones(1), np.ones(1))
    for make in (
        lambda: 1 / x,
        lambda: x**-1,
        lambda: x**0.5,
        lambda: ENCLOSING["ln"](x),
        lambda: ENCLOSING["sqrt"](x),
    ):
        with pytest.raises(Unbounded):
            make()


def test_one_formula_for_every_kind_of_number():
    """3 ∥ 6 + |−2| = 4, in rationals and over a box that is a point."""
    node = op("+", op("∥", name("a"), name("b")), call("abs", name("c")))
    exact = {"a": Fraction(3), "b": Fraction(6), "c": Fraction(-2)}
    from calccheck.toleranced import PLAIN

    assert worked(node, exact.__getitem__, lambda x: x, PLAIN) == 4
    still = {k: Enclosure(float(x), float(x), np.zeros(1), np.zeros(1)) for k, x in exact.items()}
    found = worked(node, still.__getitem__, float, ENCLOSING)
    assert (found.low, found.high) == pytest.approx((4, 4))


# --- measured -------------------------------------------------------------------------------------------------------


def test_thirty_values_within_their_time():
    """Twenty quantities, both extremes: measured at 80 nominal solutions by both routes, all of them proved."""
    spent, nominal, proved = bench.extremes(times=1)
    assert proved == 40
    assert spent <= max(400 * nominal, 1.0)


def test_random_values_cost_little_more_than_their_matrices():
    """At most 1.5 times numpy's bare solution of the same matrices; measured at 1.36, the best of three under load."""
    found = [bench.samples(times=3) for _ in range(3)]
    assert min(drawn / bare for drawn, bare in found) <= 1.5
