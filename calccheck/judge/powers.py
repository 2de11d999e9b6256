"""Powers and rms values from phasors, by the sheet's convention of rms or peak phasors, over one frequency or several."""

from __future__ import annotations

import math
from collections.abc import Mapping
from fractions import Fraction

from calccheck.arithmetic import Value, size, trimmed
from calccheck.model import Settings


def share(frequency: Fraction, settings: Settings) -> float:
    """What makes a mean square of a phasor's square: one for rms phasors and for DC, a half for peak ones."""
    return 0.5 if settings.phasors == "peak" and frequency != 0 else 1.0


def power(letter: str, each: Mapping[Fraction, tuple[Value, Value]], settings: Settings) -> Value:
    """Average power P, complex power S or reactive power Q from voltage and current at each frequency (IEC 60375)."""
    total: Value = 0
    for f, (v, i) in each.items():
        total += v * i if f == 0 else share(f, settings) * complex(v) * complex(i).conjugate()
    if letter == "S":
        return trimmed(total)
    return total.imag if letter == "Q" else trimmed(total.real)


def rms(each: Mapping[Fraction, Value], settings: Settings) -> float:
    """The root of the sum of the squares, DC among them."""
    return math.sqrt(sum(share(f, settings) * float(size(x)) ** 2 for f, x in each.items()))
