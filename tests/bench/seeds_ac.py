"""The seeds of alternating current in the figures and in the working, right claims and unexplained ones."""

from __future__ import annotations

import cmath
import math

import hand
import hand_ac
from hand_ac import UNITS, Phasor, whole, worth
from seeding_ac import AcSeed, redone


def right(b):
    kind = b.rng.randrange(7)
    if kind == 0:
        return decibels(b)
    if kind == 6:
        return with_working(b, b.figures + 2)
    q, t = b.seen() if kind == 1 else b.pick()
    return b.seed(q, t, t)


def unexplained(b):
    q, t = b.pick()
    if q is None:
        return None
    turned = [x * (1 + b.rng.uniform(-0.2, 0.2)) for x in hand_ac.figures_of(t, q.form)]
    if q.form == "polar":
        value = cmath.rect(turned[0], cmath.phase(t) + b.rng.uniform(-0.35, 0.35))
    elif q.form == "rect":
        value = complex(*turned)
    else:
        value = t + b.rng.uniform(-0.35, 0.35) if q.form == "arg" else turned[0]
    return b.seed(q, value, t)


def decibels(b, factor=20.0):
    a, x = b.pick("V", ("mag",), due=False)
    c, y = b.pick("V", ("mag",), due=False)
    if a is None or c is None or abs(math.log10(x / y)) < 1e-3:
        return None
    level = 20 * math.log10(x / y)
    return AcSeed(f"{a.text()} / {c.text()}", "real", level * factor / 20, level, "dB", b.figures)


# --- in the figures -------------------------------------------------------------------------------------------------


def sign(b):
    q, t = b.pick(letters="VVIIP", forms=("polar", "rect", "arg"))
    if q is None:
        return None
    return b.seed(q, t + math.pi if q.form == "arg" else -t, t)


def prefix(b):
    q, t = b.pick(forms=("polar", "rect", "mag"))
    return b.seed(q, t * 10 ** b.rng.choice((3, -3, 3, -3, 6, -6)), t)


def decimal_point(b):
    q, t = b.pick(forms=("polar", "mag", "arg"))
    factor = 10 ** b.rng.choice((1, -1, 1, -1, 2, -2))
    if q is not None and q.form == "polar" and b.rng.random() < 0.3:
        return b.seed(q, cmath.rect(abs(t), cmath.phase(t) * factor), t)
    return b.seed(q, t * factor, t)


def _in_one_figure(b, slip):
    """A slip of ``slip(text, digits' places)`` in one of the printed figures."""
    q, t = b.pick()
    if q is None:
        return None
    texts, *_ = hand_ac.texts_of(t, q.form, b.figures, UNITS[q.letter])
    k = b.rng.randrange(len(texts))
    made = slip(texts[k])
    return b.seed(q, t, t, texts=[*texts[:k], made, *texts[k + 1 :]]) if made else None


def digits_swapped(b):
    def slip(text):
        text = list(text)
        at = [k for k in range(len(text) - 1) if text[k].isdigit() and text[k + 1].isdigit() and text[k] != text[k + 1]]
        if not at:
            return ""
        k = b.rng.choice(at)
        text[k], text[k + 1] = text[k + 1], text[k]
        return "".join(text)

    return _in_one_figure(b, slip)


def digit_slip(b):
    def slip(text):
        counting = [k for k, c in enumerate(text) if c.isdigit() and text[: k + 1].strip("-−0.")]
        if len(counting) < 4:
            return ""
        k = b.rng.choice(counting)
        others = [d for d in "0123456789"[k == counting[0] :] if d != text[k]]
        return text[:k] + b.rng.choice(others) + text[k + 1 :]

    return _in_one_figure(b, slip)


def reciprocal(b):
    q, t = b.seen()
    return b.seed(q, 1 / t, t) if q else None


def factor_two(b):
    q, t = b.pick(letters="VI", forms=("polar", "rect", "mag"))
    return b.seed(q, t * b.rng.choice((2, 0.5)), t)


def peak_rms(b):
    q, t = b.pick(forms=("polar", "rect", "mag"))
    factor = 2 if q and q.letter in "PQ" else math.sqrt(2)
    return b.seed(q, t * factor ** b.rng.choice((1, -1)), t)


def degrees_radians(b):
    q, t = b.pick(letters="VVIIP", forms=("polar", "arg"))
    if q is None:
        return None
    factor = b.rng.choice((180 / math.pi, math.pi / 180))
    if q.letter == "P":
        s = whole(q, b.net)
        return b.seed(q, abs(s) * math.cos(cmath.phase(s) * factor), t)
    texts, *_ = hand_ac.texts_of(t, q.form, b.figures, UNITS[q.letter])
    radians = cmath.phase(t) if q.form == "polar" else t
    texts[-1] = f"{radians:.{b.figures - 1}f}".replace("-", "−")  # the number of radians with ° behind it
    return b.seed(q, t, t, texts=texts)


def conjugate(b):
    if b.rng.random() < 0.3 and b.net.kind("LC"):  # the reactance of one part
        p = b.rng.choice(b.net.kind("LC"))
        return redone(b, b.net.put(p.name, value=-p.value))
    q, t = b.pick(letters="VI", forms=("polar", "rect", "arg"))
    return b.seed(q, -t if q.form == "arg" else t.conjugate(), t) if q else None


def log_ten_twenty(b):
    return decibels(b, 10.0)


def line_phase(b):
    if not {"Va", "Vb", "Vc"} <= {p.name for p in b.net.parts}:
        return None
    q, t = b.pick(letters="VIP", forms=("polar", "mag"), due=False)
    return b.seed(q, t * math.sqrt(3) ** b.rng.choice((1, -1)), t)


# --- in the working -------------------------------------------------------------------------------------------------


def with_working(b, figures, ohms=None, factor=1.0):
    """The voltage or power of a resistor worked from its current's magnitude, printed to so many figures."""
    r = b.rng.choice(b.net.kind("R"))
    i = abs(whole(Phasor("I", (r.name,), "mag"), b.net))
    if i < 1e-4 * b.scales["I"]:
        return None
    text, unit, scale = hand.printed(i, figures, "A")
    x, put_in = float(text) * scale, ohms or r.value
    squared = b.rng.random() < 0.5
    q = Phasor("P", (r.name,), "real") if squared else Phasor("V", (r.name,), "mag")
    law, by = (
        (f"|I_{r.name}|² × {r.name}", f"({text} {unit})²")
        if squared
        else (f"|I_{r.name}| × {r.name}", f"{text} {unit}")
    )
    result = (x * x if squared else x) * put_in * factor
    before = f"{q.text()} = {law} = {by} × {put_in:.12g} Ω"
    return AcSeed(before, q.form, result, worth(q, b.net), UNITS[q.letter], b.figures, carry=0.005)


def working_slip(b):
    """Wrong arithmetic behind a right substitution, or another resistor's value put in."""
    others = {p.value for p in b.net.kind("R")}
    if b.rng.random() < 0.5:
        return with_working(b, b.figures + 2, factor=1 + b.rng.uniform(-0.2, 0.2))
    return with_working(b, b.figures + 2, ohms=b.rng.choice(sorted(others))) if len(others) > 1 else None


def early_rounding(b):
    return with_working(b, 2)
