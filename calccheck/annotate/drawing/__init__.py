"""A circuit as it was read, drawn so that it can be held against the schematic.

Each node is a horizontal line, the highest potential on top; each part stands upright between its two lines. Nothing is drawn
that is not in the block, and the same circuit gives the same drawing.
"""

from __future__ import annotations

from collections.abc import Collection

from calccheck.annotate.drawing import svg
from calccheck.annotate.drawing.figures import figures
from calccheck.annotate.drawing.layout import layout
from calccheck.annotate.drawing.placed import Layout, Lead
from calccheck.annotate.drawing.symbols import arrow, symbol
from calccheck.annotate.drawing.words import in_words, title
from calccheck.model import Circuit, Solution

_PASSING = 5.0  # half the gap where a conductor passes a line


def drawing(circuit: Circuit, solution: Solution | None) -> str:
    """One SVG image."""
    return picture(circuit, solution).svg


def picture(circuit: Circuit, solution: Solution | None, missing: Collection[str] = ()) -> svg.Picture:
    """The image and its size. ``solution``: at one frequency, ``None`` where there is none. ``missing``: no font shows these."""
    f = figures(circuit, solution, missing)
    made = layout(f)
    return svg.picture(made.width, made.height, title(circuit, solution), in_words(f), _drawn(made))


def _drawn(made: Layout) -> list[str]:
    return [
        *(svg.segment(line.x1, line.y, line.x2, line.y, 2.2) for line in made.lines),
        *(piece for lead in made.leads for piece in _lead(lead)),
        *(piece for s in made.symbols for piece in symbol(s.part.element.kind, s.x, s.y, s.down)),
        *(svg.rectangle(b.x1, b.y1, b.x2 - b.x1, b.y2 - b.y1, 1.4) for b in made.boxes),
        *(svg.circle(dot.x, dot.y, 3.2, filled=True) for dot in made.dots),
        *(arrow(a.x, a.y, a.down) for a in made.arrows),
        *(svg.text(t.x, t.y, t.text, t.bold, t.anchor) for t in made.labels),
    ]


def _lead(lead: Lead) -> list[str]:
    """A conductor, interrupted where it passes a line."""
    ends = [lead.y1, *(y + d for y in sorted(lead.passed) for d in (-_PASSING, _PASSING)), lead.y2]
    return [svg.segment(lead.x, a, lead.x, b) for a, b in zip(ends[::2], ends[1::2], strict=True)]
