"""The sentences of verdicts, in the trade's words, with values as engineers print them."""

from __future__ import annotations

from calccheck.arithmetic import Amount, Real, size
from calccheck.judge.rounding import Printed
from calccheck.units import PLAIN, Unit, printed, words

_ICE = 273.15


def value(a: Amount, like: Unit = PLAIN, figures: int = 6) -> str:
    """An amount as printed: in the unit ``like`` where that fits."""
    if a.point:
        return f"{float(a.value) - _ICE:.{figures}g} °C".replace("-", "−")
    return printed(a.value, a.dimension, figures, like)


def near(a: Amount, p: Printed) -> str:
    """The truth to two places more than the printed value shows, in its unit."""
    return value(a, p.written_in, max(4, p.figures + 2))


def percent(x: float) -> str:
    """A deviation: ``+11.1 %``, ``−0.17 %``, or a factor where it is large."""
    if abs(x) >= 10:
        return f"a factor of {abs(x + 1):.3g}"
    return f"{x * 100:+.3g} %".replace("-", "−")


def reason(text: str, suggestion: str = "") -> str:
    """Why something is unchecked, with the text to copy."""
    if not suggestion or suggestion in text:
        return text
    return f"{text}; write: {suggestion}"


def unlike(a: Amount, b: Amount) -> str:
    """Two amounts of different dimension."""
    return f"this is {words(b.dimension)}, what it is held against is {words(a.dimension)}"


def says_nothing(label: str, q: Amount, side: str) -> str:
    """A bound on the other side of zero than its quantity."""
    better = f"|{label}|" if label[:1] in "VI" else f"−{label}"
    return f"{label} is {value(q)}: a limit on the other side of zero says nothing of it; bound {better} instead"


def margin(label: str, q: Amount, limit: Amount, room: Real, holds: bool) -> str:
    """A bound with its margin."""
    share = f" ({abs(float(room / limit.value)) * 100:.3g} % of the limit)" if limit.value else ""
    apart = value(Amount(size(room), q.dimension), figures=4)
    if holds:
        return f"{label} is {value(q)}, {apart}{share} inside its limit"
    if room == 0:
        return f"{label} is {value(q)}, which is the limit itself: not below or above it"
    return f"{label} is {value(q)} and passes the limit of {value(limit)} by {apart}{share}"
