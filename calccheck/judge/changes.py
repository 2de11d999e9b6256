"""Circuits with a change: a part taken out, opened, shorted, given another value; sources zeroed; a test source or short laid in."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from fractions import Fraction

from calccheck.arithmetic import Amount, Doubt, real
from calccheck.formula import Change
from calccheck.model import Circuit, Element
from calccheck.units import AMPERE, OHM, SIEMENS, VOLT, words

TEST = "test current"  # names with a blank cannot meet a part's
LAID_SHORT = "short laid"
DC = Fraction(0)


def changed(circuit: Circuit, change: Change, value: Amount | None) -> Circuit:
    """The circuit with one change; ``value`` is the amount behind ``as``. Raises ``Doubt`` where it makes no sense."""
    element = circuit.element(change.part)
    if element is None:
        raise Doubt(f"there is no part {change.part} in this circuit", change.span)
    if change.what == "without":
        steered = [e.name for e in circuit.elements if e.control is not None and e.control.part == change.part]
        if steered:
            raise Doubt(f"{change.part} cannot be taken out: its current steers {steered[0]}", change.span)
        return replace(circuit, elements=tuple(e for e in circuit.elements if e is not element))
    return _put(circuit, element, _remade(element, change, value))


def _remade(element: Element, change: Change, value: Amount | None) -> Element:
    if change.what == "open":
        return replace(element, kind="open", value=None, control=None)
    if change.what == "shorted":
        return replace(element, kind="short", value=None, control=None)
    assert value is not None
    wanted = {"voltage source": VOLT, "current source": AMPERE}.get(element.kind, OHM)
    if element.kind in ("controlled voltage source", "controlled current source"):
        raise Doubt(f"{element.name} is a controlled source; a value cannot take its place", change.span)
    if value.dimension == SIEMENS and wanted == OHM and value.value != 0:
        value = Amount(1 / value.value, OHM)
    if value.dimension != wanted:
        raise Doubt(f"{element.name} is {words(wanted)}, {words(value.dimension)} cannot take its place", change.span)
    kind = element.kind if element.kind in ("voltage source", "current source") else "resistor"
    return replace(element, kind=kind, value=Fraction(real(value.value, change.span)), stated=value, tolerance=None)


def _put(circuit: Circuit, old: Element, new: Element) -> Circuit:
    return replace(circuit, elements=tuple(new if e is old else e for e in circuit.elements))


def zeroed(circuit: Circuit, keep: Iterable[str] = ()) -> Circuit:
    """Every independent source but those named zeroed: a voltage source a short, a current source a gap."""
    kept = set(keep)
    return replace(circuit, elements=tuple(e if e.name in kept else _zeroed(e) for e in circuit.elements))


def _zeroed(e: Element) -> Element:
    if e.kind == "voltage source":
        return replace(e, kind="short", value=None)
    return replace(e, kind="open", value=None) if e.kind == "current source" else e


def with_test_current(circuit: Circuit, a: str, b: str, frequency: Fraction = DC) -> Circuit:
    """The circuit without its independent sources and with 1 A driven into ``a`` and out of ``b``, which is the reference.

    What hangs together with neither ``b`` nor a controlled source is left out: zeroed current sources may have cut it off.
    """
    if a == b:
        return replace(
            circuit, elements=(Element(TEST, "current source", b, a, circuit.span, Fraction(1)),), reference=b
        )
    dead = zeroed(circuit)
    span = circuit.span
    test = Element(TEST, "current source", b, a, span, Fraction(1))
    kept = tuple(e for e in dead.elements if e.kind != "open")
    if not any(e.control for e in kept):
        near = _reached(kept, b)
        kept = tuple(e for e in kept if e.plus in near)
    return replace(dead, elements=(*kept, test), reference=b)


def _reached(elements: tuple[Element, ...], start: str) -> set[str]:
    reached, fresh = {start}, [start]
    while fresh:
        node = fresh.pop()
        for e in elements:
            other = e.minus if e.plus == node else e.plus if e.minus == node else None
            if other is not None and other not in reached:
                reached.add(other)
                fresh.append(other)
    return reached


def with_short(circuit: Circuit, a: str, b: str) -> Circuit:
    """The circuit with a short laid from ``a`` to ``b``."""
    return replace(circuit, elements=(*circuit.elements, Element(LAID_SHORT, "short", a, b, circuit.span)))
