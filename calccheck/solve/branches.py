"""What every part is at one frequency: one branch between two nodes, or, for a part of several terminals, the branches of its model.

A capacitor is a gap at DC and 1/(jωC) elsewhere, an inductor a link and jωL; a source of another frequency is zeroed. A voltage
drop of a hand model is an independent source. All values are in SI; a branch's current counts from ``plus`` to ``minus``.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Literal

from calccheck.arithmetic import Value
from calccheck.model import Circuit, Control, Device, Element

Role = Literal[
    "impedance", "link", "gap", "voltage", "current", "controlled voltage", "controlled current", "nullor"
]  # fmt: skip
DC = Fraction(0)
_ZERO = Fraction(0)


@dataclass(frozen=True, slots=True)
class Branch:
    """A part, or a side of one, as it is at one frequency.

    ``name``: where its current stands in a ``State``. ``value``: ohms, volts, amperes, or the gain of a controlled source.
    A nullor holds the voltage of its ``control`` at zero by whatever current it takes.
    """

    part: Element
    name: str
    role: Role
    plus: str
    minus: str
    value: Value = _ZERO
    control: Control | None = None


@dataclass(frozen=True, slots=True)
class Network:
    """A circuit at one frequency in hertz (0: DC, ``model.UNSTATED``: some other one) as its branches."""

    circuit: Circuit
    frequency: Fraction
    branches: tuple[Branch, ...]
    nodes: tuple[str, ...]


def network_of(circuit: Circuit, frequency: Fraction = DC) -> Network:
    """The branches of a circuit in whose parts ``part_faults`` finds nothing."""
    branches = [b for e in circuit.elements for b in branches_of(e, circuit.reference, frequency)]
    return Network(circuit, frequency, tuple(branches), circuit.nodes())


def branches_of(e: Element, reference: str, frequency: Fraction = DC) -> tuple[Branch, ...]:
    """A part's branches at a frequency. Raises ``ValueError`` where a value is missing."""
    if e.kind in _SEVERAL:
        return _SEVERAL[e.kind](e, reference, frequency)
    role, amount = _ROLES[e.kind](e, frequency)
    return (Branch(e, e.name, role, e.plus, e.minus, amount, e.control),)


def names_of(e: Element) -> tuple[str, ...]:
    """The names of a part's branches, the same at every frequency and in every state."""
    if not e.terminals:
        return (e.name,)
    words = [word for word, _ in e.terminals]
    own = {"transistor": ("base", "collector"), "op-amp": ("out",), "transformer": (*words[0:1], *words[2:3])}
    return tuple(f"{e.name},{word}" for word in own.get(e.kind, ()))


# --- parts between two nodes ----------------------------------------------------------------------------------------


def number(x: Value | None, e: Element) -> Value:
    """A value that the part cannot do without."""
    if x is None:
        raise ValueError(f"{e.name} has no value")
    return x


def acts(e: Element, frequency: Fraction) -> bool:
    """Whether an independent source has that frequency."""
    return (e.frequency or DC) == frequency


def _source(role: Role, zeroed: Role) -> Callable[[Element, Fraction], tuple[Role, Value]]:
    def shape(e: Element, frequency: Fraction) -> tuple[Role, Value]:
        if not acts(e, frequency):
            return zeroed, _ZERO
        return role, number(e.value if e.phasor is None else e.phasor, e)

    return shape


def _plain(role: Role) -> Callable[[Element, Fraction], tuple[Role, Value]]:
    return lambda e, frequency: (role, _ZERO)


def _controlled(role: Role) -> Callable[[Element, Fraction], tuple[Role, Value]]:
    return lambda e, frequency: (role, number(e.value if e.phasor is None else e.phasor, e))


def _ohms(ohms: Value) -> tuple[Role, Value]:
    return ("impedance", ohms) if ohms else ("link", _ZERO)


def _resistor(e: Element, frequency: Fraction) -> tuple[Role, Value]:
    return _ohms(number(e.value, e))


def _impedance(e: Element, frequency: Fraction) -> tuple[Role, Value]:
    return _ohms(number(e.value if e.phasor is None else e.phasor, e))


def _capacitor(e: Element, frequency: Fraction) -> tuple[Role, Value]:
    if not frequency or not e.value:
        return "gap", _ZERO
    return _ohms(complex(0, -1 / (_omega(frequency) * float(e.value))))


def _inductor(e: Element, frequency: Fraction) -> tuple[Role, Value]:
    if not frequency or not e.value:
        return "link", _ZERO
    return _ohms(complex(0, _omega(frequency) * float(e.value)))


def _omega(frequency: Fraction) -> float:
    return 2 * math.pi * float(frequency)


def _diode(e: Element, frequency: Fraction) -> tuple[Role, Value]:
    device = e.device or Device()
    if device.state == "blocking":
        return "gap", _ZERO
    return ("link", _ZERO) if frequency else ("voltage", number(device.drop, e))


_ROLES: Mapping[str, Callable[[Element, Fraction], tuple[Role, Value]]] = {
    "resistor": _resistor,
    "impedance": _impedance,
    "capacitor": _capacitor,
    "inductor": _inductor,
    "voltage source": _source("voltage", "link"),
    "current source": _source("current", "gap"),
    "controlled voltage source": _controlled("controlled voltage"),
    "controlled current source": _controlled("controlled current"),
    "short": _plain("link"),
    "open": _plain("gap"),
    "diode": _diode,
}

# --- parts of several terminals -------------------------------------------------------------------------------------


def _op_amp(e: Element, reference: str, frequency: Fraction) -> tuple[Branch, ...]:
    """An ideal amplifier as a nullor: no current in, no voltage between its inputs; its output's current comes from the reference."""
    at = dict(e.terminals)
    (name,) = names_of(e)
    return (Branch(e, name, "nullor", at["out"], reference, control=Control(at["plus"], at["minus"])),)


def _transformer(e: Element, reference: str, frequency: Fraction) -> tuple[Branch, ...]:
    """An ideal one of ratio n: first voltage n times the second, second current −n times the first, no power lost."""
    (_, a), (_, b), (_, c), (_, d) = e.terminals
    first, second = names_of(e)
    n = number((e.device or Device()).ratio, e)
    return (
        Branch(e, first, "controlled voltage", a, b, n, Control(c, d)),
        Branch(e, second, "controlled current", c, d, -n, Control(part=first)),
    )


def _transistor(e: Element, reference: str, frequency: Fraction) -> tuple[Branch, ...]:
    """The trade's hand model: a fixed drop from base to emitter; active I_C = β·I_B, saturated a fixed drop to the emitter."""
    at, device = dict(e.terminals), e.device or Device()
    base, collector = names_of(e)
    drop: Role = "link" if frequency else "voltage"
    sign = -1 if device.polarity == "pnp" else 1
    input_side = Branch(e, base, drop, at["base"], at["emitter"], sign * number(device.v_be, e))
    ends = at["collector"], at["emitter"]
    if device.state == "saturated":
        return input_side, Branch(e, collector, drop, *ends, sign * number(device.v_ce, e))
    return input_side, Branch(e, collector, "controlled current", *ends, number(device.beta, e), Control(part=base))


_SEVERAL: Mapping[str, Callable[[Element, str, Fraction], tuple[Branch, ...]]] = {
    "op-amp": _op_amp,
    "transformer": _transformer,
    "transistor": _transistor,
}


def with_terminals(circuit: Circuit, currents: dict[str, Value]) -> dict[str, Value]:
    """The currents of the branches, and those into the terminals that have no branch of their own."""
    for e in circuit.elements:
        if not e.terminals:
            continue
        keys = [f"{e.name},{word}" for word, _ in e.terminals]
        if e.kind == "transistor":
            own = names_of(e)
            (rest,) = (key for key in keys if key not in own)
            currents[rest] = -currents[own[0]] - currents[own[1]]
        elif e.kind == "transformer":
            currents[keys[1]], currents[keys[3]] = -currents[keys[0]], -currents[keys[2]]
        else:
            zero = 0 * currents[names_of(e)[0]]
            currents |= {key: zero for key in keys if key not in currents}
    return currents
