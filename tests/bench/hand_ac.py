"""The bench's own alternating-current circuits, their quantities and how these are printed; solved by ``hand.solved``."""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass, replace

import hand
from hand import E24, Part

PASSIVE = "RLC"
FREQUENCIES = (50, 60, 400, 1000, 5000)
UNITS = {"V": "V", "I": "A", "P": "W", "Q": "var", "S": "VA", "Z": "Ω"}


@dataclass(frozen=True)
class Net:
    """A circuit with the one frequency of its sources in hertz."""

    parts: list[Part]
    hertz: float

    @property
    def omega(self):
        return 2 * math.pi * self.hertz

    def put(self, name, **change):
        return replace(self, parts=hand.put(self.parts, name, **change))

    def kind(self, kinds):
        return [p for p in self.parts if p.kind in kinds]


@dataclass(frozen=True)
class Phasor:
    """``V``, ``I``, ``P``, ``Q``, ``S`` of a part or node, ``Z`` seen between two nodes. ``form``: polar, rect, mag, arg, real."""

    letter: str
    subs: tuple[str, ...]
    form: str
    due_to: tuple[str, ...] = ()

    def text(self):
        sub = self.subs[0] if len(self.subs) == 1 else "{" + ",".join(self.subs) + "}"
        bare = f"{self.letter}_{sub}" + (f" due to {' and '.join(self.due_to)}" if self.due_to else "")
        return {"mag": f"|{bare}|", "arg": f"arg {bare}"}.get(self.form, bare)


def whole(q, net):
    """The phasor, power or impedance behind a quantity; nothing where it has none."""
    parts = net.parts
    if q.letter == "Z":
        parts = [*hand.only(parts, ()), Part("I", "test", q.subs[1], q.subs[0], 1.0)]
    elif q.due_to:
        parts = hand.only(parts, q.due_to)
    found = hand.solved(parts, net.omega)
    if found is None:
        return None
    volts, amperes = found
    if len(q.subs) == 2:
        return volts.get(q.subs[0], 0) - volts.get(q.subs[1], 0)
    part = next((p for p in parts if p.name == q.subs[0]), None)
    if part is None:
        return volts.get(q.subs[0])
    across, through = volts[part.plus] - volts[part.minus], amperes[part.name]
    return {"V": across, "I": through}.get(q.letter, across * complex(through).conjugate())


def as_claimed(value, q):
    """What a quantity's form shows of a whole phasor or power."""
    if value is None:
        return None
    if q.letter in "PQ":
        return value.real if q.letter == "P" else value.imag
    return {"mag": abs, "arg": cmath.phase}.get(q.form, complex)(value)


def worth(q, net):
    return as_claimed(whole(q, net), q)


# --- random circuits ------------------------------------------------------------------------------------------------


def random_net(rng, controlled=False):
    """One to three sources of one frequency on a net of resistors, coils and capacitors of like impedances."""
    hertz, decade = rng.choice(FREQUENCIES), 10 ** rng.randint(1, 3)
    nodes = ["com", *(f"n{k}" for k in range(1, rng.randint(3, 5)))]

    def passive(kind, plus, minus):
        ohms = rng.choice(E24) / 10 * decade * rng.choice((0.5, 1, 1, 2))
        value = {"R": ohms, "L": ohms / (2 * math.pi * hertz), "C": 1 / (2 * math.pi * hertz * ohms)}[kind]
        return Part(kind, "", plus, minus, preferred(value))

    ends = [(n, rng.choice(nodes[:k])) for k, n in enumerate(nodes) if k]
    ends += [tuple(rng.sample(nodes, 2)) for _ in range(rng.randint(0, 3))]
    kinds = [rng.choice("RRLC") for _ in ends[2:]]
    parts = [passive(kind, *two) for kind, two in zip(["R", rng.choice("LC"), *kinds], ends, strict=False)]
    for k in range(1, rng.choice((1, 2, 2, 3)) + 1):
        feed, strength = rng.choice(nodes[1:]), float(rng.choice(E24))
        phasor = cmath.rect(strength, math.radians(rng.choice((0, 0, 30, -45, 60, 90, -120))))
        if k == 1 or rng.random() < 0.6:
            parts.append(passive(rng.choice("RRLC"), f"s{k}", feed))
            parts.append(Part("V", f"V{k}", f"s{k}", "com", phasor))
        else:
            parts.append(Part("I", f"I{k}", "com", feed, phasor / decade / 30))
    if controlled:
        parts.append(
            Part(
                "G", "Gx", *rng.sample(nodes, 2), round(rng.choice(E24) / decade / 200, 9), tuple(rng.sample(nodes, 2))
            )
        )
    net = Net(named(parts), hertz)
    found = hand.solved(net.parts, net.omega)
    return (
        net
        if found is not None and "com" in {n for p in parts for n in (p.plus, p.minus)}
        else random_net(rng, controlled)
    )


def preferred(value):
    """The value of E24 nearest below."""
    power = 10.0 ** (math.floor(math.log10(value)) - 1)
    return max([d for d in E24 if d <= value / power * (1 + 1e-9)], default=10) * power


def named(parts):
    """Passive parts numbered by kind."""
    count = dict.fromkeys(PASSIVE, 0)
    found = []
    for p in parts:
        if not p.name:
            count[p.kind] += 1
            p = replace(p, name=f"{p.kind}{count[p.kind]}")
        found.append(p)
    return found


def stage(rng):
    """An op-amp stage, inverting or not, with a resistance or an impedance in its feedback."""
    hertz, first = rng.choice(FREQUENCIES), rng.choice(E24) * 100.0
    parts = [Part("V", "V1", "a", "com", rng.choice(E24) / 10)]
    start, plus = ("a", "com") if rng.random() < 0.5 else ("com", "a")
    parts += [Part("R", "R1", start, "m", first), Part("R", "R2", "m", "o", rng.choice(E24) * 1000.0)]
    if rng.random() < 0.5:
        parts.append(Part("C", "C1", "m", "o", preferred(1 / (2 * math.pi * hertz * rng.choice(E24) * 1000.0))))
    parts += [Part("R", "RL", "o", "com", rng.choice(E24) * 100.0), Part("U", "U1", "o", "com", by=(plus, "m"))]
    return Net(parts, hertz)


def three_phases(rng):
    """Three sources a third of a turn apart, each through its line on a load in star with a neutral conductor."""
    rms, hertz = rng.choice((120.0, 230.0, 240.0)), rng.choice((50, 60))
    parts = []
    for k, degrees in zip("abc", (0, -120, 120), strict=True):
        parts.append(Part("V", f"V{k}", f"s{k}", "com", cmath.rect(rms, math.radians(degrees))))
        parts.append(Part("R", f"Rw{k}", f"s{k}", f"l{k}", rng.choice(E24) / 100))
        parts.append(Part("R", f"R{k}", f"l{k}", f"m{k}", float(rng.choice(E24))))
        parts.append(Part("L", f"L{k}", f"m{k}", "n", preferred(rng.choice(E24) / (2 * math.pi * hertz))))
    return Net([*parts, Part("R", "Rn", "n", "com", rng.choice(E24) / 10)], hertz)


# --- as text --------------------------------------------------------------------------------------------------------


def circuit_block(net):
    return "\n".join(["```circuit", "reference com", *(_line(p, net) for p in net.parts), "```"])


def _line(p, net):
    number = f"{p.value.real:.12g}"
    if p.kind == "U":
        return f"{p.name}: op-amp, plus {p.by[0]}, minus {p.by[1]}, out {p.plus}"
    if p.kind in "VI":
        unit = "V" if p.kind == "V" else "A"
        turned = f"{abs(p.value):.12g} {unit} ∠ {math.degrees(cmath.phase(p.value)):.9g}°"
        return f"{p.name}: {turned}, {p.plus} to {p.minus}, {net.hertz} Hz"
    steer = "V_{" + ",".join(p.by) + "}"
    what = {"R": f"{number} Ω", "L": f"{number} H", "C": f"{number} F", "G": f"{number} S * {steer}"}[p.kind]
    return f"{p.name}: {what}, {p.plus} to {p.minus}"


def figures_of(value, form):
    """The real figures that a form prints."""
    if form == "polar":
        return [abs(value), math.degrees(cmath.phase(value))]
    return [value.real, value.imag] if form == "rect" else [math.degrees(value) if form == "arg" else value]


def texts_of(value, form, figures, unit):
    """The printed figures, the unit behind, and the place of the last digit of each in SI or in degrees."""
    shown = figures_of(value, form)
    angle = [f"{x:.{figures - 2}f}".replace("-", "−") for x in shown[-1:]] if form in ("polar", "arg") else []
    if form == "arg":
        return angle, "°", [10.0 ** (2 - figures)]
    if form == "rect":
        _, unit, factor = hand.printed(max(map(abs, shown)), figures, unit)
        places = max(0, figures - 1 - math.floor(math.log10(max(map(abs, shown)) / factor)))
        return [f"{x / factor:.{places}f}" for x in shown], unit, [factor * 10.0**-places] * 2
    text, own, factor = hand.printed(shown[0], figures, "" if unit == "dB" else unit)
    unit = own or unit
    return [text, *angle], unit, [hand.place(text, factor), 10.0 ** (2 - figures)][: 1 + len(angle)]


def joined(texts, unit, form):
    """The printed value."""
    if form == "polar":
        return f"{texts[0]} {unit} ∠ {texts[1]}°"
    if form == "rect":
        sign = "−" if texts[1].startswith(("-", "−")) else "+"
        return f"({texts[0]} {sign} j{texts[1].lstrip('-−')}) {unit}".replace("-", "−")
    return f"{texts[0]}{'' if unit in ('°', '') else ' '}{unit}"
