"""By how much each value moves a quantity: by one percent of itself, and over its tolerance."""

from __future__ import annotations

from fractions import Fraction

from calccheck.arithmetic import Amount, Doubt
from calccheck.formula import Call, Reference
from calccheck.judge.closing import Closing
from calccheck.judge.scope import Key, Ledger
from calccheck.judge.spreads import value_at
from calccheck.judge.varied import Values
from calccheck.model import Sensitivity
from calccheck.source import Span
from calccheck.units import Dimension


def sensitivities(
    key: Key, frequency: Fraction, dimension: Dimension, ledger: Ledger, span: Span
) -> tuple[Sensitivity, ...]:
    """Of a voltage, current or resistance (a phasor's magnitude), what moves it most over its tolerance first, then by 1 %.

    Values that do not move it are left out; nothing where tolerances cannot be worked.
    """
    if ledger.tolerances is None:
        return ()
    closing = Closing(ledger, _no_names, Values(ledger, every=True))
    try:
        node = closing.reading(key, frequency, span)
        formula = closing.formula(Call("abs", (node,), span) if frequency else node)
        work = ledger.tolerances()
        slopes, ends = work.slopes(formula), work.at_ends(formula)
        nominal = float(value_at(formula, closing, {v.key: v.nominal for v in formula.varied}, ledger, span).real)
    except Doubt:
        return ()
    found = []
    for v in formula.varied:
        by_percent = slopes[v.key] * float(v.nominal) / 100
        low, high = (x - nominal if v.low < v.high else 0.0 for x in ends[v.key])
        found.append(Sensitivity(v.label, *(Amount(x, dimension) for x in (by_percent, low, high))))
    found.sort(key=lambda s: (-max(_size(s.low), _size(s.high)), -_size(s.by_percent)))
    least = 1e-9 * max((_size(s.by_percent) for s in found), default=0.0)
    return tuple(s for s in found if max(_size(s.by_percent), _size(s.low), _size(s.high)) > least)


def _size(a: Amount) -> float:
    return abs(float(a.value.real))


def _no_names(_: Reference, __: int) -> Amount:
    raise Doubt("no names stand here")
