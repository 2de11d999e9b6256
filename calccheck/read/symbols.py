"""Free symbols in the values of parts, and of what dimension each is.

A symbol's dimension is told by the unit at the end of a value: it is the one with which the value comes out in that unit. Where
there is none, the symbol is a plain number and the unit multiplies. Values with a single symbol are looked at first, then all
others in the order of the block: what is still unknown in these are plain numbers, or one symbol that makes the value come out.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from fractions import Fraction

from calccheck.arithmetic import Amount, DimensionFault, Doubt, evaluate
from calccheck.formula import Node, Reference
from calccheck.model import Control, Kind
from calccheck.source import Piece
from calccheck.units import AMPERE, FARAD, HENRY, NONE, OHM, SIEMENS, VOLT, Dimension, Unit

KINDS: dict[Dimension, Kind] = {
    OHM: "resistor", SIEMENS: "resistor", VOLT: "voltage source", AMPERE: "current source", FARAD: "capacitor",
    HENRY: "inductor",
}  # fmt: skip
_ONE = Fraction(1)


@dataclass(frozen=True, slots=True)
class Written:
    """A value parsed.

    ``unit``: one that stands behind a name, or behind a bracket with symbols. ``symbols``: each once. ``control``: what steers the
    source, by the names ``steered_by``. ``lookup``: amounts of givens and constants. ``alternating``: whether an angle or j stands
    in it.
    """

    what: Piece
    node: Node
    lookup: Callable[[Reference], Amount]
    unit: Unit | None = None
    symbols: tuple[str, ...] = ()
    control: Control | None = None
    steered_by: tuple[Reference, ...] = ()
    alternating: bool = False

    def at(self, r: Reference, steering: Fraction = _ONE) -> Amount:
        """The amount of a name that is no symbol, at ``steering`` volts or amperes of what steers the source."""
        if r in self.steered_by:
            return Amount(steering, VOLT if r.letter == "V" else AMPERE)
        return self.lookup(r)


def amount_of(written: Written, dimensions: Mapping[str, Dimension], steering: Fraction = _ONE) -> Amount:
    """What a value comes to, its symbols being some positive numbers of these dimensions, plain ones where none is given.

    ``steering``: volts or amperes of what steers the source. Raises what ``evaluate`` raises.
    """
    # values that cancel each other in no sum that a person writes
    some = {name: Fraction(37 + 12 * k, 23 + 2 * k) for k, name in enumerate(written.symbols)}

    def lookup(r: Reference) -> Amount:
        if r.word in some:
            return Amount(some[r.word], dimensions.get(r.word, NONE))
        return written.at(r, steering)

    return evaluate(written.node, lookup)


def declared(values: Iterable[Written]) -> dict[str, Dimension]:
    """The dimensions of all symbols that can be told."""
    known: dict[str, Dimension] = {}
    with_symbols = [w for w in values if w.symbols]
    for w in sorted(with_symbols, key=lambda w: len(w.symbols) > 1 or w.unit is None):
        unknown = [s for s in w.symbols if s not in known]
        if len(unknown) == 1:
            found = _inferred(w, unknown[0], known)
            known |= {unknown[0]: found} if found is not None else {}
        elif unknown and _comes_out(w, known):
            known |= dict.fromkeys(unknown, NONE)
    return {s: known[s] for w in with_symbols for s in w.symbols if s in known}


def _outcome(w: Written, dimensions: Mapping[str, Dimension]) -> Dimension | None:
    try:
        return amount_of(w, dimensions).dimension
    except (Doubt, DimensionFault):
        return None


def _comes_out(w: Written, dimensions: Mapping[str, Dimension]) -> bool:
    """Whether a value comes out in the unit at its end or, where none stands there, in that of a part."""
    found = _outcome(w, dimensions)
    if w.unit is not None:
        return found == w.unit.dimension
    return found in ((VOLT, AMPERE) if w.control else KINDS)


def _inferred(w: Written, symbol: str, known: Mapping[str, Dimension]) -> Dimension | None:
    """The dimension that a value's one unknown symbol must have; ``None`` where none makes sense of the value."""
    plain = _outcome(w, {**known, symbol: NONE})
    for dimension in _candidates(w, plain):
        if not _comes_out(w, {**known, symbol: dimension}):
            continue
        if w.unit is not None or dimension == NONE or _outcome(w, {**known, symbol: dimension}) == dimension:
            return dimension
    return NONE if w.unit is not None and plain == NONE else None


def _candidates(w: Written, plain: Dimension | None) -> list[Dimension]:
    """What the symbol may be, likeliest first; ``plain``: the value's dimension where it is a plain number."""
    if w.unit is None:
        return [NONE, *(KINDS if plain is None else ())]
    if plain is None:
        return [w.unit.dimension]
    factor = tuple(a - b for a, b in zip(w.unit.dimension, plain, strict=True))
    return [factor, tuple(-x for x in factor), w.unit.dimension]
