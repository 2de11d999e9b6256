"""Values that follow from printed ones by a part's own law, for telling carried rounding from error.

Ohm's law, P = V·I = V²/R = I²·R, a voltage as the difference of two node voltages, and a total as the sum of the parts due to
each source; each worked only with values that stand printed earlier in the sheet.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from itertools import islice, product

from calccheck.arithmetic import Real
from calccheck.judge.scope import Key, Ledger
from calccheck.model import Circuit, Element

_MOST = 3  # printings of one quantity that are tried


def followed(key: Key, ledger: Ledger, circuit: Circuit) -> Iterator[tuple[Real, str]]:
    """Values (SI) that follow for a quantity from printed ones, each with the law that gives it."""
    if len(key.subscripts) == 1:
        element = circuit.element(key.subscripts[0])
        if element is not None:
            yield from _own_law(key, element, ledger, circuit)
    if key.letter == "V":
        yield from _difference(key, ledger, circuit)
    if not key.due_to and key.letter in ("V", "I", "Isc"):
        yield from _sum_of_parts(key, ledger, circuit)


def _printed(key: Key, ledger: Ledger) -> list[Real]:
    return [*islice(reversed(ledger.of_quantity.get(key, {})), _MOST)]


def _own_law(key: Key, element: Element, ledger: Ledger, circuit: Circuit) -> Iterator[tuple[Real, str]]:
    voltages = _part_voltages(key, element, ledger, circuit)
    currents = _printed(replace(key, letter="I"), ledger)
    ohms = element.value if element.kind == "resistor" else None
    if element.kind == "voltage source" and element.value is not None and not key.due_to:
        voltages = [*voltages, element.value]
    if element.kind == "current source" and element.value is not None and not key.due_to:
        currents = [*currents, element.value]
    if key.letter == "P":
        yield from ((v * i, "P = V·I") for v, i in product(voltages, currents))
        if ohms:
            yield from ((v * v / ohms, "P = V²/R") for v in voltages)
            yield from ((i * i * ohms, "P = I²·R") for i in currents)
    if ohms and key.letter == "V":
        yield from ((i * ohms, "V = R·I") for i in currents)
    if ohms and key.letter == "I":
        yield from ((v / ohms, "I = V/R") for v in voltages)


def _part_voltages(key: Key, element: Element, ledger: Ledger, circuit: Circuit) -> list[Real]:
    """A part's voltage as printed for itself, between its nodes, or as the difference of its nodes' voltages."""
    own = _printed(replace(key, letter="V"), ledger)
    between = replace(key, letter="V", subscripts=(element.plus, element.minus))
    return [*own, *_printed(between, ledger), *(v for v, _ in _difference(between, ledger, circuit))]


def _difference(key: Key, ledger: Ledger, circuit: Circuit) -> Iterator[tuple[Real, str]]:
    element = circuit.element(key.subscripts[0]) if len(key.subscripts) == 1 else None
    a, b = (element.plus, element.minus) if element else (key.subscripts[0], (*key.subscripts, circuit.reference)[1])
    if b == circuit.reference and not element and len(key.subscripts) == 1:
        return
    highs, lows = (_node(n, key, ledger, circuit) for n in (a, b))
    yield from ((h - low, f"V_{a} − V_{b}") for h, low in product(highs, lows))


def _node(node: str, key: Key, ledger: Ledger, circuit: Circuit) -> list[Real]:
    if node == circuit.reference:
        return [0]
    known = [s.value for s in circuit.sources() if s.kind == "voltage source" and not key.due_to and s.value is not None
             and s.plus == node and s.minus == circuit.reference]  # fmt: skip
    return [*known, *_printed(replace(key, letter="V", subscripts=(node,)), ledger)]


def _sum_of_parts(key: Key, ledger: Ledger, circuit: Circuit) -> Iterator[tuple[Real, str]]:
    parts = [_printed(replace(key, due_to=frozenset({s.name})), ledger) for s in circuit.sources()]
    if len(parts) > 1 and all(parts) and len(parts) <= 6:
        yield from ((sum(choice), "the sum of its parts by source") for choice in product(*(p[:2] for p in parts)))
