"""The pictures of a report: a drawing behind each circuit block, bars by source behind tables and in the check record."""

from __future__ import annotations

from collections.abc import Collection, Iterator
from dataclasses import dataclass

from calccheck.annotate import bars, moves
from calccheck.annotate.drawing import picture
from calccheck.annotate.drawing.svg import Picture
from calccheck.annotate.drawing.words import at
from calccheck.annotate.maths_words import plain
from calccheck.document import Block, blocks
from calccheck.judge.quantities import LARGEST_GAP
from calccheck.model import Circuit, Judged, Report, Solution

MOVED = "What each value changes at the lower end of its tolerance (falling lines) and at the upper end (rising), alone; largest first."
MOST_PARTS = 60  # of a circuit that is drawn: more are not legible on any paper
BY_SOURCE = "Each source's part from where the one before it ends; the total from zero."


@dataclass(frozen=True, slots=True)
class Shown:
    """A picture with the sentence below it; without a picture the sentence says why. ``claims``: keys of its claims' entries."""

    picture: Picture | None
    caption: str = ""
    claims: tuple[str, ...] = ()


def behind(report: Report, missing: Collection[str] = ()) -> dict[int, list[Shown]]:
    """What stands behind a block, by the offset at which it begins. ``missing``: characters that no font shows."""
    found: dict[int, list[Shown]] = {}
    for block in blocks(report.reading.page):
        if block.kind == "fence":
            shown = [_drawing(*one, missing) for one in _circuits_in(report, block)]
        elif block.kind == "table":
            shown = _charts(_claims_in(report, block), missing)
        else:
            continue
        if shown:
            found[block.span.start] = shown
    return found


def _circuits_in(report: Report, fence: Block) -> Iterator[tuple[Circuit, Solution | None]]:
    for k, circuit in enumerate(report.reading.circuits):
        if circuit.elements and fence.span.start <= circuit.span.start <= circuit.span.end <= fence.span.end:
            yield circuit, _trusted(circuit, report.solutions[k] if k < len(report.solutions) else None)


def _trusted(circuit: Circuit, solution: Solution | None) -> Solution | None:
    """A solution that says something of the circuit as written: not one at chance values, not one that the routes dispute."""
    if solution is None or circuit.symbols or circuit.problems:
        return None
    return solution if solution.exact or solution.gap <= LARGEST_GAP else None


def _drawing(circuit: Circuit, solution: Solution | None, missing: Collection[str]) -> Shown:
    count = len(circuit.elements)
    if count > MOST_PARTS:
        return Shown(None, f"Not drawn: {count} parts are more than a drawing keeps legible.")
    return Shown(picture(circuit, solution, missing), _caption(circuit, solution))


def _caption(circuit: Circuit, solution: Solution | None) -> str:
    if solution is None:
        why = "it has no solution to show"
        if circuit.problems:
            why = "the block has errors, and what could not be read of it is missing here"
        elif circuit.symbols:
            why = "its values are free symbols"
        return f"The circuit as read, nodes far from the reference on top; without potentials and currents: {why}."
    if solution.frequency:
        return (
            f"The circuit as read{at(solution)}: each line a node, the largest magnitude on top; "
            "arrows show how currents count."
        )
    dc = " at DC" if any(e.frequency for e in circuit.sources()) else ""
    return f"The circuit as read{dc}: each line a node, the highest potential on top; arrows show where currents flow."


# --- superposition --------------------------------------------------------------------------------------------------


def totals(report: Report, missing: Collection[str] = ()) -> list[Shown]:
    """Bars for each quantity that is claimed whole and that several sources bring about, once each, in the sheet's order."""
    return _charts(((f"c{k}", j) for k, j in enumerate(report.claims, 1)), missing)


def _claims_in(report: Report, table: Block) -> Iterator[tuple[str, Judged]]:
    for k, j in enumerate(report.claims, 1):
        if j.claim.place == "table" and table.span.start <= j.claim.span.start < table.span.end:
            yield f"c{k}", j


def _charts(claims: Iterator[tuple[str, Judged]], missing: Collection[str]) -> list[Shown]:
    found: dict[tuple[int, str], list[tuple[str, Judged]]] = {}
    for key, j in claims:
        if j.parts:
            found.setdefault((j.claim.circuit, j.quantity), []).append((key, j))
    return [
        Shown(
            bars.picture(plain(group[0][1].quantity), group[0][1].parts, group[0][1].claimed_unit, missing),
            claims=tuple(key for key, _ in group),
        )
        for group in found.values()
    ]


# --- tolerances -----------------------------------------------------------------------------------------------------


def moved(report: Report, missing: Collection[str] = ()) -> list[Shown]:
    """Bars of what moves each quantity that is claimed over its tolerances, once each, in the sheet's order."""
    found: dict[tuple[object, ...], list[tuple[str, Judged]]] = {}
    for k, j in enumerate(report.claims, 1):
        if any(m.low.value or m.high.value for m in j.moves):
            found.setdefault((j.claim.circuit, j.moves), []).append((f"c{k}", j))
    return [
        Shown(
            moves.picture(_bare(plain(group[0][1].quantity)), group[0][1].moves, group[0][1].claimed_unit, missing),
            claims=tuple(key for key, _ in group),
        )
        for group in found.values()
    ]


def _bare(quantity: str) -> str:
    """A quantity without the word that asks for its spread."""
    first, _, rest = quantity.partition(" ")
    return rest if first in ("min", "max", "worst", "rss", "sigma") and rest else quantity
