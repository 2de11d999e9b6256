"""The bench's own circuits with op-amps, diodes and transistors at direct current; solved by ``hand.solved``.

A conducting diode and a base-emitter path are voltage sources of their drop, a transistor's collector a current source steered
through a small series voltage: the trade's hand models written out.
"""

from __future__ import annotations

import hand
from hand import E24, Part, worth


def stage(rng):
    """An op-amp stage, inverting or not."""
    start, plus = ("a", "com") if rng.random() < 0.5 else ("com", "a")
    parts = [Part("V", "V1", "a", "com", rng.choice(E24) / 20), Part("R", "R1", start, "m", rng.choice(E24) * 100.0)]
    parts += [Part("R", "R2", "m", "o", rng.choice(E24) * 1000.0), Part("R", "RL", "o", "com", rng.choice(E24) * 100.0)]
    return [*parts, Part("U", "U1", "o", "com", by=(plus, "m"))]


def with_drops(rng):
    """A feed through diodes onto a loaded divider; all of them conduct by its making."""
    count = rng.choice((1, 1, 2))
    parts = [
        Part("V", "V1", "a", "com", float(rng.choice(E24)) + 2.0),
        Part("R", "R1", "a", "k0", rng.choice(E24) * 10.0),
    ]
    for k in range(count):
        parts.append(Part("V", f"D{k + 1}", f"k{k}", f"k{k + 1}", rng.choice((0.35, 0.6, 0.65, 0.7, 1.8))))
    last = f"k{count}"
    parts += [Part("R", "R2", last, "b", rng.choice(E24) * 10.0), Part("R", "R3", "b", "com", rng.choice(E24) * 10.0)]
    parts += [Part("R", "R4", "b", "com", rng.choice(E24) * 20.0)] if rng.random() < 0.5 else []
    return parts


def circuit_block(parts):
    plain = hand.circuit_block([p for p in parts if p.kind != "U" and p.name[0] != "D"])
    lines = [f"{p.name}: diode, {p.plus} to {p.minus}, drop {p.value:.12g} V" for p in parts if p.name[0] == "D"]
    lines += [f"{p.name}: op-amp, plus {p.by[0]}, minus {p.by[1]}, out {p.plus}" for p in parts if p.kind == "U"]
    return plain.removesuffix("```") + "\n".join([*lines, "```"])


def drop_forgotten(bench):
    diodes = [p for p in bench.parts if p.name[0] == "D"]
    if not diodes:
        return None
    odd = bench.parts
    for p in diodes if bench.rng.random() < 0.5 else diodes[:1]:
        odd = hand.put(odd, p.name, value=0.0)
    q, t = bench.pick(due=False)
    return bench.seed(q, worth(q, odd), t) if q else None


def stage_kind(bench):
    amps = [p for p in bench.parts if p.kind == "U"]
    if not amps:
        return None
    first = next(p for p in bench.parts if p.name == "R1")
    odd = hand.put(hand.put(bench.parts, "R1", plus=amps[0].by[0]), "U1", by=(first.plus, "m"))
    q, t = bench.pick(due=False)
    value = worth(q, odd) if q else 0.0
    return bench.seed(q, value, t) if q and abs(value + t) > 1e-6 * abs(t) else None  # turned round it is a sign
