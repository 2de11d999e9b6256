"""Formulas over tolerances for tests, and witnesses that share nothing with the program's ways to their extremes."""

from __future__ import annotations

import random
from fractions import Fraction
from itertools import product

import hand
from circuits import circuit, part

from calccheck.formula import Binary, Call, Reference
from calccheck.source import Span
from calccheck.toleranced import Effect, Formula, Reading, Varied

NOWHERE = Span(0, 0)


def name(word):
    return Reference(word, NOWHERE)


def op(sign, a, b):
    return Binary(sign, a, b, NOWHERE)


def call(function, *arguments):
    return Call(function, arguments, NOWHERE)


def formula(made, node, reads, tolerance):
    """A formula over readings of a circuit whose every value has a relative tolerance. ``reads``: functions of a state, by name."""
    varied, effects = [], []
    for e in made.elements:
        if e.value is None:
            continue
        t = Fraction(tolerance(e) if callable(tolerance) else tolerance)
        ends = sorted((e.value * (1 - t), e.value * (1 + t)))
        varied.append(Varied(e.name, e.name, e.value, *ends))
        effects.append(Effect(e.name, "value", name(e.name)))
    readings = {key: Reading(made, Fraction(0), read, tuple(effects)) for key, read in reads.items()}
    return Formula(node, tuple(varied), readings)


def network(rng, nodes, parts, controlled=0):
    """A random circuit of one source, resistors and controlled sources, as the bench's own parts."""
    names = ["com", *(f"n{k}" for k in range(nodes - 1))]
    made = [hand.Part("V", "V1", "n0", "com", 10.0)]
    ends = [(names[k], names[rng.randrange(k)]) for k in range(1, nodes)]
    ends += [tuple(rng.sample(names, 2)) for _ in range(parts - nodes)]
    made += [
        hand.Part("R", f"R{k}", *pair, rng.choice((1.0, 2.2, 4.7, 10.0, 22.0)) * 1000) for k, pair in enumerate(ends)
    ]
    for k in range(controlled):
        by = tuple(rng.sample(names, 2))
        made.append(hand.Part("G", f"G{k}", *rng.sample(names, 2), rng.choice((1, -1)) * rng.choice((1e-4, 3e-4)), by))
    return made


def as_circuit(parts):
    """The bench's parts as the program's."""
    kinds = {"V": ("V", None), "R": ("R", None), "G": ("F", "by")}
    return circuit(*(part(kinds[p.kind][0], p.name, p.plus, p.minus, Fraction(p.value).limit_denominator(10**6),
                          by=p.by if kinds[p.kind][1] else None) for p in parts))  # fmt: skip


def with_values(parts, values):
    """The parts with other values, by name."""
    return [hand.replace(p, value=values.get(p.name, p.value)) for p in parts]


def corners(varied):
    """All corners of the box, as mappings from key to float."""
    keys = [v.key for v in varied]
    return [dict(zip(keys, ends, strict=True)) for ends in product(*((float(v.low), float(v.high)) for v in varied))]


def inside(varied, count, seed):
    """Random points of the box, half of their values at ends."""
    rng = random.Random(seed)
    return [{v.key: rng.choice((float(v.low), float(v.high), rng.uniform(float(v.low), float(v.high)))) for v in varied}
            for _ in range(count)]  # fmt: skip
