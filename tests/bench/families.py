"""The circuits of the generated sheets: five that every calc register has, with the formulas by which they are worked by hand.

Element values come from E24; everything else about them is invented.
"""

from __future__ import annotations

from dataclasses import dataclass

from hand import E24, Part, Quantity


@dataclass(frozen=True)
class Work:
    """A circuit and what is worked of it: the output node, the load, formulas by quantity.

    ``named``: names of the sheet's own, each with its formula and value, which the formulas use. ``figures``: as printed.
    """

    subject: str
    parts: list[Part]
    out: str
    load: str
    named: list[tuple[str, str, float]]
    formulas: list[tuple[Quantity, str]]
    figures: int = 5


def beside(*ohms):
    """Resistors side by side."""
    return 1 / sum(1 / r for r in ohms)


def ohms(rng, low, high):
    return rng.choice(E24) * 10 ** rng.randint(low, high) / 10


def volts(rng):
    return rng.choice((2.5, 3.3, 5.0, 9.0, 10.0, 12.0, 12.6, 13.8, 14.1, 15.0, 24.0))


def due(node, source):
    return Quantity("V", (node,), (source,))


def two_feeds(rng):
    """Two voltages over two cables on one bus."""
    r1, r2, rl = ohms(rng, 0, 0), ohms(rng, 0, 0), ohms(rng, 1, 1)
    parts = [Part("V", "V1", "a", "com", volts(rng)), Part("R", "R1", "a", "bus", r1), Part("V", "V2", "b", "com", volts(rng)),
             Part("R", "R2", "b", "bus", r2), Part("R", "RL", "bus", "com", rl)]  # fmt: skip
    formulas = [
        (due("bus", "V1"), "V1 × (R2 ∥ RL) / (R1 + R2 ∥ RL)"),
        (due("bus", "V2"), "V2 × (R1 ∥ RL) / (R2 + R1 ∥ RL)"),
    ]
    return Work("Bus with two feeds", parts, "bus", "RL", [], formulas)


def divider(rng):
    """A reference over a divider, read through a filter resistor by a converter that draws a current."""
    parts = [Part("V", "Vref", "vr", "com", rng.choice((1.25, 2.048, 2.5, 4.096))), Part("R", "R1", "vr", "sen", ohms(rng, 3, 4)),
             Part("R", "Rt", "sen", "com", ohms(rng, 3, 4)), Part("R", "Rf", "sen", "adc", ohms(rng, 3, 4)),
             Part("I", "Ib", "adc", "com", rng.choice(E24) * 1e-8)]  # fmt: skip
    formulas = [(due("adc", "Vref"), "Vref × Rt / (R1 + Rt)"), (due("adc", "Ib"), "−Ib × (Rf + R1 ∥ Rt)")]
    return Work("Sensor divider with bias current", parts, "adc", "Rt", [], formulas)


def receiver(rng):
    """A current loop over a resistor, lifted by an offset."""
    rs, r2, r3, rl = rng.choice(E24) * 10, ohms(rng, 4, 4), ohms(rng, 4, 5), ohms(rng, 5, 6)
    parts = [Part("I", "Itx", "com", "in", rng.choice((0.004, 0.012, 0.02))), Part("R", "Rs", "in", "com", rs),
             Part("R", "R2", "in", "adc", r2), Part("V", "Voff", "vo", "com", 2.5),
             Part("R", "R3", "vo", "adc", r3), Part("R", "RL", "adc", "com", rl)]  # fmt: skip
    rb3 = beside(r3, rl)
    named = [
        ("Rb3", "R3 ∥ RL", rb3),
        ("Rin", "Rs ∥ (R2 + Rb3)", beside(rs, r2 + rb3)),
        ("Rb2", "(R2 + Rs) ∥ RL", beside(r2 + rs, rl)),
    ]
    formulas = [
        (due("adc", "Itx"), "Itx × Rin × Rb3 / (R2 + Rb3)"),
        (due("adc", "Voff"), "Voff × Rb2 / (R3 + Rb2)"),
    ]
    return Work("Loop receiver with offset", parts, "adc", "RL", named, formulas)


def summing(rng):
    """Three voltages, each over its resistor, on one loaded node."""
    rl, r1, r2, r3 = (ohms(rng, 4, 5) for _ in range(4))
    parts = [Part("R", "RL", "sum", "com", rl)]
    for k, r in enumerate((r1, r2, r3), 1):
        parts += [Part("V", f"V{k}", f"in{k}", "com", volts(rng)), Part("R", f"R{k}", f"in{k}", "sum", r)]
    named = [
        ("Rx", "R2 ∥ R3 ∥ RL", beside(r2, r3, rl)),
        ("Ry", "R1 ∥ R3 ∥ RL", beside(r1, r3, rl)),
        ("Rz", "R1 ∥ R2 ∥ RL", beside(r1, r2, rl)),
    ]
    formulas = [(due("sum", f"V{k}"), f"V{k} × {x} / (R{k} + {x})") for k, (x, *_) in enumerate(named, 1)]
    return Work("Weighted sum of three channels", parts, "sum", "RL", named, formulas)


def bridge(rng):
    """A loaded bridge with a current fed into one corner, worked by its parts and its two-terminal equivalent."""
    r1, r2, r3, r4 = (ohms(rng, 3, 3) for _ in range(4))
    parts = [Part("V", "Vs", "s", "com", volts(rng)), Part("R", "R1", "s", "a", r1), Part("R", "R2", "a", "com", r2),
             Part("R", "R3", "s", "b", r3), Part("R", "R4", "b", "com", r4), Part("R", "Rm", "a", "b", ohms(rng, 4, 5)),
             Part("I", "Ia", "com", "a", rng.choice(E24) * 1e-5)]  # fmt: skip
    formulas = [
        (Quantity("V", ("a", "b"), ("Vs",)), "Vs × (R2 / (R1 + R2) − R4 / (R3 + R4)) × Rm / (Rm + Req)"),
        (Quantity("V", ("a", "b"), ("Ia",)), "Ia × (R1 ∥ R2) × Rm / (Rm + Req)"),
    ]
    named = [("Req", "R1 ∥ R2 + R3 ∥ R4", beside(r1, r2) + beside(r3, r4))]
    return Work("Bridge by its two-terminal equivalent", parts, "a", "Rm", named, formulas)


FAMILIES = (two_feeds, divider, receiver, summing, bridge)
