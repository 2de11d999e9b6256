"""What the bench makes claims with: a seed, which is a claim with the value that it prints, and a circuit to draw seeds from.

Every value comes from ``hand``; a slip is put in the way the mistake is made, by changing the circuit, the sum or the digits
(``seeds``, ``seeds_working``).
"""

from __future__ import annotations

from dataclasses import dataclass

import hand
from hand import UNITS, Part, Quantity, worth


@dataclass(frozen=True)
class Seed:
    """``before``: the claim up to the printed value; ``value``: what is printed, SI; ``truth``: what should be.

    ``digits``: the printed number where the slip is in its digits; ``suffix``: the unit where it is not the one that the value
    asks for. ``earlier``: the circuit of the version before.
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
    plain = [("V", n) for n in nodes] + [(x, p.name) for p in parts if p.kind != "U" for x in "VIP"]
    found = [Quantity(x, (s,)) for x, s in plain]
    if due:
        found += [Quantity(x, (s,), (k,)) for x, s in plain if x != "P" for k in hand.sources(parts)]
    return found


class Bench:
    """One circuit to draw seeds from. ``rng``: a seeded random.Random; ``figures``: printed digits of every seed."""

    def __init__(self, parts, rng, figures):
        self.parts, self.rng, self.figures = parts, rng, figures
        self.scales = {x: max(abs(worth(Quantity(x, (p.name,)), parts)) for p in parts) for x in "VIP"}

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
