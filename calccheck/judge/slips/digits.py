"""Slips in the printed digits: the right value, written down wrong."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Value
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.figures import Figure
from calccheck.units import NONE

_TIMES = {3: "a thousand", 6: "a million", 9: "10⁹", 1: "ten", 2: "a hundred"}


def sign(case: Case) -> Iterator[Guess]:
    """The negative of the truth; of an angle half a turn, of a phasor by its parts the real one alone too.

    Of a reactive power or an imaginary part that is another slip: the conjugate.
    """
    what = "the reference direction or polarity turned round"
    if case.which == "im" or (case.key is not None and case.key.letter == "Q"):
        return
    if case.which == "arg":
        yield Guess(what, case.truth + math.pi)
        return
    yield Guess(what, -case.truth)
    for f in case.figures:
        if f.which == "re":
            yield Guess("the sign of the real part turned", f.whole(-f.right))


def prefix(case: Case) -> Iterator[Guess]:
    """A prefix one to three steps off."""
    for power in (3, 6, 9):
        yield Guess(f"a slip of prefix, {_TIMES[power]} times too large", case.truth * 10**power)
        yield Guess(f"a slip of prefix, {_TIMES[power]} times too small", case.truth / 10**power)


def decimal_point(case: Case) -> Iterator[Guess]:
    """The decimal point of a figure one or two places off."""
    for f in case.figures or (None,):
        for power in (1, 2):
            for factor, how in ((Fraction(10) ** power, "large"), (Fraction(1, 10**power), "small")):
                what = f"the decimal point misplaced{_in(f)}, {_TIMES[power]} times too {how}"
                yield Guess(what, case.truth * factor if f is None else f.whole(f.right * factor))


_PLACES = {
    "mag": " in the magnitude",
    "arg": " in the angle",
    "re": " in the real part",
    "im": " in the imaginary part",
}


def _in(f: Figure | None) -> str:
    return _PLACES.get(f.which, "") if f is not None else ""


def reciprocal(case: Case) -> Iterator[Guess]:
    """One over the truth, in coherent units or in the unit printed."""
    if case.truth == 0 or case.which == "arg":
        return
    inverse = tuple(-x for x in case.miss.truth.dimension)
    yield Guess("the reciprocal", 1 / case.truth, inverse)
    yield Guess("the reciprocal", 1 / case.truth, case.dimension)
    if case.written_in.factor != 1:
        yield Guess("the reciprocal", case.written_in.factor**2 / case.truth)


def factor_two(case: Case) -> Iterator[Guess]:
    """Twice or half the truth; in decibels that is another slip."""
    if not case.level:
        yield Guess("a factor of two too much", 2 * case.truth)
        yield Guess("a factor of two too little", case.truth / 2)


def log_ten_twenty(case: Case) -> Iterator[Guess]:
    """Twice or half the decibels: 10 log for voltages and currents, 20 log for powers."""
    if case.level:
        yield Guess("20 log taken where 10 log belongs (powers)", 2 * case.truth)
        yield Guess("10 log taken where 20 log belongs (voltages and currents)", case.truth / 2)


def percent(case: Case) -> Iterator[Guess]:
    """A fraction printed as percent or the other way round."""
    if case.miss.truth.dimension == NONE and not case.level and case.which != "arg":
        yield Guess("a percentage written as a fraction", case.truth * 100)
        yield Guess("a fraction written as a percentage", case.truth / 100)


# --- digit by digit -------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Right:
    """A figure as it should be printed: its digits without the point, leading zeros kept, and how many stand behind it."""

    figure: Figure
    digits: str
    places: int
    first: int  # index of the first digit that counts
    unit: Fraction  # SI; negative for a negative value

    def value(self, digits: str, places: int) -> Value:
        """The value (SI) that other digits in this figure mean."""
        return self.figure.whole(int(digits) / Fraction(10) ** places * self.unit)

    def text(self) -> str:
        """With the point, for the sentence."""
        at = len(self.digits) - self.places
        shown = f"{self.digits[:at]}.{self.digits[at:]}" if self.places > 0 else self.digits + "0" * -self.places
        return shown + ("°" if self.figure.printed.written_in.text == "°" and self.figure.which == "arg" else "")


def _right(case: Case, shift: int = 0) -> Iterator[_Right]:
    """The wrong figures as they should be, to as many places as were printed and ``shift`` more; none without digits left."""
    for f in case.wrong:
        p = f.printed
        if p.amount.point or case.dimension != case.miss.truth.dimension or f.right == 0:
            continue
        places = shift - int(p.digits.as_tuple().exponent)
        unit = p.written_in.factor * (1 if f.right > 0 else -1)
        whole = int(Fraction(f.right) / unit * Fraction(10) ** places + Fraction(1, 2))
        digits = str(whole).zfill(max(places, 0) + 1)
        if whole:
            yield _Right(f, digits, places, len(digits) - len(digits.lstrip("0")), unit)


def digits_swapped(case: Case) -> Iterator[Guess]:
    """Two neighbouring digits of the right value exchanged."""
    for r in _right(case):
        for k in range(r.first, len(r.digits) - 1):
            a, b = r.digits[k], r.digits[k + 1]
            if a != b:
                value = r.value(r.digits[:k] + b + a + r.digits[k + 2 :], r.places)
                yield Guess(f"the digits {a} and {b} of {r.text()} exchanged", value)


def digit_slip(case: Case) -> Iterator[Guess]:
    """One digit of the right value wrong, dropped or doubled."""
    yield from _digit_wrong(case)
    yield from _digit_dropped_or_doubled(case)


def _digit_wrong(case: Case) -> Iterator[Guess]:
    for r in _right(case):
        for k in range(r.first, len(r.digits)):
            for b in "0123456789"[k == r.first :]:
                if b != r.digits[k]:
                    value = r.value(r.digits[:k] + b + r.digits[k + 1 :], r.places)
                    yield Guess(f"one digit of {r.text()} wrong", value)


def _digit_dropped_or_doubled(case: Case) -> Iterator[Guess]:
    for shift in (-1, 0, 1):
        for r in _right(case, shift):
            for k in range(r.first, len(r.digits)):
                behind = k >= len(r.digits) - r.places
                if r.places - behind == r.places - shift:
                    value = r.value(r.digits[:k] + r.digits[k + 1 :] or "0", r.places - behind)
                    yield Guess(f"a digit of {r.text()} dropped", value)
                if r.places + behind == r.places - shift:
                    value = r.value(r.digits[:k] + r.digits[k] + r.digits[k:], r.places + behind)
                    yield Guess(f"a digit of {r.text()} doubled", value)
