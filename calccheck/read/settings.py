"""Settings: of a sheet under ``check:`` in its front matter, of a repository under ``[tool.calccheck]``."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from dataclasses import replace
from fractions import Fraction
from typing import Any

from calccheck.model import Settings
from calccheck.units import LOOKALIKES

_FRACTION = re.compile(r"(\d{1,9}(?:\.\d{1,12})?|\.\d{1,12})\s*(%?)")
_FREQUENCY = re.compile(r"(\d+(?:\.\d+)?)\s*([mkMG]?Hz)")
_CELSIUS = r"([-+]?\d{1,4}(?:\.\d{1,3})?)"
_TEMPERATURES = re.compile(rf"{_CELSIUS}\s*(?:°C)?\s*(?:to|…|\.\.\.)\s*{_CELSIUS}\s*°C")
FEWEST, MOST = 1000, 1_000_000  # random samples
SERIES = ("E3", "E6", "E12", "E24", "E48", "E96", "E192")  # IEC 60063


class SettingFault(ValueError):
    """A setting that is unknown or has no such value: which, what was expected."""


def with_setting(settings: Settings, key: str, value: str) -> Settings:
    """The settings with one of them set from text: ``carry``, ``0.5 %``. Raises ``SettingFault``."""
    read = _READERS.get(key)
    if read is None:
        from difflib import get_close_matches  # late: only for a setting that is unknown

        near = get_close_matches(key, list(_READERS), 1)
        hint = f"is {near[0]} meant?" if near else f"known are {', '.join(_READERS)}"
        raise SettingFault(f"there is no setting {key}; {hint}")
    changed: dict[str, Any] = {key: read(key, value.strip())}
    return replace(settings, **changed)


def read_repo_settings(table: Mapping[str, object]) -> Settings:
    """The table ``[tool.calccheck]`` of a ``pyproject.toml``. Raises ``SettingFault``."""
    settings = Settings()
    for key, value in table.items():
        if isinstance(value, bool) or not isinstance(value, str | int | float):
            raise SettingFault(f"{key} is a number or a text, not {value!r}")
        settings = with_setting(settings, key, str(value))
    return settings


def _share(key: str, text: str) -> Fraction:
    """A fraction of one, ``0.005`` or ``0.5 %``, below one."""
    m = _FRACTION.fullmatch(text)
    value = Fraction(m[1]) / (100 if m[2] else 1) if m else None
    if value is None or value >= 1:
        raise SettingFault(f"{key} is a percentage such as 0.5 %, below 100 %, not {text}")
    return value


def _derating(key: str, text: str) -> Fraction:
    m = _FRACTION.fullmatch(text)
    value = Fraction(m[1]) / (100 if m[2] else 1) if m else Fraction(0)
    if not 0 < value <= 1:
        raise SettingFault(f"{key} is a fraction of every rating such as 0.8, above 0 and up to 1, not {text}")
    return value


def _phasors(key: str, text: str) -> str:
    if text not in ("rms", "peak"):
        raise SettingFault(f"{key} is rms or peak, not {text}")
    return text


def _series(key: str, text: str) -> str:
    if text not in ("none", *SERIES):
        raise SettingFault(f"{key} is none or a series of IEC 60063 ({', '.join(SERIES)}), not {text}")
    return "" if text == "none" else text


def _frequency(key: str, text: str) -> str:
    m = _FREQUENCY.fullmatch(text.translate(LOOKALIKES))
    if m is None or not Fraction(m[1]):
        raise SettingFault(f"{key} is a frequency such as 50 Hz, not {text}")
    return f"{m[1]} {m[2]}"


def _temperature(key: str, text: str) -> tuple[Fraction, Fraction]:
    m = _TEMPERATURES.fullmatch(text.translate(LOOKALIKES))
    if m is None or Fraction(m[1]) >= Fraction(m[2]):
        raise SettingFault(f"{key} is a range such as −20 °C to 60 °C, the lower first, not {text}")
    return Fraction(m[1]), Fraction(m[2])


def _spread(key: str, text: str) -> str:
    if text not in ("uniform", "normal"):
        raise SettingFault(f"{key} is uniform or normal, not {text}")
    return text


def _samples(key: str, text: str) -> int:
    digits = re.sub(r"[ \u00a0\u2009\u202f]", "", text)
    if not digits.isascii() or not digits.isdigit() or not FEWEST <= int(digits[:12]) <= MOST:
        raise SettingFault(f"{key} is a whole number from {FEWEST} to {MOST}, not {text}")
    return int(digits)


def _seed(key: str, text: str) -> int:
    if not re.fullmatch(r"[0-9]{1,9}", text):
        raise SettingFault(f"{key} is a whole number of up to nine digits, not {text}")
    return int(text)


_READERS: dict[str, Callable[[str, str], object]] = {
    "carry": _share,
    "approx": _share,
    "phasors": _phasors,
    "derate": _derating,
    "preferred": _series,
    "frequency": _frequency,
    "temperature": _temperature,
    "spread": _spread,
    "samples": _samples,
    "seed": _seed,
}
