"""The seeds of alternating current by kind: claims with the slip put in the way it is made. Each function gives one, or nothing."""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass, field, replace

import hand
import hand_ac
from hand_ac import UNITS, Phasor, as_claimed, whole, worth
from seeds import beside


@dataclass(frozen=True)
class AcSeed:
    """``before``: the claim up to the printed value; ``value``, ``truth``: what is printed and what should be, as the form shows it.

    ``texts``: the printed figures where the slip is in their digits; ``earlier``: the circuit of the version before.
    ``carry``: how far off, relatively, a working may end.
    """

    before: str
    form: str
    value: complex
    truth: complex
    unit: str
    figures: int
    texts: list[str] = field(default_factory=list)
    earlier: hand_ac.Net | None = None
    carry: float = 0.0

    def claim(self):
        texts, unit, _ = hand_ac.texts_of(self.value, self.form, self.figures, self.unit)
        return f"{self.before} = {hand_ac.joined(self.texts or texts, unit, self.form)}"

    def off(self):
        """By how many units of its last place the worst figure is off."""
        texts, _, places = hand_ac.texts_of(
            self.truth if self.texts else self.value, self.form, self.figures, self.unit
        )
        right = hand_ac.figures_of(self.truth, self.form)
        worst = 0.0
        for k, (text, r, place) in enumerate(zip(self.texts or texts, right, places, strict=True)):
            decimals = len(text.partition(".")[2])
            x = float(text.replace("−", "-"))
            if self.form == "arg" or (self.form == "polar" and k == 1):
                distance = abs((x - r + 180) % 360 - 180) * 10.0**decimals
            else:
                distance = abs(x * 10.0**decimals - r / place)
            worst = max(worst, distance)
        return worst

    def place(self):
        """The unit of the last place of the first figure."""
        return hand_ac.texts_of(self.truth if self.texts else self.value, self.form, self.figures, self.unit)[2][0]


class AcBench:
    """One circuit to draw seeds from."""

    def __init__(self, net, rng, figures):
        self.net, self.rng, self.figures = net, rng, figures
        volts, amperes = hand.solved(net.parts, net.omega)
        self.scales = {"V": max(map(abs, volts.values())), "I": max(map(abs, amperes.values()))}
        self.scales |= dict.fromkeys("PQS", self.scales["V"] * self.scales["I"]) | {"Z": 0.0}

    def pick(
        self, letters="VVVIIIPQ", forms=("polar", "polar", "rect", "mag", "mag", "arg"), due=True, fits=lambda q: True
    ):
        """A quantity that is no rounding error, with what it should show."""
        nodes = sorted({n for p in self.net.parts for n in (p.plus, p.minus)} - {"com"})
        names = [p.name for p in self.net.parts if p.kind not in "U"]
        for _ in range(30):
            letter = self.rng.choice(letters)
            form = "real" if letter in "PQ" else self.rng.choice(forms)
            subs = (self.rng.choice([*nodes, *names] if letter == "V" else names),)
            sources = hand.sources(self.net.parts)
            due_to = (self.rng.choice(sources),) if due and letter in "VI" and self.rng.random() < 0.3 else ()
            q = Phasor(letter, subs, form, due_to)
            value = whole(q, self.net)
            shown = as_claimed(value, q)
            if value is None or not fits(q) or abs(value) < 1e-4 * self.scales[letter]:
                continue
            if min(map(abs, hand_ac.figures_of(shown, form))) > 1e-3 * abs(value) * (form in ("rect", "real")):
                return q, shown
        return None, 0.0

    def seed(self, q, value, truth, **more):
        if q is None or value is None or min(abs(value), abs(truth)) < 1e-11:
            return None
        return AcSeed(q.text(), q.form, value, truth, UNITS[q.letter], self.figures, **more)

    def seen(self, forms=("polar", "rect", "mag")):
        nodes = sorted({n for p in self.net.parts for n in (p.plus, p.minus)})
        q = Phasor("Z", tuple(self.rng.sample(nodes, 2)), self.rng.choice(forms))
        value = worth(q, self.net)
        good = value is not None and min(map(abs, hand_ac.figures_of(value, q.form))) > 1e-3 * max(abs(value), 1e-3)
        return (q, value) if good else (None, 0.0)


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
        return _in(b, b.net.put(p.name, value=-p.value))
    q, t = b.pick(letters="VI", forms=("polar", "rect", "arg"))
    return b.seed(q, -t if q.form == "arg" else t.conjugate(), t) if q else None


def log_ten_twenty(b):
    return decibels(b, 10.0)


def line_phase(b):
    if not {"Va", "Vb", "Vc"} <= {p.name for p in b.net.parts}:
        return None
    q, t = b.pick(letters="VIP", forms=("polar", "mag"), due=False)
    return b.seed(q, t * math.sqrt(3) ** b.rng.choice((1, -1)), t)


# --- with the sources and the circuit -------------------------------------------------------------------------------


def _sum(b, weight):
    names = hand.sources(b.net.parts)
    q, t = b.pick(letters="VI", due=False)
    if q is None or len(names) < 2:
        return None
    shares = {n: whole(replace(q, due_to=(n,)), b.net) for n in names}
    odd, total = b.rng.choice(names), sum(shares.values())
    if abs(shares[odd]) < 1e-6 * abs(total) or abs(shares[odd] - total) < 1e-6 * abs(total):
        return None
    return b.seed(q, as_claimed(total + (weight - 1) * shares[odd], q), t)


def source_missing(b):
    return _sum(b, 0)


def source_reversed(b):
    return _sum(b, -1)


def source_twice(b):
    return _sum(b, 2)


def power_superposed(b):
    names = hand.sources(b.net.parts)
    q, t = b.pick(letters="PQ", due=False)
    if q is None or len(names) < 2:
        return None
    return b.seed(q, sum(worth(replace(q, due_to=(n,)), b.net) for n in names), t)


def source_zeroed_wrongly(b):
    names = hand.sources(b.net.parts)
    if len(names) < 2:
        return None
    own, other = b.rng.sample(names, 2)
    kind = next(p.kind for p in b.net.parts if p.name == other)
    odd = b.net.put(other, kind="-" if kind == "V" else "=", value=0.0)
    q, t = b.pick(letters="VI", fits=lambda q: q.due_to == (own,))
    return b.seed(q, worth(q, odd), t) if q else None


def controlled_source_zeroed(b):
    steered = b.net.kind("G")
    return _in(b, b.net.put(steered[0].name, kind="-", value=0.0)) if steered else None


def _in(b, net, **more):
    q, t = b.pick()
    return b.seed(q, worth(q, net), t, **more) if q else None


def omega_frequency(b):
    parts = b.net.kind("LC")
    factor = b.rng.choice((2 * math.pi, 1 / (2 * math.pi)))
    net = b.net
    for p in parts if b.rng.random() < 0.7 else parts[:1]:
        net = net.put(p.name, value=p.value * factor)
    return _in(b, net) if parts else None


def magnitudes_added(b):
    """|Z| as R + X; a voltage along two parts, or the circuit, worked with magnitudes alone."""
    how = b.rng.randrange(3)
    if how == 0:
        q, t = b.seen(("mag",))
        z = whole(q, b.net) if q else 0
        return b.seed(q, abs(z.real) + abs(z.imag), t) if q and z.real > 0 else None
    if how == 1:
        net = b.net
        for p in b.net.kind("LC"):
            ohms = b.net.omega * p.value if p.kind == "L" else 1 / (b.net.omega * p.value)
            net = net.put(p.name, kind="R", value=ohms)
        q, t = b.pick(letters="VI", forms=("mag",))
        return b.seed(q, worth(q, net), t) if q else None
    pairs = [(x, y) for x in b.net.kind("RLC") for y in b.net.kind("RLC") if x.minus == y.plus and x.plus != y.minus]
    if not pairs:
        return None
    x, y = b.rng.choice(pairs)
    a, c = (abs(whole(Phasor("V", (p.name,), "mag"), b.net)) for p in (x, y))
    q = Phasor("V", (x.plus, y.minus), "mag") if y.minus != "com" else Phasor("V", (x.plus,), "mag")
    t = worth(q, b.net)
    return b.seed(q, a + c, t) if min(a, c, t) > 1e-4 * b.scales["V"] else None


def swapped_values(b):
    a, c = b.rng.sample(b.net.kind("RLC"), 2)
    if a.kind != c.kind or a.value == c.value:
        return None
    return _in(b, b.net.put(a.name, value=c.value).put(c.name, value=a.value))


def element_absent(b):
    return _in(b, b.net.put(b.rng.choice(b.net.kind("RLC")).name, kind="-", value=0.0))


def element_shorted(b):
    return _in(b, b.net.put(b.rng.choice(b.net.kind("RLC")).name, kind="=", value=0.0))


def neighbour_value(b):
    p = b.rng.choice(b.net.kind("RLC"))
    value = beside(p.value * 1e12, b.rng.choice((hand.E24, hand.E24[::2])), b.rng.choice((-1, 1)))
    return _in(b, b.net.put(p.name, value=value / 1e12)) if value else None


def stale(b):
    p = b.rng.choice(b.net.kind("RLCVI"))
    old = b.net.put(p.name, value=p.value * b.rng.choice((0.5, 0.68, 0.82, 1.2, 1.5, 2.2)))
    return _in(b, old, earlier=old)


def divider_complement(b):
    fed = [
        (v, z) for v in b.net.kind("V") if v.minus == "com" for z in b.net.kind("RLC") if v.plus in (z.plus, z.minus)
    ]
    if not fed:
        return None
    source, upper = b.rng.choice(fed)
    tap = upper.minus if upper.plus == source.plus else upper.plus
    q = Phasor("V", (tap,), b.rng.choice(("polar", "rect", "mag")))
    t = whole(q, b.net) if tap != "com" else 0
    return b.seed(q, as_claimed(source.value - t, q), as_claimed(t, q)) if abs(t) > 1e-3 * b.scales["V"] else None


def series_parallel(b):
    """Two like parts side by side worked as if in a row, or the reverse."""
    a, c = b.rng.sample(b.net.kind("RLC"), 2)
    if a.kind != c.kind:
        return None
    less, more = a.value * c.value / (a.value + c.value), a.value + c.value
    side, row = (less, more) if a.kind != "C" else (more, less)
    if {a.plus, a.minus} == {c.plus, c.minus}:
        return _in(b, b.net.put(a.name, value=row).put(c.name, kind="-", value=0.0))
    joint = {a.plus, a.minus} & {c.plus, c.minus} - {"com"}
    if not joint or len([p for p in b.net.parts if joint & {p.plus, p.minus, *p.by}]) != 2:
        return None
    odd = b.net.put(a.name, value=side).put(c.name, kind="=", value=0.0)
    q, t = b.pick(letters="VI", fits=lambda q: not joint & set(q.subs))
    return b.seed(q, worth(q, odd), t) if q else None


def other_quantity(b):
    q, t = b.pick(letters="VI", forms=("polar", "rect", "mag"))
    o, _ = b.pick(letters=q.letter, forms=(q.form,), due=False) if q else (None, 0)
    if o is None or o.subs == q.subs:
        return None
    value = worth(replace(o, due_to=q.due_to), b.net)
    return b.seed(q, value, t) if abs(value + t) > 1e-6 * abs(t) else None  # the same current the other way is a sign


def stage_kind(b):
    amps = b.net.kind("U")
    if not amps:
        return None
    first = next(p for p in b.net.parts if p.name == "R1")
    odd = b.net.put("R1", plus=amps[0].by[0]).put("U1", by=(first.plus, "m"))
    q, t = b.pick(letters="VI", due=False)
    value = worth(q, odd) if q else 0.0
    return b.seed(q, value, t) if q and abs(value + t) > 1e-6 * abs(t) else None  # turned round it is a sign


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
