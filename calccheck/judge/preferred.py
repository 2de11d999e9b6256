"""Resistances held against a series of preferred values, where the sheet names one (IEC 60063)."""

from __future__ import annotations

from calccheck.arithmetic import Amount
from calccheck.model import Finding, Reading
from calccheck.preferred_values import between
from calccheck.printing import shown
from calccheck.rules import RULES
from calccheck.units import OHM


def preferred_findings(reading: Reading) -> list[Finding]:
    """A caution for every resistance that is stated as a plain value and is none of the series."""
    series = reading.settings.preferred
    found = []
    for e in (e for c in reading.circuits for e in c.elements if series):
        if e.kind != "resistor" or e.stated is None or e.stated.dimension != OHM or e.worked is not None:
            continue
        if e.value is None or e.value <= 0 or any(sign in e.written for sign in "*×·/÷∥()^√"):
            continue
        beside = between(e.value, series)
        if beside is not None:
            low, high = (shown(Amount(x, OHM)) for x in beside)
            message = f"{e.name}: {e.written} is no value of {series} (IEC 60063); its neighbours are {low} and {high}"
            found.append(Finding("preferred", RULES["preferred"].severity, message, e.span))
    return found
