"""The seeds by kind: in the digits, with the sources, with the circuit. Each function gives a seed, or nothing."""

from __future__ import annotations

from dataclasses import replace

import hand
from hand import UNITS, Quantity, worth
from seeding import Seed, quantities


def seen(bench):
    """A resistance seen between two nodes."""
    nodes = sorted({n for p in bench.parts for n in (p.plus, p.minus)})
    q = Quantity("R", tuple(bench.rng.sample(nodes, 2)))
    value = worth(q, bench.parts)
    return bench.seed(q, value, value) if value is not None and abs(value) > 1e-6 else None


def ratio(bench):
    (a, x), (b, y) = (bench.pick(lambda q: q.letter == "V", due=False) for _ in range(2))
    if a is None or b is None:
        return None
    text, *_ = hand.printed(x / y * 100, bench.figures, "")
    return Seed(f"{a.text()} / {b.text()}", x / y, x / y, "", bench.figures, digits=text, suffix="%")


def sign(bench):
    q, t = bench.pick()
    return bench.seed(q, -t, t)


def prefix(bench):
    q, t = bench.pick()
    return bench.seed(q, t * 10 ** bench.rng.choice((3, -3, 3, -3, 6, -6)), t)


def decimal_point(bench):
    q, t = bench.pick()
    return bench.seed(q, t * 10 ** bench.rng.choice((1, -1, 1, -1, 2, -2)), t)


def digits_swapped(bench):
    q, t = bench.pick()
    text = list(hand.printed(t, bench.figures, UNITS[q.letter])[0]) if q else []
    at = [k for k in range(len(text) - 1) if text[k].isdigit() and text[k + 1].isdigit() and text[k] != text[k + 1]]
    if not at:
        return None
    k = bench.rng.choice(at)
    text[k], text[k + 1] = text[k + 1], text[k]
    return bench.seed(q, t, t, digits="".join(text))


def digit_slip(bench):
    q, t = bench.pick()
    if q is None:
        return None
    text = hand.printed(t, bench.figures, UNITS[q.letter])[0]
    how = bench.rng.choice(("wrong", "wrong", "dropped", "doubled"))
    if how == "dropped":  # so that as many are left as are printed elsewhere
        text = hand.printed(t, bench.figures + 1, UNITS[q.letter])[0]
    counting = [k for k, c in enumerate(text) if c.isdigit() and text[: k + 1].strip("−0.")]
    k = bench.rng.choice(counting if how == "wrong" else counting[1:])
    if how == "wrong":
        others = [d for d in "0123456789"[k == counting[0] :] if d != text[k]]
        text = text[:k] + bench.rng.choice(others) + text[k + 1 :]
    else:
        text = text[:k] + (text[k] * 2 if how == "doubled" else "") + text[k + 1 :]
    return bench.seed(q, t, t, digits=text.rstrip("."))


def reciprocal(bench):
    seed = seen(bench)
    if seed is None:
        return None
    return replace(seed, value=1 / seed.truth)


def factor_two(bench):
    q, t = bench.pick()
    return bench.seed(q, t * bench.rng.choice((2, 0.5)), t)


def percent(bench):
    seed = ratio(bench)
    if seed is None:
        return None
    if bench.rng.random() < 0.5:  # 0.42 % for 42 %
        return replace(seed, digits=hand.printed(seed.truth, bench.figures, "")[0])
    return replace(seed, suffix="")  # 42 for 42 %


def _sum(bench, weights, letters="VIP"):
    """A total in which one source's part counts ``weights`` times."""
    names = hand.sources(bench.parts)
    q, t = bench.pick(lambda q: q.letter in letters and not q.due_to)
    if q is None or len(names) < 2:
        return None
    odd = bench.rng.choice(names)
    value = 1.0
    for f in [replace(q, letter=x) for x in ("VI" if q.letter == "P" else q.letter)]:
        shares = {n: worth(replace(f, due_to=(n,)), bench.parts) for n in names}
        if abs(shares[odd] / sum(shares.values()) - 1) < 1e-6:
            return None  # no other source has a part in it: this would be a turned sign, or twice the value
        value *= sum(share * (weights if n == odd else 1) for n, share in shares.items())
    return bench.seed(q, value, t)


def source_missing(bench):
    return _sum(bench, 0)


def source_reversed(bench):
    return _sum(bench, -1)


def source_twice(bench):
    return _sum(bench, 2)


def power_superposed(bench):
    names = hand.sources(bench.parts)
    q, t = bench.pick(lambda q: q.letter == "P" and not q.due_to)
    if q is None or len(names) < 2:
        return None
    return bench.seed(q, sum(worth(replace(q, due_to=(n,)), bench.parts) for n in names), t)


def source_zeroed_wrongly(bench):
    names = hand.sources(bench.parts)
    if len(names) < 2:
        return None
    own, other = bench.rng.sample(names, 2)
    kind = next(p.kind for p in bench.parts if p.name == other)
    odd = hand.put(bench.parts, other, kind="-" if kind == "V" else "=", value=0.0)
    return _part(bench, own, odd)


def controlled_source_zeroed(bench):
    steered = [p for p in bench.parts if p.kind in "GE"]
    if not steered:
        return None
    off = hand.put(bench.parts, steered[0].name, kind="=" if steered[0].kind == "E" else "-", value=0.0)
    return _part(bench, bench.rng.choice(hand.sources(bench.parts)), off)


def _part(bench, own, odd):
    """A part due to one source found in an odd circuit; in a third of the seeds the total made with it."""
    if bench.rng.random() < 0.67:
        q, t = bench.pick(lambda q: q.due_to == (own,))
        return bench.seed(q, worth(q, odd), t) if q else None
    q, t = bench.pick(lambda q: q.letter in "VI" and not q.due_to)
    share = worth(replace(q, due_to=(own,)), odd) if q else None
    return None if share is None else bench.seed(q, t - worth(replace(q, due_to=(own,)), bench.parts) + share, t)


def _in(bench, parts, **more):
    q, t = bench.pick()
    return bench.seed(q, worth(q, parts), t, **more) if q else None


def swapped_values(bench):
    a, b = bench.rng.sample(hand.resistors(bench.parts), 2)
    if a.value == b.value:
        return None
    return _in(bench, hand.put(hand.put(bench.parts, a.name, value=b.value), b.name, value=a.value))


def element_absent(bench):
    return _in(bench, hand.put(bench.parts, bench.rng.choice(hand.resistors(bench.parts)).name, kind="-", value=0.0))


def element_shorted(bench):
    return _in(bench, hand.put(bench.parts, bench.rng.choice(hand.resistors(bench.parts)).name, kind="=", value=0.0))


def neighbour_value(bench):
    r = bench.rng.choice(hand.resistors(bench.parts))
    value = beside(r.value, bench.rng.choice((hand.E24, hand.E24[::2])), bench.rng.choice((-1, 1)))
    return _in(bench, hand.put(bench.parts, r.name, value=value)) if value else None


def stale(bench):
    r = bench.rng.choice(bench.parts)
    old = hand.put(bench.parts, r.name, value=r.value * bench.rng.choice((0.5, 0.68, 0.82, 1.2, 1.5, 2.2)))
    return _in(bench, old, earlier=old)


def other_quantity(bench):
    q, t = bench.pick()
    if q is None:
        return None
    if bench.rng.random() < 0.25 and len(q.subs) == 1 and any(p.name == q.subs[0] for p in bench.parts):
        other = replace(q, letter=bench.rng.choice([x for x in "VI" if x != q.letter]))  # V for I, number for number
        return bench.seed(q, worth(other, bench.parts), t)
    same = [o for o in quantities(bench.parts, False) if o.letter == q.letter and o.subs != q.subs]
    other = replace(bench.rng.choice(same), due_to=q.due_to)
    value = worth(other, bench.parts)
    return (
        bench.seed(q, value, t) if abs(value + t) > 1e-6 * abs(t) else None
    )  # the same current the other way is a sign


def divider_complement(bench):
    """A divider hung on a source, loaded by the rest: V across its lower resistor claimed, across its upper one printed."""
    fed = [(v, r) for v in bench.parts if v.kind == "V" and v.minus == "com" for r in hand.resistors(bench.parts)
           if v.plus in (r.plus, r.minus)]  # fmt: skip
    if not fed:
        return None
    source, upper = bench.rng.choice(fed)
    tap = upper.minus if upper.plus == source.plus else upper.plus
    q = Quantity("V", (tap,))
    t = worth(q, bench.parts)
    return bench.seed(q, source.value - t, t) if tap != "com" and abs(t) > 1e-4 * bench.scales["V"] else None


def series_parallel(bench):
    """Two resistors side by side worked as a series pair, or two in a row as a parallel pair."""
    a, b = bench.rng.sample(hand.resistors(bench.parts), 2)
    both, total = a.value * b.value / (a.value + b.value), a.value + b.value
    if bench.rng.random() < 0.5:  # in a formula of the working
        plus = bench.rng.random() < 0.5
        text = f"{a.name} + {b.name}" if plus else f"{a.name} ∥ {b.name}"
        return Seed(
            f"Rpair{bench.rng.randrange(10**9)} = {text}",
            *((both, total) if plus else (total, both)),
            "Ω",
            bench.figures,
        )
    if {a.plus, a.minus} == {b.plus, b.minus}:
        odd = hand.put(hand.put(bench.parts, a.name, value=total), b.name, kind="-", value=0.0)
        return _in(bench, odd)
    joint = {a.plus, a.minus} & {b.plus, b.minus} - {"com"}
    meeting = [p for p in bench.parts if joint & {p.plus, p.minus, *p.by}]
    if not joint or len(meeting) != 2:
        return None
    odd = hand.put(hand.put(bench.parts, a.name, value=both), b.name, kind="=", value=0.0)
    q, t = bench.pick(lambda q: not joint & set(q.subs))
    return bench.seed(q, worth(q, odd), t) if q else None


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
