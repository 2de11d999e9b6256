"""Sheets with free symbols, judged as sheets in numbers: each symbol takes random values, and what holds must hold at all of them.

Two rational functions that agree at random points of a large set are the same but for a chance far below any other error here
(Schwartz, 1980; Zippel, 1979); the points are drawn from the symbols' names, so that the same sheet gives the same report.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from fractions import Fraction

from calccheck.arithmetic import Amount, Doubt, evaluate, real
from calccheck.formula import Reference
from calccheck.judge.rounding import equal
from calccheck.model import Circuit, Element, Judged, Step
from calccheck.units import SIEMENS

POINTS = 5
_SPREAD = 9973  # a prime: the values lie between 1/2 and 4, at rationals that no engineer writes

Point = Mapping[str, Amount]


def points(circuits: Sequence[Circuit]) -> tuple[Point, ...]:
    """The values at which a sheet is judged: one empty point where no circuit has a symbol."""
    symbols = dict(s for c in circuits for s in c.symbols)
    if not symbols:
        return ({},)
    return tuple({name: Amount(_drawn(name, k), d) for name, d in symbols.items()} for k in range(POINTS))


def _drawn(name: str, k: int) -> Fraction:
    from hashlib import sha256  # late: most circuits have no free symbols

    number = int.from_bytes(sha256(f"{name} {k}".encode()).digest()[:8], "big")
    return Fraction(1, 2) + Fraction(number % (7 * _SPREAD), 2 * _SPREAD)


def instance(circuit: Circuit, point: Point) -> Circuit:
    """The circuit with numbers in place of its symbols."""
    if not circuit.symbols:
        return circuit
    return replace(circuit, elements=tuple(_valued(e, point) for e in circuit.elements))


def _valued(e: Element, point: Point) -> Element:
    if e.formula is None:
        return e

    def lookup(ref: Reference) -> Amount:
        return point[ref.word]

    try:
        stated = evaluate(e.formula, lookup)
    except Doubt:  # a root or a logarithm of what is negative here: left without a value, which its solution says
        return e
    if isinstance(stated.value, complex):
        return replace(e, phasor=stated.value, stated=stated)
    if e.phasor is not None or e.frequency is not None:
        return replace(e, phasor=complex(stated.value), stated=stated)
    value = Fraction(real(stated.value))
    return replace(e, value=1 / value if stated.dimension == SIEMENS and e.control is None else value, stated=stated)


def combined(claims: Sequence[Judged], depending: Callable[[Judged], Sequence[str]]) -> Judged:
    """One verdict from those at each point; ``depending`` tells the symbols that a claim's truth depends on.

    A formula that fails at any point differs. A printed number is judged where its truth is the same at every point, that is
    where the symbols cancel; where they do not, it is unchecked.
    """
    first = claims[0]
    if len(claims) == 1:
        return first
    truths = [j.computed for j in claims]
    varies = any(t is not None and truths[0] is not None and not equal(t.value, truths[0].value) for t in truths)
    worst = max(
        claims, key=lambda j: ("agrees", "given", "rounded", "accepted", "unchecked", "differs").index(j.verdict)
    )
    if not varies:
        return worst
    number = next((s for s in first.steps if _prints_a_number(s, first)), None)
    if number is not None:
        held = depending(first)
        symbols = f"the free symbol{'s' if len(held) > 1 else ''} {', '.join(held)}"
        message = f"{first.quantity} depends on {symbols}: no number can be held against it"
        return replace(first, verdict="unchecked", message=message, computed=None, deviation=None, steps=())
    if worst.verdict != "differs":
        return replace(worst, computed=None, deviation=None)
    failing = next(s for s in worst.steps if s.verdict == "differs")
    message = (
        failing.message
        if failing.amount is None
        else f"{failing.text} is not {worst.quantity} for all values of the symbols"
    )
    return replace(worst, computed=None, deviation=None, message=message, cautions=first.cautions)


def _prints_a_number(step: Step, j: Judged) -> bool:
    return j.claimed is not None and step.amount is not None and step.amount.value == j.claimed.value
