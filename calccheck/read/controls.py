"""Controlled sources: proportional to one voltage or current of the circuit, whatever that is."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction

from calccheck.arithmetic import DimensionFault, Doubt, size
from calccheck.read.symbols import Written, amount_of
from calccheck.units import Dimension

_PROBES = (Fraction(0), Fraction(2), Fraction(-1), Fraction(7, 3))  # beside 1, where the gain is taken
_SLACK = 1e-9  # for gains behind roots and functions, which are floats


def check_proportional(written: Written, symbols: Mapping[str, Dimension]) -> None:
    """Raises ``Doubt`` where the factor between a source and what steers it is not the same for every value of the latter."""
    gain = amount_of(written, symbols).value
    for x in _PROBES:
        try:
            off = size(amount_of(written, symbols, x).value - x * gain)
        except (Doubt, DimensionFault):
            off = size(gain) + 1
        if off > _SLACK * size(gain):
            raise Doubt(f"{written.what.text} is not proportional to the quantity that steers it", written.what.span())
