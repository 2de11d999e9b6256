"""To which frequency a source belongs that is written as a phasor without one."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction

from calccheck.model import UNSTATED, Element, Finding
from calccheck.read.names import listed
from calccheck.rules import RULES


def with_frequencies(elements: Sequence[Element], hertz: Fraction) -> tuple[list[Element], list[Finding]]:
    """The parts with a frequency for every phasor. ``hertz``: the sheet's one AC frequency, 0 where it states none.

    Without that it is the one frequency of the circuit's other sources. Where none is known, it stays ``UNSTATED``, which is an
    error where a capacitor or an inductor stands.
    """
    unmarked = [e for e in elements if e.frequency == UNSTATED]
    explicit = sorted({e.frequency for e in elements if e.frequency is not None and e.frequency != UNSTATED})
    if not unmarked:
        return list(elements), []
    frequency = hertz or (explicit[0] if len(explicit) == 1 else UNSTATED)
    if frequency != UNSTATED:
        return [replace(e, frequency=frequency) if e.frequency == UNSTATED else e for e in elements], []
    fault = _fault(unmarked, explicit, elements)
    if not fault:
        return list(elements), []
    return list(elements), [
        Finding(
            "circuit-line",
            RULES["circuit-line"].severity,
            f"{listed([e.name for e in unmarked])} {fault}",
            unmarked[0].span,
        )
    ]


def _fault(unmarked: Sequence[Element], explicit: Sequence[Fraction], elements: Sequence[Element]) -> str:
    """Why a frequency must be stated; empty where none is needed."""
    have = "has no frequency" if len(unmarked) == 1 else "have no frequency"
    if explicit:
        known = ", ".join(f"{float(f):g} Hz" for f in explicit)
        return f"{have}, and this circuit has several ({known}); write it behind the nodes: {float(explicit[0]):g} Hz"
    reactive = [e.name for e in elements if e.kind in ("capacitor", "inductor")]
    if not reactive:
        return ""
    where = "state frequency: in the sheet's check: settings, or write it behind the nodes, as in 50 Hz"
    return f"{have}, on which {reactive[0]} depends; {where}"
