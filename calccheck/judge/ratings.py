"""Every part held against its ratings, at the worst within tolerances and in every case, without a claim being written.

A power is the mean over all frequencies. A voltage is that at DC and the peaks of all frequencies added up, which no instant
exceeds; a current is the rms value, by which parts are rated (common practice). All are held by their size.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import replace
from decimal import Decimal
from fractions import Fraction

from calccheck.arithmetic import Amount, Doubt, Real, size
from calccheck.formula import Binary, Call, Node, Number
from calccheck.judge import quantities
from calccheck.judge.closing import Closing
from calccheck.judge.scope import Key, Ledger, case_changes
from calccheck.judge.spreads import place, value_at
from calccheck.judge.varied import Values
from calccheck.model import Circuit, Element, Finding, Rating, RatingHeld
from calccheck.printing import shown
from calccheck.rules import RULES
from calccheck.source import Span
from calccheck.units import AMPERE, VOLT, WATT

_JUST = 1 + 1e-9
_TWO = Decimal(2)
_WORDS = {WATT: "its power", VOLT: "the voltage across it", AMPERE: "its current"}


def held_ratings(index: int, ledger: Ledger) -> tuple[list[RatingHeld], list[Finding]]:
    """The ratings of one circuit's parts, each in its worst case, and what is to be said of those passed or not checked."""
    circuit = ledger.circuits[index]
    rated = [(e, r) for e in circuit.elements for r in e.ratings]
    if circuit.symbols and rated:
        reason = f"it may depend on the free symbols {', '.join(name for name, _ in circuit.symbols)}"
        return [], [*_unchecked({reason: {r.span: (e, "") for e, r in rated}})]
    worst: dict[Span, tuple[RatingHeld, Element]] = {}
    unchecked: dict[str, dict[Span, tuple[Element, str]]] = {}
    for case in ("", *(c.name for c in circuit.cases)):
        changes = case_changes(case, circuit, ledger) if case else ()
        for e, rating in rated:
            try:
                found = _held(e, rating, Key(index, "", (), changes=changes), case, ledger)
            except Doubt as d:
                unchecked.setdefault(d.reason, {}).setdefault(rating.span, (e, case))
                continue
            if found is not None and (rating.span not in worst or found.share > worst[rating.span][0].share):
                worst[rating.span] = found, e
    findings = [f for held, e in worst.values() for f in _passed(held, e)]
    return [held for held, _ in worst.values()], [*findings, *_unchecked(unchecked)]


def _unchecked(found: dict[str, dict[Span, tuple[Element, str]]]) -> Iterator[Finding]:
    """One finding for all ratings that could not be checked for the same reason."""
    for reason, rated in found.items():
        names = ", ".join(dict.fromkeys(e.name for e, _ in rated.values()))
        case = next(iter(rated.values()))[1]
        where = f" in case {case}" if case else ""
        message = f"the rating{'s' if len(rated) > 1 else ''} of {names} could not be checked{where}: {reason}"
        yield Finding("rating", RULES["rating"].severity, message, next(iter(rated)))


def _held(e: Element, rating: Rating, key: Key, case: str, ledger: Ledger) -> RatingHeld | None:
    """A part against one rating; nothing for one that a case takes out."""
    circuit = quantities.circuit_of(key, ledger, rating.span)
    part = circuit.element(e.name)
    if part is None:
        return None
    closing = Closing(ledger, _no_names, Values(ledger))
    node = _Burden(part, key, circuit, closing, rating.span).of(rating)
    formula = closing.formula(node)
    where, proved = "", True
    if formula.varied and ledger.tolerances is not None:
        found = ledger.tolerances().extreme(formula, True)
        worst: Real = found.value
        where, proved = place(found, formula), found.proved
    else:
        worst = size(value_at(formula, closing, {}, ledger, rating.span))
    limit = rating.value * ledger.settings.derate
    name = ledger.circuits[key.circuit].name
    share = float(worst / limit)
    amounts = Amount(limit, rating.dimension), Amount(worst, rating.dimension)
    return RatingHeld(e.name, name, case, rating, *amounts, share, where, proved)


def _no_names(*_: object) -> Amount:
    raise Doubt("no names stand here")


def _passed(h: RatingHeld, e: Element) -> Iterator[Finding]:
    if h.share <= _JUST:
        return
    conditions = " ".join(c for c in (f"in case {h.case}" if h.case else "", h.where) if c)
    rated = h.rating.text.removeprefix("max").strip()
    derated = "" if h.limit.value == h.rating.value else f", derated to {shown(h.limit)},"
    message = (
        f"{e.name}: {_WORDS[h.rating.dimension]} comes to {shown(h.worst)}{f' {conditions}' if conditions else ''} and passes "
        f"the rating of {rated}{derated} by {shown(Amount(h.worst.value - h.limit.value, h.limit.dimension), figures=3)}"
    )
    yield Finding("rating", RULES["rating"].severity, message, h.rating.span)


class _Burden:
    """What a part bears, as formulas of readings."""

    def __init__(self, part: Element, key: Key, circuit: Circuit, closing: Closing, span: Span) -> None:
        self.part, self.key, self.closing, self.span = part, key, closing, span
        self.frequencies = circuit.frequencies

    def of(self, rating: Rating) -> Node:
        """The size that a rating limits. Raises ``Doubt`` for one that the part's model does not tell."""
        if self.part.kind == "transformer" or (self.part.kind == "op-amp" and rating.dimension == WATT):
            raise Doubt(f"the model of {self.part.name}, an ideal {self.part.kind}, does not tell it")
        if rating.dimension == VOLT:
            return self._peaks()
        if rating.dimension == AMPERE:
            return self._rms()
        power = self._power()
        takes = (
            isinstance(power, Call)
            and power.function == "power"
            and self.part.value is not None
            and self.part.value > 0
        )
        return power if takes else self._size(power)  # what a resistance takes is never below zero

    def _read(self, letter: str, subscripts: Sequence[str], frequency: Fraction) -> Node:
        key = replace(self.key, letter=letter, subscripts=tuple(subscripts))
        return self.closing.reading(key, frequency, self.span)

    def _voltage(self, frequency: Fraction) -> Node:
        at = dict(self.part.terminals)
        if self.part.kind == "transistor":
            return self._read("V", (at["collector"], at["emitter"]), frequency)
        return self._read("V", (at["out"],) if at else (self.part.name,), frequency)

    def _current(self, frequency: Fraction) -> Node:
        word = {"transistor": "collector", "op-amp": "out"}.get(self.part.kind)
        return self._read("I", (self.part.name, word) if word else (self.part.name,), frequency)

    def _size(self, node: Node) -> Node:
        return Call("abs", (node,), self.span)

    def _peaks(self) -> Node:
        crest = math.sqrt(2) if self.closing.ledger.settings.phasors == "rms" else 1.0
        terms = [self._times(crest if f else 1.0, self._size(self._voltage(f))) for f in self.frequencies]
        return _sum(terms, self.span)

    def _rms(self) -> Node:
        if self.frequencies == (Fraction(0),):
            return self._size(self._current(Fraction(0)))
        half = 0.5 if self.closing.ledger.settings.phasors == "peak" else 1.0
        squares = []
        for f in self.frequencies:
            square = Binary("^", self._size(self._current(f)), Number(_TWO, self.span), self.span)
            squares.append(self._times(half if f else 1.0, square))
        return Call("sqrt", (_sum(squares, self.span),), self.span)

    def _power(self) -> Node:
        if self.part.kind != "transistor":
            return self.closing.power(replace(self.key, letter="P", subscripts=(self.part.name,)), self.span)
        at, terms = dict(self.part.terminals), []
        half = 0.5 if self.closing.ledger.settings.phasors == "peak" else 1.0
        for f in self.frequencies:
            for word in ("collector", "base"):
                voltage = self._read("V", (at[word], at["emitter"]), f)
                current = self._read("I", (self.part.name, word), f)
                product = Call("re", (Binary("×", voltage, Call("conj", (current,), self.span), self.span),), self.span)
                plain = Binary("×", voltage, current, self.span)
                terms.append(self._times(half, product) if f else plain)
        return _sum(terms, self.span)

    def _times(self, factor: float, node: Node) -> Node:
        if factor == 1:
            return node
        return Binary("×", self.closing.values.constant(factor, self.span), node, self.span)


def _sum(terms: Sequence[Node], span: Span) -> Node:
    total = terms[0]
    for term in terms[1:]:
        total = Binary("+", total, term, span)
    return total
