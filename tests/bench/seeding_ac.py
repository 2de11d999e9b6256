"""What the bench makes claims of alternating current with: a seed, and a circuit to draw seeds from; as ``seeding``."""

from __future__ import annotations

from dataclasses import dataclass, field

import hand
import hand_ac
from hand_ac import UNITS, Phasor, as_claimed, whole, worth


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


def redone(b, net, **more):
    """A quantity worked in another circuit."""
    q, t = b.pick()
    return b.seed(q, worth(q, net), t, **more) if q else None
