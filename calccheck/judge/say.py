"""The sentences of verdicts, in the trade's words, with values as engineers print them."""

from __future__ import annotations

from fractions import Fraction
from typing import TYPE_CHECKING

from calccheck.arithmetic import Amount, Real, real, size
from calccheck.judge.phasors import PrintedPhasor, is_angle, nearest_turn
from calccheck.judge.rounding import Printed
from calccheck.printing import shown
from calccheck.units import PLAIN, Unit, digits, printed, words

if TYPE_CHECKING:  # loaded late: few sheets state tolerances
    from calccheck.judge.spreads import Found


def near(a: Amount, p: Printed | PrintedPhasor) -> str:
    """The truth to two places more than the printed value shows, in its unit and its form."""
    if isinstance(p, PrintedPhasor) and not p.polar and isinstance(a.value, complex):
        return rectangular(a, p.written_in, max(4, p.figures + 2))
    if (
        isinstance(p, Printed)
        and is_angle(p)
        and a.dimension == p.amount.dimension
        and not isinstance(a.value, complex)
    ):
        a = Amount(nearest_turn(a.value, p.value))
    return shown(a, p.written_in if _readable(a, p) else PLAIN, max(4, p.figures + 2))


def rectangular(a: Amount, like: Unit, figures: int) -> str:
    """A phasor by its real and imaginary part: ``(2.4 − j2.1) V``."""
    value = complex(a.value)
    re, im = (printed(abs(x), a.dimension, figures, like) for x in (value.real, value.imag))
    number, _, unit = re.partition(" ")
    sign, lead = "−" if value.imag < 0 else "+", "−" if value.real < 0 else ""
    return f"({lead}{number} {sign} j{im.partition(' ')[0]}) {unit}".strip()


def _readable(a: Amount, p: Printed | PrintedPhasor) -> bool:
    """Whether the printed unit suits the truth; a miss of a thousand reads better in the truth's own handy unit."""
    return a.value == 0 or Fraction(1, 1000) < size(a.value) / abs(p.written_in.factor) < 100_000


def percent(x: float) -> str:
    """A deviation: ``+11.1 %``, ``−0.17 %``, or a factor where it is large."""
    if abs(x) >= 10:
        return f"a factor of {digits(abs(x + 1), 3)}"
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
    return f"{label} is {shown(q)}: a limit on the other side of zero says nothing of it; bound {better} instead"


def worst_margin(
    label: str, nominal: Amount, worst: Amount, limit: Amount, room: Real, holds: bool, found: Found
) -> str:
    """A bound with its margin at the worst within tolerances. ``limit``: at nominal values."""
    share = (
        f" ({float(size(room / real(limit.value))) * 100:.3g} % of the limit)"
        if limit.value and not limit.point
        else ""
    )
    apart = shown(Amount(size(room), limit.dimension), figures=4)
    if holds:
        return f"{label} is {shown(nominal)}, at worst {shown(worst)} ({found.where}), {apart}{share} inside its limit; {found.how}"
    return (
        f"{label} is {shown(nominal)} and holds at nominal values only: {found.where} it is {shown(worst)} and passes the limit "
        f"of {shown(limit)} by {apart}{share}"
    )


def margin(label: str, q: Amount, limit: Amount, room: Real, holds: bool, unit: Unit = PLAIN) -> str:
    """A bound with its margin, in a handy unit or in this one."""
    share = (
        f" ({float(size(room / real(limit.value))) * 100:.3g} % of the limit)"
        if limit.value and not limit.point
        else ""
    )
    apart = shown(Amount(size(room), q.dimension), unit, 4)
    if holds:
        return f"{label} is {shown(q, unit)}, {apart}{share} inside its limit"
    if room == 0:
        return f"{label} is {shown(q, unit)}, which is the limit itself: not below or above it"
    return f"{label} is {shown(q, unit)} and passes the limit of {shown(limit, unit)} by {apart}{share}"
