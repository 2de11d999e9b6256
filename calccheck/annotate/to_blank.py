"""Empty tables for an author to fill in by hand, in the sheet's own language: once filled in, every cell is a claim.

They hold the names of a circuit and no value of it.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence

from calccheck.model import Circuit, Element, Reading

_PLAIN = re.compile(r"\w+[′″']*")  # a subscript that needs no braces
_CELL = 11  # room for a value


def blank_page(reading: Reading) -> str:
    """The tables of every circuit of a sheet, in Markdown."""
    several = len(reading.circuits) > 1
    pages = []
    for circuit in reading.circuits:
        line = reading.sheet.line_column(circuit.span.start)[0]
        place = "" if not several or circuit.name else f"Belongs below the circuit of line {line}, above the next.\n\n"
        pages.append(_tables(circuit, place, f" of {circuit.name}" if several and circuit.name else ""))
    return "\n".join(pages)


def _tables(circuit: Circuit, place: str, of: str) -> str:
    """The superposition table and the list of quantities. ``of``: what says in each row which circuit is meant."""
    sources = circuit.sources()
    apart = len({s.frequency for s in sources}) > 1
    heads = [*(f"due to `{s.name}`" for s in sources), *([] if apart else ["total"])]
    rows = [f"`{q}{of}`" for q in _linear(circuit)]
    others = [f"`{q}{of}`" for q in _from_totals(circuit)]
    total = "Sources of several frequencies have no common total." if apart else "The total is their sum."
    return (
        f"## Superposition{of}\n\n{place}Each source alone: every other voltage source a short, every other current source a gap. "
        f"{total}\n\n{_table(heads, rows)}\n## Quantities{of}\n\n"
        f"From the totals; a power is no sum of the powers of each source alone.\n\n{_table(['value'], others)}"
    )


def _table(heads: Sequence[str], rows: Sequence[str]) -> str:
    first = max(map(len, rows), default=0)
    widths = [first, *(max(len(h), _CELL) for h in heads)]
    lines = [["", *heads], ["-" * w for w in widths], *([row] for row in rows)]
    filled = [[*line, *[""] * (len(widths) - len(line))] for line in lines]
    return "".join("| " + " | ".join(c.ljust(w) for c, w in zip(line, widths, strict=True)) + " |\n" for line in filled)


def _linear(circuit: Circuit) -> Iterator[str]:
    """Node voltages against the reference and part currents: what superposes."""
    for node in circuit.nodes():
        if node != circuit.reference:
            yield f"V_{_subscript(node)}"
    for e in circuit.elements:
        if e.kind != "open":
            yield from (f"I_{_subscript(*names)}" for names in _carriers(e))


def _carriers(e: Element) -> list[tuple[str, ...]]:
    """The part, or each of its terminals by its node; of an op-amp the output alone, because its inputs take no current."""
    if not e.terminals:
        return [(e.name,)]
    nodes = [node for word, node in e.terminals if e.kind != "op-amp" or word == "out"]
    return [(e.name, node) for node in nodes if nodes.count(node) == 1]


def _from_totals(circuit: Circuit) -> Iterator[str]:
    """Voltage and power of every part between two nodes."""
    for e in circuit.elements:
        if not e.terminals:
            yield from (f"{letter}_{_subscript(e.name)}" for letter in "VP")


def _subscript(*names: str) -> str:
    text = ",".join(names)
    return text if len(names) == 1 and _PLAIN.fullmatch(text) else f"{{{text}}}"
