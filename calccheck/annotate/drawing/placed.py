"""What a drawing is made of, every piece with its place: user units, x to the right, y down."""

from __future__ import annotations

from dataclasses import dataclass, field

from calccheck.annotate.drawing.figures import Drawn
from calccheck.annotate.drawing.svg import ascent, descent, width


@dataclass(frozen=True, slots=True)
class Label:
    """Lettering on a base line."""

    x: float
    y: float
    text: str
    bold: bool = False
    anchor: str = "start"

    @property
    def box(self) -> tuple[float, float, float, float]:
        """Left, top, right, bottom."""
        w = width(self.text)
        left = self.x - {"start": 0.0, "middle": w / 2, "end": w}[self.anchor]
        return left, self.y - ascent(), left + w, self.y + descent()


@dataclass(frozen=True, slots=True)
class Line:
    """A node."""

    node: str
    y: float
    x1: float
    x2: float


@dataclass(frozen=True, slots=True)
class Lead:
    """An upright stretch of a part's conductor; ``passed``: where it crosses lines of nodes that it does not meet."""

    part: str
    x: float
    y1: float
    y2: float
    passed: tuple[float, ...]


@dataclass(frozen=True, slots=True)
class Dot:
    """Where a part meets a node."""

    part: str
    node: str
    x: float
    y: float


@dataclass(frozen=True, slots=True)
class Symbol:
    """A part's symbol on its conductor; ``down``: its plus end is above."""

    part: Drawn
    x: float
    y: float
    down: bool


@dataclass(frozen=True, slots=True)
class Box:
    """A part with several leads."""

    part: str
    x1: float
    y1: float
    x2: float
    y2: float


@dataclass(frozen=True, slots=True)
class Arrow:
    """A current's direction, on a part's conductor."""

    part: str
    x: float
    y: float
    down: bool


@dataclass(slots=True)
class Layout:
    """Everything that is drawn."""

    width: float = 0.0
    height: float = 0.0
    lines: list[Line] = field(default_factory=list)
    leads: list[Lead] = field(default_factory=list)
    dots: list[Dot] = field(default_factory=list)
    symbols: list[Symbol] = field(default_factory=list)
    boxes: list[Box] = field(default_factory=list)
    arrows: list[Arrow] = field(default_factory=list)
    labels: list[Label] = field(default_factory=list)
