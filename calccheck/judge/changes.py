"""Circuits with a change: a part taken out, opened, shorted, given another value; sources zeroed; a test source or short laid in."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from fractions import Fraction
from typing import Any, Literal

from calccheck.arithmetic import Amount, Doubt, real
from calccheck.formula import Change
from calccheck.model import Circuit, Element
from calccheck.units import AMPERE, FARAD, HENRY, NONE, OHM, SIEMENS, VOLT, words

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


_OF_DEVICE = {"beta": ("beta", NONE), "V_BE": ("v_be", VOLT), "V_CE": ("v_ce", VOLT), "drop": ("drop", VOLT)}
_WANTED = {"voltage source": VOLT, "current source": AMPERE, "capacitor": FARAD, "inductor": HENRY}


def _remade(element: Element, change: Change, value: Amount | None) -> Element:
    if change.what == "open":
        return _bare(element, "open")
    if change.what == "shorted":
        return _bare(element, "short")
    assert value is not None
    if change.what != "as":
        return _with_device_value(element, change, value)
    if element.control is not None or element.device is not None:
        raise Doubt(f"{element.name} is {_article(element.kind)}; a value cannot take its place", change.span)
    wanted = _WANTED.get(element.kind, OHM)
    if value.dimension == SIEMENS and wanted == OHM and value.value != 0:
        value = Amount(1 / value.value, OHM)
    if value.dimension != wanted:
        raise Doubt(f"{element.name} is {words(wanted)}, {words(value.dimension)} cannot take its place", change.span)
    plain = replace(element, stated=value, tolerance=None, drift=None, worked=None, formula=None)
    if isinstance(value.value, complex) or (element.is_source and element.frequency is not None):
        kind = element.kind if element.is_source else "impedance"
        return replace(plain, kind=kind, value=None, phasor=complex(value.value))
    kind = element.kind if element.kind in _WANTED else "resistor"
    return replace(plain, kind=kind, phasor=None, value=Fraction(real(value.value, change.span)))


def _bare(e: Element, kind: Literal["open", "short"]) -> Element:
    """A gap or a link in place of a part."""
    return Element(e.name, kind, e.plus, e.minus, e.span, written=kind)


def _article(kind: str) -> str:
    return f"an {kind}" if kind[0] in "aeio" else f"a {kind}"


def _with_device_value(element: Element, change: Change, value: Amount) -> Element:
    """``Q1 beta 80``: another value of a hand model."""
    field, dimension = _OF_DEVICE[change.what]
    if element.device is None or getattr(element.device, field) is None:
        raise Doubt(f"{element.name} has no {change.what}", change.span)
    if value.dimension != dimension:
        raise Doubt(f"{change.what} is {words(dimension)}, not {words(value.dimension)}", change.span)
    amount = Fraction(real(value.value, change.span))
    kept = tuple(t for t in element.device.tolerances if t[0] != change.what)
    put: dict[str, Any] = {field: amount, "tolerances": kept}
    return replace(element, device=replace(element.device, **put))


def _put(circuit: Circuit, old: Element, new: Element) -> Circuit:
    return replace(circuit, elements=tuple(new if e is old else e for e in circuit.elements))


def zeroed(circuit: Circuit, keep: Iterable[str] = ()) -> Circuit:
    """Every independent source but those named zeroed: a voltage source a short, a current source a gap."""
    kept = set(keep)
    return replace(circuit, elements=tuple(e if e.name in kept else _zeroed(e) for e in circuit.elements))


def _zeroed(e: Element) -> Element:
    if e.kind == "voltage source":
        return replace(e, kind="short", value=None, phasor=None, formula=None, frequency=None)
    if e.kind == "current source":
        return replace(e, kind="open", value=None, phasor=None, formula=None, frequency=None)
    if e.is_source and e.device is not None:  # the drops of a hand model
        none: dict[str, Any] = {
            name: Fraction(0) for name in ("v_be", "v_ce", "drop") if getattr(e.device, name) is not None
        }
        return replace(e, device=replace(e.device, **none))
    return e


def with_test_current(circuit: Circuit, a: str, b: str, frequency: Fraction = DC) -> Circuit:
    """The circuit without its independent sources and with 1 A driven into ``a`` and out of ``b``, which is the reference.

    What hangs together with neither ``b`` nor a controlled source is left out: zeroed current sources may have cut it off.
    """
    test = Element(TEST, "current source", b, a, circuit.span, Fraction(1))
    if frequency != DC:
        test = replace(test, value=None, phasor=1 + 0j, frequency=frequency)
    if a == b:
        return replace(circuit, elements=(test,), reference=b)
    dead = zeroed(circuit)
    kept = tuple(e for e in dead.elements if e.kind != "open")
    if not any(e.control or e.terminals for e in kept):
        near = _reached(kept, b)
        kept = tuple(e for e in kept if e.plus in near)
    grounded = any(e.kind == "op-amp" for e in kept)  # its output works against the reference, which stays
    return replace(dead, elements=(*kept, test), reference=dead.reference if grounded else b)


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
