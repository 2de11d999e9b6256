"""Slips in the printed digits: the right value, written down wrong."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Real
from calccheck.judge.slips.case import Case, Guess
from calccheck.units import NONE

_TIMES = {3: "a thousand", 6: "a million", 9: "10⁹", 1: "ten", 2: "a hundred"}


def sign(case: Case) -> Iterator[Guess]:
    """The negative of the truth."""
    yield Guess("the reference direction or polarity turned round", -case.truth)


def prefix(case: Case) -> Iterator[Guess]:
    """A prefix one to three steps off."""
    yield from _scaled(case, (3, 6, 9), "a slip of prefix")


def decimal_point(case: Case) -> Iterator[Guess]:
    """The decimal point one or two places off."""
    yield from _scaled(case, (1, 2), "the decimal point misplaced")


def _scaled(case: Case, powers: tuple[int, ...], what: str) -> Iterator[Guess]:
    for power in powers:
        yield Guess(f"{what}, {_TIMES[power]} times too large", case.truth * 10**power)
        yield Guess(f"{what}, {_TIMES[power]} times too small", case.truth / 10**power)


def reciprocal(case: Case) -> Iterator[Guess]:
    """One over the truth, in coherent units or in the unit printed."""
    if case.truth == 0:
        return
    inverse = tuple(-x for x in case.miss.truth.dimension)
    yield Guess("the reciprocal", 1 / case.truth, inverse)
    yield Guess("the reciprocal", 1 / case.truth, case.dimension)
    if case.printed is not None and case.printed.written_in.factor != 1:
        yield Guess("the reciprocal", case.printed.written_in.factor**2 / case.truth)


def factor_two(case: Case) -> Iterator[Guess]:
    """Twice or half the truth."""
    yield Guess("a factor of two too much", 2 * case.truth)
    yield Guess("a factor of two too little", case.truth / 2)


def percent(case: Case) -> Iterator[Guess]:
    """A fraction printed as percent or the other way round."""
    if case.miss.truth.dimension == NONE:
        yield Guess("a percentage written as a fraction", case.truth * 100)
        yield Guess("a fraction written as a percentage", case.truth / 100)


# --- digit by digit -------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Right:
    """The truth as it should be printed: its digits without the point, leading zeros kept, and how many stand behind it."""

    digits: str
    places: int
    first: int  # index of the first digit that counts
    unit: Fraction  # SI; negative for a negative truth

    def value(self, digits: str, places: int) -> Real:
        """The value (SI) that other digits mean."""
        return int(digits) / Fraction(10) ** places * self.unit

    def text(self) -> str:
        """With the point, for the sentence."""
        at = len(self.digits) - self.places
        return f"{self.digits[:at]}.{self.digits[at:]}" if self.places > 0 else self.digits + "0" * -self.places


def _right(case: Case, shift: int = 0) -> list[_Right]:
    """The truth rounded to as many places as were printed, and ``shift`` more; nothing where it has no digits there."""
    p = case.printed
    if p is None or p.amount.point or p.amount.dimension != case.miss.truth.dimension or case.truth == 0:
        return []
    places = shift - int(p.digits.as_tuple().exponent)
    unit = p.written_in.factor * (1 if case.truth > 0 else -1)
    whole = int(Fraction(case.truth) / unit * Fraction(10) ** places + Fraction(1, 2))
    digits = str(whole).zfill(max(places, 0) + 1)
    return [_Right(digits, places, len(digits) - len(digits.lstrip("0")), unit)] if whole else []


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
