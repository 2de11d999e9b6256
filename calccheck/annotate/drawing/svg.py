"""SVG 1.1 as text: escaped, with presentation attributes alone (no style sheet, no identifiers), so that it may stand anywhere.

Everything is drawn in ``currentColor`` and nothing is filled white: it prints in black and follows a dark page.
"""

from __future__ import annotations

import unicodedata
from collections.abc import Collection, Iterable
from dataclasses import dataclass
from html import escape

from calccheck.annotate.characters import code_point, told, unseen

FAMILY = "DejaVu Sans Mono, Menlo, Consolas, monospace"
SIZE = 10.0
"""Of all lettering, in user units."""
_ADVANCE = 0.602  # of a glyph, over the size: DejaVu Sans Mono; Menlo and Courier have the same, Consolas less
_ASCENT, _DESCENT = 0.78, 0.24
_SMALLEST, _LARGEST, _PAGE = 1.0, 1.3, 830.0  # pixels for a unit; the width of the page's text in pixels
INK = 'stroke="currentColor" fill="none"'


def width(text: str) -> float:
    """How wide a text is drawn: all glyphs alike, East Asian wide ones a whole size and a bit."""
    wide = sum(unicodedata.east_asian_width(c) in "WF" for c in text)
    return SIZE * (_ADVANCE * (len(text) - wide) + 1.05 * wide)


def ascent() -> float:
    """How far lettering rises above its base line."""
    return SIZE * _ASCENT


def descent() -> float:
    """How far lettering hangs below its base line."""
    return SIZE * _DESCENT


def visible(text: str, missing: Collection[str] = ()) -> str:
    """Text with what would not be seen, and what no font shows (``missing``), as ``[U+202E]``."""
    return "".join(f"[{code_point(c)}]" if c in missing or unseen(c) else c for c in " ".join(text.split()))


def number(x: float) -> str:
    """A coordinate to a tenth, without needless characters."""
    return f"{x:.1f}".removesuffix(".0").replace("-0", "-0" if round(x, 1) else "0")


def text(x: float, y: float, words: str, bold: bool = False, anchor: str = "start") -> str:
    """One line of lettering on the base line ``y``."""
    more = ' font-weight="bold"' if bold else ""
    more += f' text-anchor="{anchor}"' if anchor != "start" else ""
    return f'<text x="{number(x)}" y="{number(y)}"{more}>{escape(words, quote=False)}</text>'


def path(d: str, thick: float = 1.0) -> str:
    """A line of any shape."""
    return f'<path d="{d}" {INK} stroke-width="{number(thick)}"/>'


def solid(d: str) -> str:
    """A filled shape."""
    return f'<path d="{d}"/>'


def segment(x1: float, y1: float, x2: float, y2: float, thick: float = 1.0) -> str:
    """A straight line."""
    return path(f"M{number(x1)} {number(y1)}L{number(x2)} {number(y2)}", thick)


def rectangle(x: float, y: float, w: float, h: float, thick: float = 1.0) -> str:
    """An upright rectangle, not filled."""
    where = f'x="{number(x)}" y="{number(y)}" width="{number(w)}" height="{number(h)}"'
    return f'<rect {where} {INK} stroke-width="{number(thick)}"/>'


def circle(x: float, y: float, r: float, filled: bool = False) -> str:
    """A circle."""
    look = "" if filled else f' {INK} stroke-width="1"'
    return f'<circle cx="{number(x)}" cy="{number(y)}" r="{number(r)}"{look}/>'


@dataclass(frozen=True, slots=True)
class Picture:
    """An image: ``svg``, its text alternative ``title`` and ``words``, and its size in user units."""

    svg: str
    title: str
    words: str
    width: float
    height: float


def picture(w: float, h: float, title: str, words: str, body: Iterable[str]) -> Picture:
    """The whole image with its text alternative, on a screen as large as a page is wide, within bounds of legibility."""
    title, words = told(title), told(words)
    scale = min(_LARGEST, max(_SMALLEST, _PAGE / w))
    head = (
        f'<svg xmlns="http://www.w3.org/2000/svg" role="img" width="{number(w * scale)}" '
        f'height="{number(h * scale)}" viewBox="0 0 {number(w)} {number(h)}" font-family="{FAMILY}" '
        f'font-size="{number(SIZE)}" fill="currentColor">'
    )
    lettered = f"<title>{escape(title, quote=False)}</title>", f"<desc>{escape(words, quote=False)}</desc>"
    return Picture("\n".join((head, *lettered, *body, "</svg>\n")), title, words, w, h)
