"""The slip of a circuit that has changed since: the value under an earlier version of the sheet."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

from calccheck.arithmetic import Amount
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.redo import NOWHERE
from calccheck.judge.symbols import instance
from calccheck.model import Circuit, Element
from calccheck.printing import shown
from calccheck.units import HERTZ

_MOST = 3  # changes that a sentence names


def stale(case: Case) -> Iterator[Guess]:
    """The value under an earlier version of the circuit, with what has changed since."""
    later, label = case.circuit, ""
    if later is None:
        return
    for version in case.redo.earlier():
        before = _counterpart(later, case.index, version.circuits)
        if before is None or before.problems or any(name not in case.ledger.symbols for name, _ in before.symbols):
            continue
        before = instance(before, case.ledger.symbols)
        changes = _changes(before, later)
        if changes:
            when = label or f"since {version.label}"
            told = f"an earlier version of the circuit, right until {_listed(changes)} ({when})"
            yield Guess(told, circuit=before, foreign=True)
        later, label = before, version.label


def _counterpart(circuit: Circuit, index: int, circuits: Sequence[Circuit]) -> Circuit | None:
    """The circuit of another version that this one was: by name, else by its place among as many."""
    named = next((c for c in circuits if circuit.name and c.name == circuit.name), None)
    if named is not None:
        return named
    return circuits[index] if index < len(circuits) and circuits[index].name == circuit.name else None


def _changes(before: Circuit, later: Circuit) -> list[str]:
    old, new = ({e.name: e for e in c.elements} for c in (before, later))
    found = [_change(old[name], e) for name, e in new.items() if name in old]
    found += [f"{name} was taken out" for name in old if name not in new]
    found += [f"{name} came in" for name in new if name not in old]
    if before.reference != later.reference:
        found.append(f"the reference went from {before.reference} to {later.reference}")
    return [change for change in found if change]


def _change(old: Element, new: Element) -> str:
    """What a part went through, in words; nothing where it is electrically the same."""
    if _bare(old) == _bare(new):
        return ""
    if (old.plus, old.minus) != (new.plus, new.minus):
        return f"{old.name} went from {old.plus} to {old.minus} to stand from {new.plus} to {new.minus}"
    if old.formula is not None or new.formula is not None:
        return f"{old.name} went from {old.written} to {new.written}"
    if old.frequency != new.frequency and old.stated == new.stated:
        return f"{old.name} went from {_hertz(old)} to {_hertz(new)}"
    if old.stated is not None and new.stated is not None and old.stated != new.stated:
        return f"{old.name} went from {shown(old.stated)} to {shown(new.stated)}"
    return f"{old.name} was changed"


def _hertz(e: Element) -> str:
    return shown(Amount(e.frequency, HERTZ)) if e.frequency else "dc"


def _bare(e: Element) -> Element:
    return replace(e, span=NOWHERE, written="", stated=None, tolerance=None, ratings=(), formula=None)


def _listed(changes: Sequence[str]) -> str:
    if len(changes) > _MOST:
        return ", ".join(changes[:_MOST]) + f" and {len(changes) - _MOST} more changes"
    return " and ".join(changes)
