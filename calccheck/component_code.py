"""Value codes of resistors and capacitors: a letter stands at the decimal point and tells the multiple (IEC 60062:2016).

Below the stages, because both a part's value and ``with RL as 4k7`` are written so.
"""

from __future__ import annotations

import re
from fractions import Fraction

from calccheck.units import FARAD, LOOKALIKES, OHM, Dimension

# Letters of IEC 60062, from memory; k beside K and u beside µ are common practice.
_LETTERS: dict[str, tuple[int, Dimension]] = {
    "R": (0, OHM), "K": (3, OHM), "k": (3, OHM), "M": (6, OHM), "G": (9, OHM), "T": (12, OHM),
    "p": (-12, FARAD), "n": (-9, FARAD), "µ": (-6, FARAD), "u": (-6, FARAD),
    "m": (-3, FARAD), "F": (0, FARAD),
}  # fmt: skip
_CODE = re.compile(rf"([0-9]{{0,4}})([{''.join(_LETTERS)}])([0-9]{{0,4}})")


def component_code(text: str) -> tuple[Fraction, Dimension] | None:
    """``4k7`` is 4700 in ohms, ``R47`` 0.47 in ohms, ``4n7`` 4.7e-9 in farads; ``None`` for anything that is no such code."""
    m = _CODE.fullmatch(text.translate(LOOKALIKES))
    if m is None or not (m[1] or m[3]):
        return None
    power, dimension = _LETTERS[m[2]]
    return Fraction(int(m[1] + m[3]), 10 ** len(m[3])) * Fraction(10) ** power, dimension
