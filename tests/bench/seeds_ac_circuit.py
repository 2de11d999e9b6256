"""The seeds of alternating current with the sources and the circuit."""

from __future__ import annotations

import math
from dataclasses import replace

import hand
from hand_ac import Phasor, as_claimed, whole, worth
from seeding_ac import redone
from seeds import beside


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
    return redone(b, b.net.put(steered[0].name, kind="-", value=0.0)) if steered else None


def omega_frequency(b):
    parts = b.net.kind("LC")
    factor = b.rng.choice((2 * math.pi, 1 / (2 * math.pi)))
    net = b.net
    for p in parts if b.rng.random() < 0.7 else parts[:1]:
        net = net.put(p.name, value=p.value * factor)
    return redone(b, net) if parts else None


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
    return redone(b, b.net.put(a.name, value=c.value).put(c.name, value=a.value))


def element_absent(b):
    return redone(b, b.net.put(b.rng.choice(b.net.kind("RLC")).name, kind="-", value=0.0))


def element_shorted(b):
    return redone(b, b.net.put(b.rng.choice(b.net.kind("RLC")).name, kind="=", value=0.0))


def neighbour_value(b):
    p = b.rng.choice(b.net.kind("RLC"))
    value = beside(p.value * 1e12, b.rng.choice((hand.E24, hand.E24[::2])), b.rng.choice((-1, 1)))
    return redone(b, b.net.put(p.name, value=value / 1e12)) if value else None


def stale(b):
    p = b.rng.choice(b.net.kind("RLCVI"))
    old = b.net.put(p.name, value=p.value * b.rng.choice((0.5, 0.68, 0.82, 1.2, 1.5, 2.2)))
    return redone(b, old, earlier=old)


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
        return redone(b, b.net.put(a.name, value=row).put(c.name, kind="-", value=0.0))
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
