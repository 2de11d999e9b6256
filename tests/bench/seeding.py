"""Claims for the bench: right ones, ones with one slip of a kind put in, and wrong numbers with no slip behind them.

Every value comes from ``hand``; a slip is put in the way the mistake is made, by changing the circuit, the sum or the digits.
A seed is the claim's text with the value it prints, or nothing where this circuit has no place for the slip.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import hand
from hand import UNITS, Part, Quantity, worth


@dataclass(frozen=True)
class Seed:
    """``before``: the claim up to the printed value; ``value``: what is printed, SI; ``truth``: what should be.

    ``text``, ``factor``: the printed number where the slip is in its digits. ``earlier``: the circuit of the version before.
    """

    before: str
    value: float
    truth: float
    unit: str
    figures: int
    digits: str = ""
    suffix: str | None = None
    earlier: list[Part] | None = None

    def claim(self):
        """The claim as written, and what it prints in SI, with the unit of its last place."""
        text, unit, factor = hand.printed(self.value, self.figures, self.unit)
        if self.digits:
            _, unit, factor = hand.printed(self.truth, self.figures, self.unit)
            text = self.digits
        if self.suffix is not None:
            unit = self.suffix
        if unit == "%":
            factor = 0.01
        shown = float(text.replace("−", "-")) * factor
        return f"{self.before} = {text} {unit}".rstrip(), shown, hand.place(text, factor)


def quantities(parts, due=True):
    """All voltages, currents and powers of a circuit; with ``due`` also the parts of them due to one source."""
    nodes = sorted({n for p in parts for n in (p.plus, p.minus)} - {"com"})
    plain = [("V", n) for n in nodes] + [(x, p.name) for p in parts for x in "VIP"]
    found = [Quantity(x, (s,)) for x, s in plain]
    if due:
        found += [Quantity(x, (s,), (k,)) for x, s in plain if x != "P" for k in hand.sources(parts)]
    return found


class Bench:
    """One circuit and the seeds that it gives. ``rng``: a seeded random.Random; ``figures``: printed digits of every seed."""

    def __init__(self, parts, rng, figures):
        self.parts, self.rng, self.figures = parts, rng, figures
        self.scales = {x: max(abs(worth(Quantity(x, (p.name,)), parts)) for p in parts) for x in "VIP"}

    # --- choosing ---------------------------------------------------------------------------------------------------

    def pick(self, fits=lambda q: True, due=True):
        """A quantity that is no rounding error, with its value."""
        wanted = [q for q in quantities(self.parts, due) if fits(q)]
        self.rng.shuffle(wanted)
        for q in wanted:
            value = worth(q, self.parts)
            if value is not None and abs(value) > 1e-4 * self.scales[q.letter]:
                return q, value
        return None, 0.0

    def seed(self, q, value, truth, **more):
        if value is None or q is None:
            return None
        return Seed(q.text(), value, truth, UNITS[q.letter], self.figures, **more)

    # --- right, and wrong without a reason --------------------------------------------------------------------------

    def right(self):
        kind = self.rng.randrange(8)
        if kind == 0:
            return self.seen()
        if kind == 1:
            return self.with_working(self.figures + 2)
        if kind == 2:
            return self.ratio()
        q, value = self.pick()
        return self.seed(q, value, value)

    def unexplained(self):
        q, value = self.pick()
        return self.seed(q, value * (1 + self.rng.uniform(-0.2, 0.2)), value)

    def seen(self):
        """A resistance seen between two nodes."""
        nodes = sorted({n for p in self.parts for n in (p.plus, p.minus)})
        q = Quantity("R", tuple(self.rng.sample(nodes, 2)))
        value = worth(q, self.parts)
        return self.seed(q, value, value) if value is not None and abs(value) > 1e-6 else None

    def ratio(self):
        (a, x), (b, y) = (self.pick(lambda q: q.letter == "V", due=False) for _ in range(2))
        if a is None or b is None:
            return None
        text, *_ = hand.printed(x / y * 100, self.figures, "")
        return Seed(f"{a.text()} / {b.text()}", x / y, x / y, "", self.figures, digits=text, suffix="%")

    # --- the digits -------------------------------------------------------------------------------------------------

    def sign(self):
        q, t = self.pick()
        return self.seed(q, -t, t)

    def prefix(self):
        q, t = self.pick()
        return self.seed(q, t * 10 ** self.rng.choice((3, -3, 3, -3, 6, -6)), t)

    def decimal_point(self):
        q, t = self.pick()
        return self.seed(q, t * 10 ** self.rng.choice((1, -1, 1, -1, 2, -2)), t)

    def digits_swapped(self):
        q, t = self.pick()
        text = list(hand.printed(t, self.figures, UNITS[q.letter])[0]) if q else []
        at = [k for k in range(len(text) - 1) if text[k].isdigit() and text[k + 1].isdigit() and text[k] != text[k + 1]]
        if not at:
            return None
        k = self.rng.choice(at)
        text[k], text[k + 1] = text[k + 1], text[k]
        return self.seed(q, t, t, digits="".join(text))

    def digit_slip(self):
        q, t = self.pick()
        if q is None:
            return None
        text = hand.printed(t, self.figures, UNITS[q.letter])[0]
        how = self.rng.choice(("wrong", "wrong", "dropped", "doubled"))
        if how == "dropped":  # so that as many are left as are printed elsewhere
            text = hand.printed(t, self.figures + 1, UNITS[q.letter])[0]
        counting = [k for k, c in enumerate(text) if c.isdigit() and text[: k + 1].strip("−0.")]
        k = self.rng.choice(counting if how == "wrong" else counting[1:])
        if how == "wrong":
            others = [d for d in "0123456789"[k == counting[0] :] if d != text[k]]
            text = text[:k] + self.rng.choice(others) + text[k + 1 :]
        else:
            text = text[:k] + (text[k] * 2 if how == "doubled" else "") + text[k + 1 :]
        return self.seed(q, t, t, digits=text.rstrip("."))

    def reciprocal(self):
        seed = self.seen()
        if seed is None:
            return None
        return replace(seed, value=1 / seed.truth)

    def factor_two(self):
        q, t = self.pick()
        return self.seed(q, t * self.rng.choice((2, 0.5)), t)

    def percent(self):
        seed = self.ratio()
        if seed is None:
            return None
        if self.rng.random() < 0.5:  # 0.42 % for 42 %
            return replace(seed, digits=hand.printed(seed.truth, self.figures, "")[0])
        return replace(seed, suffix="")  # 42 for 42 %

    # --- the sources ------------------------------------------------------------------------------------------------

    def _sum(self, weights, letters="VIP"):
        """A total in which one source's part counts ``weights`` times."""
        names = hand.sources(self.parts)
        q, t = self.pick(lambda q: q.letter in letters and not q.due_to)
        if q is None or len(names) < 2:
            return None
        odd = self.rng.choice(names)
        value = 1.0
        for f in [replace(q, letter=x) for x in ("VI" if q.letter == "P" else q.letter)]:
            shares = {n: worth(replace(f, due_to=(n,)), self.parts) for n in names}
            if abs(shares[odd] / sum(shares.values()) - 1) < 1e-6:
                return None  # no other source has a part in it: this would be a turned sign, or twice the value
            value *= sum(share * (weights if n == odd else 1) for n, share in shares.items())
        return self.seed(q, value, t)

    def source_missing(self):
        return self._sum(0)

    def source_reversed(self):
        return self._sum(-1)

    def source_twice(self):
        return self._sum(2)

    def power_superposed(self):
        names = hand.sources(self.parts)
        q, t = self.pick(lambda q: q.letter == "P" and not q.due_to)
        if q is None or len(names) < 2:
            return None
        return self.seed(q, sum(worth(replace(q, due_to=(n,)), self.parts) for n in names), t)

    def source_zeroed_wrongly(self):
        names = hand.sources(self.parts)
        if len(names) < 2:
            return None
        own, other = self.rng.sample(names, 2)
        kind = next(p.kind for p in self.parts if p.name == other)
        odd = hand.put(self.parts, other, kind="-" if kind == "V" else "=", value=0.0)
        return self._part(own, odd)

    def controlled_source_zeroed(self):
        steered = [p for p in self.parts if p.kind in "GE"]
        if not steered:
            return None
        off = hand.put(self.parts, steered[0].name, kind="=" if steered[0].kind == "E" else "-", value=0.0)
        return self._part(self.rng.choice(hand.sources(self.parts)), off)

    def _part(self, own, odd):
        """A part due to one source found in an odd circuit; in a third of the seeds the total made with it."""
        if self.rng.random() < 0.67:
            q, t = self.pick(lambda q: q.due_to == (own,))
            return self.seed(q, worth(q, odd), t) if q else None
        q, t = self.pick(lambda q: q.letter in "VI" and not q.due_to)
        share = worth(replace(q, due_to=(own,)), odd) if q else None
        return None if share is None else self.seed(q, t - worth(replace(q, due_to=(own,)), self.parts) + share, t)

    # --- the circuit ------------------------------------------------------------------------------------------------

    def _in(self, parts, **more):
        q, t = self.pick()
        return self.seed(q, worth(q, parts), t, **more) if q else None

    def swapped_values(self):
        a, b = self.rng.sample(hand.resistors(self.parts), 2)
        if a.value == b.value:
            return None
        return self._in(hand.put(hand.put(self.parts, a.name, value=b.value), b.name, value=a.value))

    def element_absent(self):
        return self._in(hand.put(self.parts, self.rng.choice(hand.resistors(self.parts)).name, kind="-", value=0.0))

    def element_shorted(self):
        return self._in(hand.put(self.parts, self.rng.choice(hand.resistors(self.parts)).name, kind="=", value=0.0))

    def neighbour_value(self):
        r = self.rng.choice(hand.resistors(self.parts))
        value = beside(r.value, self.rng.choice((hand.E24, hand.E24[::2])), self.rng.choice((-1, 1)))
        return self._in(hand.put(self.parts, r.name, value=value)) if value else None

    def stale(self):
        r = self.rng.choice(self.parts)
        old = hand.put(self.parts, r.name, value=r.value * self.rng.choice((0.5, 0.68, 0.82, 1.2, 1.5, 2.2)))
        return self._in(old, earlier=old)

    def other_quantity(self):
        q, t = self.pick()
        if q is None:
            return None
        if self.rng.random() < 0.25 and len(q.subs) == 1 and any(p.name == q.subs[0] for p in self.parts):
            other = replace(q, letter=self.rng.choice([x for x in "VI" if x != q.letter]))  # V for I, number for number
            return self.seed(q, worth(other, self.parts), t)
        same = [o for o in quantities(self.parts, False) if o.letter == q.letter and o.subs != q.subs]
        other = replace(self.rng.choice(same), due_to=q.due_to)
        value = worth(other, self.parts)
        return (
            self.seed(q, value, t) if abs(value + t) > 1e-6 * abs(t) else None
        )  # the same current the other way is a sign

    def divider_complement(self):
        """A divider hung on a source, loaded by the rest: V across its lower resistor claimed, across its upper one printed."""
        fed = [(v, r) for v in self.parts if v.kind == "V" and v.minus == "com" for r in hand.resistors(self.parts)
               if v.plus in (r.plus, r.minus)]  # fmt: skip
        if not fed:
            return None
        source, upper = self.rng.choice(fed)
        tap = upper.minus if upper.plus == source.plus else upper.plus
        q = Quantity("V", (tap,))
        t = worth(q, self.parts)
        return self.seed(q, source.value - t, t) if tap != "com" and abs(t) > 1e-4 * self.scales["V"] else None

    def series_parallel(self):
        """Two resistors side by side worked as a series pair, or two in a row as a parallel pair."""
        a, b = self.rng.sample(hand.resistors(self.parts), 2)
        both, total = a.value * b.value / (a.value + b.value), a.value + b.value
        if self.rng.random() < 0.5:  # in a formula of the working
            plus = self.rng.random() < 0.5
            text = f"{a.name} + {b.name}" if plus else f"{a.name} ∥ {b.name}"
            return Seed(
                f"Rpair{self.rng.randrange(10**9)} = {text}",
                *((both, total) if plus else (total, both)),
                "Ω",
                self.figures,
            )
        if {a.plus, a.minus} == {b.plus, b.minus}:
            odd = hand.put(hand.put(self.parts, a.name, value=total), b.name, kind="-", value=0.0)
            return self._in(odd)
        joint = {a.plus, a.minus} & {b.plus, b.minus} - {"com"}
        meeting = [p for p in self.parts if joint & {p.plus, p.minus, *p.by}]
        if not joint or len(meeting) != 2:
            return None
        odd = hand.put(hand.put(self.parts, a.name, value=both), b.name, kind="=", value=0.0)
        q, t = self.pick(lambda q: not joint & set(q.subs))
        return self.seed(q, worth(q, odd), t) if q else None

    # --- the working ------------------------------------------------------------------------------------------------

    def with_working(self, figures):
        """A power or voltage of a resistor with its working, the numbers in it printed to so many figures."""
        r = self.rng.choice(hand.resistors(self.parts))
        v, i = (worth(Quantity(x, (r.name,)), self.parts) for x in "VI")
        if abs(i) < 1e-4 * self.scales["I"]:
            return None
        return self._worked(r, v, i, r.value, figures)

    def _worked(self, r, v, i, ohms, figures):
        """The claim worked with these numbers; the printed result follows from them as they are printed."""
        law = self.rng.choice(("P = V²/R", "P = I²·R", "V = I·R"))
        volts, amperes = (self._shown(x, figures, unit) for x, unit in ((v, "V"), (i, "A")))
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
        return Seed(before, result, worth(q, self.parts), UNITS[quantity], self.figures)

    def _shown(self, value, figures, unit):
        text, unit, factor = hand.printed(value, figures, unit)
        return float(text.replace("−", "-")) * factor, f"{text} {unit}"

    def working_slip(self):
        """Wrong arithmetic behind a right substitution, or another resistor's value put in."""
        r, other = self.rng.sample(hand.resistors(self.parts), 2)
        v, i = (worth(Quantity(x, (r.name,)), self.parts) for x in "VI")
        if abs(i) < 1e-4 * self.scales["I"] or r.value == other.value:
            return None
        if self.rng.random() < 0.5:
            return self._worked(r, v, i, other.value, self.figures + 2)
        seed = self._worked(r, v, i, r.value, self.figures + 2)
        return replace(seed, value=seed.value * (1 + self.rng.uniform(-0.2, 0.2)))

    def early_rounding(self):
        """Numbers of two figures carried through a working to a result of more."""
        return self.with_working(2)


def beside(ohms, series, step):
    """The value before or after in a series of two figures, or nothing for one that does not stand in it."""
    power = 1.0
    while ohms / power > 99.5:
        power *= 10
    while ohms / power < 9.95:
        power /= 10
    digits = round(ohms / power)
    if digits not in series or abs(ohms / power - digits) > 1e-6:
        return None
    at = series.index(digits) + step
    return series[at % len(series)] * 10.0 ** (at // len(series)) * power
