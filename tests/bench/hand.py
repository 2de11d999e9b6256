"""The bench's own circuits and its own way to solve them; nothing of the program is used, so that no fault is shared.

Kirchhoff's laws and the law of every part as one dense set of equations (the tableau), solved by numpy.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

E24 = (10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91)  # IEC 60063:2015


@dataclass(frozen=True)
class Part:
    """R, L, C, V, I; G: current steered by a voltage, E: voltage steered by a voltage; - a gap, = a link. ``by``: two nodes.

    U: an ideal op-amp, ``by`` its inputs + and −, ``plus`` its output, ``minus`` the reference.
    """

    kind: str
    name: str
    plus: str
    minus: str
    value: complex = 0.0
    by: tuple[str, str] = ("", "")


@dataclass(frozen=True)
class Quantity:
    """``V`` of nodes or a part, ``I``, ``P``, ``R`` seen between two nodes; ``due_to``: the sources that act, all if empty."""

    letter: str
    subs: tuple[str, ...]
    due_to: tuple[str, ...] = ()

    def text(self) -> str:
        sub = self.subs[0] if len(self.subs) == 1 else "{" + ",".join(self.subs) + "}"
        return f"{self.letter}_{sub}" + (f" due to {' and '.join(self.due_to)}" if self.due_to else "")


UNITS = {"V": "V", "I": "A", "P": "W", "R": "Ω"}


def solved(parts, omega=0.0):
    """Potentials by node and currents by part, phasors at an angular frequency; nothing without a single solution."""
    nodes = sorted({n for p in parts for n in (p.plus, p.minus)} - {"com"})
    at = {n: k for k, n in enumerate(nodes)}
    size, kind = len(nodes) + len(parts), complex if omega else float
    a, b = np.zeros((size, size), kind), np.zeros(size, kind)

    def volt(row, node, factor):
        if node in at:
            a[row, at[node]] += factor

    for k, p in enumerate(parts):
        own = len(nodes) + k
        for node, sign in ((p.plus, 1), (p.minus, -1)):
            if node in at:
                a[at[node], own] += sign
        if p.kind in "VE=RL":
            volt(own, p.plus, 1)
            volt(own, p.minus, -1)
        if p.kind in "IG-C":
            a[own, own] = 1
        if p.kind in "RL":
            a[own, own] = -p.value * (1 if p.kind == "R" else 1j * omega)
        if p.kind == "C":
            volt(own, p.plus, -1j * omega * p.value)
            volt(own, p.minus, 1j * omega * p.value)
        if p.kind == "U":
            volt(own, p.by[0], 1)
            volt(own, p.by[1], -1)
        if p.kind in "VI":
            b[own] = p.value
        if p.kind in "GE":
            volt(own, p.by[0], -p.value)
            volt(own, p.by[1], p.value)
    scale = np.abs(a).max(axis=1)
    if not scale.all():
        return None
    a, b = a / scale[:, None], b / scale
    if np.linalg.cond(a) > 1e12:
        return None
    x = np.linalg.solve(a, b)
    volts = {n: x[k] for n, k in at.items()} | {"com": 0.0}
    return volts, {p.name: x[len(nodes) + k] for k, p in enumerate(parts)}


def only(parts, names):
    """All independent sources but those named zeroed."""
    return [zeroed(p) if p.kind in "VI" and p.name not in names else p for p in parts]


def zeroed(p):
    return replace(p, kind="=" if p.kind == "V" else "-", value=0.0)


def worth(q, parts):
    """The value of a quantity in SI, or nothing where it has none."""
    if q.letter == "R":
        parts = [*only(parts, ()), Part("I", "test", q.subs[1], q.subs[0], 1.0)]
    elif q.due_to:
        parts = only(parts, q.due_to)
    found = solved(parts)
    if found is None:
        return None
    volts, amperes = found
    if len(q.subs) == 2:
        return volts[q.subs[0]] - volts[q.subs[1]]
    part = next((p for p in parts if p.name == q.subs[0]), None)
    if part is None:
        return volts.get(q.subs[0])
    across = volts[part.plus] - volts[part.minus]
    return {"V": across, "I": amperes[part.name], "P": across * amperes[part.name]}[q.letter]


def sources(parts):
    return [p.name for p in parts if p.kind in "VI"]


def resistors(parts):
    return [p for p in parts if p.kind == "R"]


def put(parts, name, **change):
    """The circuit with one part changed."""
    return [replace(p, **change) if p.name == name else p for p in parts]


# --- random circuits ------------------------------------------------------------------------------------------------


def random_circuit(rng, controlled=False):
    """Two or three sources that feed a net of three to nine resistors, as calc sheets have them; solvable by its making."""
    nodes = ["com", *(f"n{k}" for k in range(1, rng.randint(3, 6)))]
    decade = 10 ** rng.randint(0, 3)

    def ohms():
        return rng.choice(E24) * decade * rng.choice((0.1, 1.0, 1.0, 10.0))

    parts = [Part("R", "", n, rng.choice(nodes[:k]), ohms()) for k, n in enumerate(nodes) if k]
    parts += [Part("R", "", *rng.sample(nodes, 2), ohms()) for _ in range(rng.randint(0, 3))]
    parts = [replace(p, name=f"R{k}") for k, p in enumerate(parts, 1)]
    for k in range(1, rng.randint(2, 3) + 1):
        feed, strength = rng.choice(nodes[1:]), rng.choice(E24) * rng.choice((0.1, 0.5, 1.0))
        if rng.random() < 0.6:
            parts.append(Part("R", f"Rs{k}", f"s{k}", feed, ohms()))
            parts.append(Part("V", f"V{k}", f"s{k}", "com", strength))
        else:
            parts.append(Part("I", f"I{k}", "com", feed, round(strength / decade / 30, 9)))
    if controlled:
        parts += _controlled(rng, nodes, decade, ohms())
    used = {n for p in parts for n in (p.plus, p.minus)}
    return parts if solved(parts) is not None and "com" in used else random_circuit(rng, controlled)


def _controlled(rng, nodes, decade, ohms):
    steer = tuple(rng.sample(nodes, 2))
    if rng.random() < 0.5:
        return [Part("G", "Gx", *rng.sample(nodes, 2), round(rng.choice(E24) / decade / 2000, 9), steer)]
    return [Part("E", "Ex", "x", "com", rng.choice(E24) / 10, steer), Part("R", "Rx", "x", rng.choice(nodes[1:]), ohms)]


# --- as text --------------------------------------------------------------------------------------------------------


def circuit_block(parts):
    return "\n".join(
        ["```circuit", "reference com", *(f"{p.name}: {_what(p)}, {p.plus} to {p.minus}" for p in parts), "```"]
    )


def _what(p):
    number = f"{p.value:.12g}"
    steer = "V_{" + ",".join(p.by) + "}"
    return {"R": f"{number} Ω", "V": f"{number} V", "I": f"{number} A", "G": f"{number} S * {steer}",
            "E": f"{number} * {steer}"}[p.kind]  # fmt: skip


PREFIXES = {12: "T", 9: "G", 6: "M", 3: "k", 0: "", -3: "m", -6: "µ", -9: "n", -12: "p"}


def printed(value, figures, unit):
    """A value rounded to significant figures with the prefix that leaves one to three digits before the point."""
    digits, exponent = f"{abs(value):.{figures - 1}e}".split("e")
    power = int(exponent)
    step = 3 * math.floor(power / 3) if unit else 0
    step += 3 if unit and power - step >= figures else 0  # 0.23 A, since 230 mA would show three figures
    shift = power - step
    whole = digits.replace(".", "")
    if shift < 0:
        text = "0." + "0" * (-shift - 1) + whole
    elif shift + 1 >= len(whole):
        text = whole + "0" * (shift + 1 - len(whole))
    else:
        text = whole[: shift + 1] + "." + whole[shift + 1 :]
    return ("−" if value < 0 else "") + text, (PREFIXES[step] + unit if unit else ""), 10.0**step


def place(text, factor):
    """The unit of the last place of a printed number, SI."""
    return factor * 10.0 ** -(len(text.partition(".")[2]))
