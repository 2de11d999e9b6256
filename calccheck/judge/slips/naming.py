"""The slips that fit a wrong value, likeliest first.

A slip is the likelier, the commoner it is and the fewer values of its kind were tried: one that could have given any of fifty
numbers met this one by chance fifty times as easily as one that could only have given this. What is hardly likelier than chance
is not named.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from calccheck.arithmetic import Value
from calccheck.judge.miss import Miss
from calccheck.judge.slips.again import Again
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.case_of import case_of
from calccheck.judge.slips.redo import Needed, Redo
from calccheck.judge.slips.table import SLIPS, SlipKind
from calccheck.judge.slips.working import right_substitution
from calccheck.model import Slip

UNDECIDED = 3  # kinds that may fit before the number decides nothing
_ALIKE = 3  # fits of one kind that a sentence names
_ODDS = 8  # how many times likelier than chance a slip must be to be named; tests/bench/slips.py shows what that costs
_MOST_WORK = 5e8  # some 0.1 s: a circuit of 20 nodes has all its variants tried, one of 100 the kinds that have few
_WORKING_RIGHT = 0.02  # how much rarer a slip with the circuit is, where the working before the value is right


@dataclass(frozen=True, slots=True)
class _Fit:
    """A kind of slip that fits: the guesses that do with their values, and how likely it is."""

    kind: SlipKind
    guesses: tuple[tuple[Guess, Value | None], ...]
    score: float


def name_slips(miss: Miss, redo: Redo) -> tuple[tuple[Slip, ...], bool]:
    """The slips that explain the first value of a chain that differs, likeliest first; and whether they are too many to decide.

    A slip that the working itself shows decides, whatever else would give the number.
    """
    case = case_of(miss, redo)
    if case is None:
        return (), False
    figures = sum(f.count for f in case.wrong) if case.figures else 99
    tried = [(kind, guess) for kind in SLIPS if figures >= kind.figures for guess in kind.find(case)]
    again = Again(case)
    needs: dict[str, list[Needed]] = defaultdict(list)
    for kind, guess in tried:
        needs[kind.key] += again.to_solve(guess)
    redo.solve(_affordable(needs, redo))
    by_kind: dict[str, list[tuple[Guess, Value | None]]] = defaultdict(list)
    for kind, guess in tried:
        by_kind[kind.key].append((guess, again.value(guess)))
    fits = [fit for kind in SLIPS if (fit := _fitting(kind, by_kind[kind.key], case)) is not None]
    fits.sort(key=lambda f: -f.score)
    slips = tuple(Slip(f.kind.key, _sentence(f, case)) for f in fits)
    return slips, len(slips) > UNDECIDED and not any(guess.certain for guess, _ in fits[0].guesses)


def _affordable(needs: Mapping[str, Sequence[Needed]], redo: Redo) -> list[Needed]:
    """The circuits of as many kinds as may be solved for one claim, kinds with few first: a large circuit has thousands."""
    chosen: list[Needed] = []
    for circuits in sorted(needs.values(), key=len):
        if redo.work([*chosen, *circuits]) <= _MOST_WORK:
            chosen += circuits
    return chosen


def _fitting(kind: SlipKind, tried: Sequence[tuple[Guess, Value | None]], case: Case) -> _Fit | None:
    """How a kind of slip fits, if it does."""
    met: dict[str, tuple[Guess, Value | None, float]] = {}
    for guess, value in tried:
        how = 1.0 if guess.certain else _how(guess, value, case)
        if how:
            met.setdefault(guess.what, (guess, value, how))
    if not met:
        return None
    best = max(how for *_, how in met.values())
    others = max(_distinct(tried, case), *(guess.tried for guess, *_ in met.values()))
    score = kind.common * best / others
    if kind.of in ("sources", "circuit") and right_substitution(case) is not None:
        score *= _WORKING_RIGHT
    if score < _ODDS * case.chance and not any(guess.certain for guess, *_ in met.values()):
        return None
    return _Fit(kind, tuple((g, v) for g, v, how in met.values() if how == best), score)


def _how(guess: Guess, value: Value | None, case: Case) -> float:
    dimension = guess.dimension if guess.dimension is not None else case.miss.truth.dimension
    if value is None or dimension != case.dimension:
        return 0.0
    return case.fits(value)


def _distinct(tried: Sequence[tuple[Guess, Value | None]], case: Case) -> int:
    """How many numbers of as many digits, other than the right one, the kind could have given."""
    cells = {case.cell(v) for _, v in tried if v is not None}
    return max(1, len(cells - {case.cell(case.truth)}))


def _sentence(fit: _Fit, case: Case) -> str:
    whats = [guess.what for guess, _ in fit.guesses]
    told = " or ".join(whats[:_ALIKE]) + (f" or {len(whats) - _ALIKE} more alike" if len(whats) > _ALIKE else "")
    guess, value = fit.guesses[0]
    if guess.certain or value is None or case.ledger.symbols:  # a symbol's value is none that anybody wrote
        return f"consistent with {told}"
    return f"consistent with {told}: {case.say(value)}"
