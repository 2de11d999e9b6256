"""A drawing's text alternative: the circuit in words."""

from __future__ import annotations

from calccheck.annotate.drawing.figures import Drawn, Figures, Flow
from calccheck.model import UNSTATED, Circuit, Solution


def title(circuit: Circuit, solution: Solution | None) -> str:
    """What is drawn, in a line."""
    name = f" {circuit.name}" if circuit.name else ""
    return f"Circuit{name} as read" + (f", with potentials and currents{at(solution)}" if solution else "")


def at(solution: Solution) -> str:
    """`` at 50 Hz``; nothing for DC."""
    if not solution.frequency:
        return ""
    return " at its one frequency" if solution.frequency == UNSTATED else f" at {float(solution.frequency):g} Hz"


def in_words(f: Figures) -> str:
    """Nodes from top to bottom, then each part with its value, its nodes and its current."""
    nodes = ", ".join(f"{f.names[n]} {f.potentials.get(n, '')}".strip() for n in f.nodes)
    return " ".join((f"Nodes from top to bottom: {nodes}.", *(f"{_part(p)}." for p in f.parts)))


def _part(part: Drawn) -> str:
    e = part.element
    what = e.kind if e.written in ("", e.kind) else f"{e.kind} {e.written}"
    plus, minus = part.pins[0].node, part.pins[-1].node
    if e.terminals:
        pins = ", ".join(f"{word} at {node}" for word, node in e.terminals)
        return f"{e.name}: {what}, {pins}"
    signs = (" (+)", " (−)") if e.kind in ("voltage source", "controlled voltage source") else ("", "")
    where = f"from {plus}{signs[0]} to {minus}{signs[1]}"
    return f"{e.name}: {what}, {where}{_current(part.pins[0].flow, plus, minus)}"


def _current(flow: Flow | None, plus: str, minus: str) -> str:
    if flow is None:
        return ""
    if not flow.sign:
        return ", no current"
    ends = (plus, minus) if flow.sign > 0 else (minus, plus)
    return f", {' '.join(flow.lines)} from {ends[0]} to {ends[1]}"
