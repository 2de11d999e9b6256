"""Whether the parts by hand model are in the state that the sheet assumes: the inequalities behind each model, one row each.

The models and their conditions are common practice. All quantities are linear in the solution, so that with ripple on the
bias the worst instant is the DC value less the amplitudes of all frequencies.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Real, Value, real, size
from calccheck.model import Circuit, Device, Element, Finding, State
from calccheck.solve.part_faults import fault
from calccheck.solve.structure import shown
from calccheck.units import AMPERE, VOLT, Dimension

V_CE_SATURATION = Fraction(1, 5)  # volts; below it an active transistor saturates (common practice)
_ROUNDING = 1e-12  # of the largest voltage or current, where these are floating-point numbers

Reader = Callable[[State], Value]


@dataclass(frozen=True, slots=True)
class _Condition:
    """A quantity that must not fall below a bound (``sign`` 1) or rise above it (−1): a limit, or another quantity."""

    quantity: str
    read: Reader
    remedy: str
    dimension: Dimension
    sign: int = 1
    limit: Fraction = Fraction(0)
    bound: str = ""
    follows: Reader | None = None
    strict: bool = False


def state_faults(
    circuit: Circuit, bias: State | None, ripples: Sequence[State] = (), crest: float = 1.0
) -> tuple[Finding, ...]:
    """The assumed states that do not hold, which inequality fails and by how much.

    ``bias``: the whole at DC; ``None`` where nothing acts at DC. ``ripples``: the whole at every other frequency; ``crest``:
    their peak over their magnitude, √2 for rms values.
    """
    found = []
    for e in circuit.elements:
        for condition in _conditions(e):
            if text := _failure(condition, bias, ripples, crest):
                found.append(fault(f"{_taken(e)} {text}. {condition.remedy}", e.span, kind="state"))
    return tuple(found)


def _taken(e: Element) -> str:
    state = (e.device or Device()).state
    return f"{e.name} is taken as {state}, but" if state else f"{e.name} is ideal within its swing, but"


def _failure(c: _Condition, bias: State | None, ripples: Sequence[State], crest: float) -> str:
    """The inequality that fails, in words; nothing where it holds."""
    value, bound = (_at(c.read, bias), c.limit + _at(c.follows, bias))
    swing = crest * sum(abs(complex(c.read(s)) - complex(c.follows(s) if c.follows else 0)) for s in ripples)
    margin = c.sign * (value - bound) - (swing if ripples else 0)
    slack = 0 if isinstance(margin, Fraction) or bias is None else _ROUNDING * _largest(bias, c.dimension)
    if margin > slack or (margin >= -slack and not c.strict):
        return ""
    place = "at most" if c.sign < 0 else "above" if c.strict else "no less than"
    told = f"{c.quantity} is {shown(value, c.dimension)}" + (f" ± {shown(swing, c.dimension)}" if ripples else "")
    limit = c.bound or shown(bound, c.dimension)
    if c.bound not in ("", "zero"):
        limit += f", {shown(bound, c.dimension)}"
    return f"{told}; it must be {place} {limit}" + (
        f", and misses that by {shown(-margin, c.dimension)}" if margin else ""
    )


def _at(read: Reader | None, bias: State | None) -> Real:
    return Fraction(0) if read is None or bias is None else real(read(bias))


def _largest(s: State, dimension: Dimension) -> float:
    values = s.currents if dimension == AMPERE else s.potentials
    return max((float(size(x)) for x in values.values()), default=0.0)


# --- the inequalities of each model ---------------------------------------------------------------------------------


def _conditions(e: Element) -> list[_Condition]:
    device = e.device
    if device is None:
        return []
    match e.kind:
        case "transistor":
            return _of_transistor(e, device)
        case "diode":
            return _of_diode(e, device)
        case "op-amp":
            return _of_op_amp(e, device)
    return []


def _of_transistor(e: Element, device: Device) -> list[_Condition]:
    """With the signs of an npn; a pnp's voltages and currents are turned round."""
    turn, at, beta = -1 if device.polarity == "pnp" else 1, dict(e.terminals), device.beta or Fraction(0)

    def base(s: State) -> Value:
        return turn * s.currents[f"{e.name},base"]

    def collector(s: State) -> Value:
        return turn * s.currents[f"{e.name},collector"]

    def voltage(s: State) -> Value:
        return turn * (s.potentials[at["collector"]] - s.potentials[at["emitter"]])

    outwards, v_ce = (" out of it", "V_EC") if turn < 0 else ("", "V_CE")
    off = "It is cut off: take it out, or check what drives it."
    driven = _Condition(f"its base current{outwards}", base, off, AMPERE, bound="zero", strict=True)
    if device.state == "active":
        stated = device.v_ce is not None
        limit = device.v_ce if device.v_ce is not None else V_CE_SATURATION
        needs = "its saturation voltage" if stated else "the saturation voltage of common practice"
        return [
            driven,
            _Condition(f"its {v_ce}", voltage, "It saturates: take it as saturated.", VOLT, 1, limit, needs),
        ]
    return [
        driven,
        _Condition(
            f"its collector current{outwards}", collector, "It is not driven so far: take it as active.", AMPERE, -1,
            bound="beta times its base current", follows=lambda s: beta * base(s),
        ),
        _Condition(
            f"its collector current{outwards}", collector, "Nothing draws current through it: check polarity and supply.",
            AMPERE, bound="zero",
        ),
    ]  # fmt: skip


def _of_diode(e: Element, device: Device) -> list[_Condition]:
    if device.state == "conducting":
        remedy = "Take it as blocking."
        return [_Condition("its forward current", lambda s: s.currents[e.name], remedy, AMPERE, bound="zero")]

    def voltage(s: State) -> Value:
        return s.potentials[e.plus] - s.potentials[e.minus]

    drop, remedy = device.drop or Fraction(0), "Take it as conducting."
    return [_Condition("its forward voltage", voltage, remedy, VOLT, -1, drop, "its drop")]


def _of_op_amp(e: Element, device: Device) -> list[_Condition]:
    out = dict(e.terminals)["out"]
    remedy = "Its output stays at the end of its swing, and no linear answer holds."
    found = []
    for limit, sign, end in ((device.swing_low, 1, "lower"), (device.swing_high, -1, "upper")):
        if limit is not None:
            words = f"the {end} end of its swing"
            found.append(_Condition("its output", lambda s: s.potentials[out], remedy, VOLT, sign, limit, words))
    return found
