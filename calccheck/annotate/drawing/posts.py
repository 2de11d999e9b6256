"""The upright conductors of a circuit before they have a place: what they join, and the room that they need."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from calccheck.annotate.drawing.columns import Track, ordered
from calccheck.annotate.drawing.figures import Drawn, Figures, Pin
from calccheck.annotate.drawing.svg import width
from calccheck.annotate.drawing.symbols import ROOM, SYMBOL

ROW = 12.0  # from base line to base line
APART = 3.0  # between a symbol with its words and its current
RIGHT = 6.0  # room behind lettering, before the next column
BOX_EDGE = 12.0  # from a box's outermost lead to its side
_LEAD_LEFT, _LEAD_BEHIND = 14.0, 8.0  # the same for a box's lead as ``symbols.ROOM`` for a symbol
_NARROWEST = 14.0  # right of a box's lead
_OWN_COLUMNS = 540.0  # the width up to which every conductor has a column of its own: lettering of 7 points in 130 mm


@dataclass(frozen=True, slots=True)
class Post:
    """A conductor. ``meets``: the levels that it joins, or of a box's lead the one that it comes from.

    ``pin``: whose current is drawn on it; ``gap``: of the symbol or the box, gap k lying below level k; ``left``, ``need``: room
    to the left and to the right of the conductor; ``behind``: where its lettering begins; ``first``: whether it is its part's
    first; ``down``: whether its plus end is above.
    """

    part: Drawn
    pin: Pin
    meets: tuple[int, ...]
    gap: int
    left: float
    behind: float
    need: float
    first: bool = True
    down: bool = True

    @property
    def gaps(self) -> range:
        """The gaps that it runs through."""
        return range(min(*self.meets, self.gap), max(max(self.meets) - 1, self.gap) + 1)

    @property
    def passes(self) -> tuple[int, ...]:
        """The levels that it runs past."""
        inner = range(self.gaps.start + 1, self.gaps.stop)
        return tuple(level for level in inner if level not in self.meets)


def posts(f: Figures) -> list[Post]:
    """All conductors from left to right."""
    level = {n: k for k, n in enumerate(f.nodes)}
    found = [_upright(p, level) if p.upright else _leads(p, level) for p in f.parts]
    shapes = [tuple(Track(post.meets, post.passes) for post in part) for part in found]
    sources = [k for k, p in enumerate(f.parts) if p.element.is_source]
    return [post for k in ordered(shapes, len(level), sources) for post in found[k]]


def flow_lines(pin: Pin) -> tuple[str, ...]:
    """What is lettered of a pin's current."""
    return pin.flow.lines if pin.flow else ()


def _upright(part: Drawn, level: Mapping[str, int]) -> tuple[Post, ...]:
    plus, minus = (level[pin.node] for pin in part.pins)
    top, bottom = min(plus, minus), max(plus, minus)
    texts = (part.name, *part.lines, *flow_lines(part.pins[0]))
    left, behind = ROOM[part.element.kind]
    need = behind + max(map(width, texts))
    return (Post(part, part.pins[0], (top, bottom), (top + bottom - 1) // 2, left, behind, need, down=plus < minus),)


def _leads(part: Drawn, level: Mapping[str, int]) -> tuple[Post, ...]:
    levels = [level[pin.node] for pin in part.pins]
    gap = _box_gap(levels, len(level))
    needs = [max(_NARROWEST, _LEAD_BEHIND + max(map(width, flow_lines(pin)), default=0.0)) for pin in part.pins]
    between = sum(needs[:-1]) + (len(needs) - 1) * (RIGHT + _LEAD_LEFT)
    needs[-1] = max(needs[-1], box_width(part) - BOX_EDGE - between)
    return tuple(
        Post(part, pin, (n,), gap, _LEAD_LEFT, _LEAD_BEHIND, need, first=k == 0)
        for k, (pin, n, need) in enumerate(zip(part.pins, levels, needs, strict=True))
    )


def _box_gap(levels: Sequence[int], count: int) -> int:
    """The gap that parts a box's leads as evenly as can be into those that rise and those that fall."""
    rank = sorted(levels)
    splits = [k for k in range(1, len(rank)) if rank[k] > rank[k - 1]]
    if not splits:
        return max(0, min(rank[0], count - 1) - 1)
    k = min(splits, key=lambda k: abs(2 * k - len(rank)))
    return (rank[k - 1] + rank[k] - 1) // 2


# --- room -----------------------------------------------------------------------------------------------------------


def box_width(part: Drawn) -> float:
    """The least width of a box: that of its lettering."""
    return max(map(width, (part.name, *part.lines))) + 12.0


def box_height(part: Drawn) -> float:
    """A row for the pins above, the name, the value, a row for the pins below."""
    return ROW * (3 + len(part.lines)) + 4.0


def leads_height(part: Drawn) -> float:
    """The height of the currents above a box, and below it."""
    return ROW * max(1, *(len(flow_lines(pin)) for pin in part.pins)) + 4.0


def words_height(part: Drawn) -> float:
    """The height of a part's name and value."""
    return ROW * (1 + len(part.lines))


def block_height(post: Post) -> float:
    """The height that a part needs in its gap."""
    if post.part.upright:
        return max(SYMBOL, words_height(post.part)) + APART + ROW * max(1, len(flow_lines(post.pin)))
    return box_height(post.part) + 2 * leads_height(post.part)


def columns(row: Sequence[Post]) -> list[int]:
    """The column of each conductor: one of its own, or in a wide circuit with a neighbour that stands above or below it."""
    own = list(range(len(row)))
    if sum(post.left + post.need + RIGHT for post in row) <= _OWN_COLUMNS:
        return own
    found: list[int] = []
    taken: set[int] = set()
    for post in row:
        gaps = set(post.gaps)
        if found and post.part.upright and taken and not taken & gaps:
            found.append(found[-1])
            taken |= gaps
        else:
            found.append(found[-1] + 1 if found else 0)
            taken = gaps if post.part.upright else set()
    return found
