"""The seeds of right claims, of wrong numbers without a slip, and of slips in a working."""

from __future__ import annotations

from dataclasses import replace

import hand
from hand import UNITS, Quantity, worth
from seeding import Seed
from seeds import ratio, seen


def right(bench):
    """A right claim: a quantity, a resistance seen, a ratio, or one with its working."""
    kind = bench.rng.randrange(8)
    if kind == 0:
        return seen(bench)
    if kind == 1:
        return with_working(bench, bench.figures + 2)
    if kind == 2:
        return ratio(bench)
    q, value = bench.pick()
    return bench.seed(q, value, value)


def unexplained(bench):
    q, value = bench.pick()
    return bench.seed(q, value * (1 + bench.rng.uniform(-0.2, 0.2)), value)


def with_working(bench, figures):
    """A power or voltage of a resistor with its working, the numbers in it printed to so many figures."""
    r = bench.rng.choice(hand.resistors(bench.parts))
    v, i = (worth(Quantity(x, (r.name,)), bench.parts) for x in "VI")
    if abs(i) < 1e-4 * bench.scales["I"]:
        return None
    return _worked(bench, r, v, i, r.value, figures)


def _worked(bench, r, v, i, ohms, figures):
    """The claim worked with these numbers; the printed result follows from them as they are printed."""
    law = bench.rng.choice(("P = V²/R", "P = I²·R", "V = I·R"))
    volts, amperes = (_shown(x, figures, unit) for x, unit in ((v, "V"), (i, "A")))
    text, (x, shown), quantity = {
        "P = V²/R": (f"V_{r.name}² / {r.name}", volts, "P"),
        "P = I²·R": (f"I_{r.name}² × {r.name}", amperes, "P"),
        "V = I·R": (f"I_{r.name} × {r.name}", amperes, "V"),
    }[law]
    put_in = {"P = V²/R": f"({shown})² / ({ohms:.12g} Ω)", "P = I²·R": f"({shown})² × {ohms:.12g} Ω",
              "V = I·R": f"({shown}) × {ohms:.12g} Ω"}[law]  # fmt: skip
    result = {"P = V²/R": x * x / ohms, "P = I²·R": x * x * ohms, "V = I·R": x * ohms}[law]
    q = Quantity(quantity, (r.name,))
    before = f"{q.text()} = {text} = {put_in}"
    return Seed(before, result, worth(q, bench.parts), UNITS[quantity], bench.figures)


def _shown(value, figures, unit):
    text, unit, factor = hand.printed(value, figures, unit)
    return float(text.replace("−", "-")) * factor, f"{text} {unit}"


def working_slip(bench):
    """Wrong arithmetic behind a right substitution, or another resistor's value put in."""
    r, other = bench.rng.sample(hand.resistors(bench.parts), 2)
    v, i = (worth(Quantity(x, (r.name,)), bench.parts) for x in "VI")
    if abs(i) < 1e-4 * bench.scales["I"] or r.value == other.value:
        return None
    if bench.rng.random() < 0.5:
        return _worked(bench, r, v, i, other.value, bench.figures + 2)
    seed = _worked(bench, r, v, i, r.value, bench.figures + 2)
    return replace(seed, value=seed.value * (1 + bench.rng.uniform(-0.2, 0.2)))


def early_rounding(bench):
    """Numbers of two figures carried through a working to a result of more."""
    return with_working(bench, 2)
