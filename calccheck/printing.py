"""Amounts the way engineers print them."""

from __future__ import annotations

import cmath
import math

from calccheck.arithmetic import Amount
from calccheck.units import PLAIN, Unit, digits, printed

_ICE = 273.15


def shown(a: Amount, like: Unit | str = PLAIN, figures: int = 6) -> str:
    """An amount with its unit, in the unit ``like`` where that fits; a phasor by magnitude and angle, a temperature in °C."""
    if isinstance(a.value, complex):
        angle = digits(math.degrees(cmath.phase(a.value)), min(figures, 5)).replace("-", "−")
        return f"{printed(abs(a.value), a.dimension, figures, like)} ∠ {angle}°"
    if a.point:
        return f"{float(a.value) - _ICE:.{figures}g} °C".replace("-", "−")
    if a.level:
        return f"{digits(a.value, figures)} dB".replace("-", "−")
    return printed(a.value, a.dimension, figures, like)
