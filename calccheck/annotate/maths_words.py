r"""Dollar maths in plain characters, for places that set no formulas: ``0.30\,\mathrm{mA}`` is ``0.30 mA``."""

from __future__ import annotations

import re

_GAPS = re.compile(r"\\[,;:! ]|~|\\(?:left|right|quad|qquad)(?![A-Za-z])")
_WORDS = re.compile(r"\\(?:mathrm|text|textrm|operatorname)\{([^{}]*)\}")
_FRACTION = re.compile(r"\\[dtc]?frac\{([^{}]*)\}\{([^{}]*)\}")
_DEGREES = re.compile(r"\^\{?\\circ\}?")
_COMMAND = re.compile(r"\\([A-Za-z]+|%)")
_SIGNS = {
    "Omega": "Ω", "mu": "µ", "angle": "∠", "cdot": "·", "times": "×", "pm": "±", "parallel": "∥", "approx": "≈",
    "le": "≤", "leq": "≤", "ge": "≥", "geq": "≥", "sqrt": "√", "%": "%",
}  # fmt: skip


def plain(text: str) -> str:
    """The text without markup of maths; text that has none stays as it is."""
    if "\\" not in text:
        return text
    text = _DEGREES.sub("°", _WORDS.sub(r"\1", _GAPS.sub(" ", text)))
    while (inner := _FRACTION.sub(r"(\1) / (\2)", text)) != text:
        text = inner
    return " ".join(_COMMAND.sub(lambda m: _SIGNS.get(m[1], m[1]), text).split())
