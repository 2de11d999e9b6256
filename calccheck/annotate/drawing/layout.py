"""Where everything of a drawing stands.

Each node is a horizontal line on a level of its own; between two neighbouring levels lies a gap. All lettering of a part stands
in the column of its conductor, in the gap of its symbol; a node's lettering stands in the strip above its line, where no
conductor runs. So no two can meet.
"""

from __future__ import annotations

from collections.abc import Sequence

from calccheck.annotate.drawing.figures import Figures
from calccheck.annotate.drawing.placed import Arrow, Box, Dot, Label, Layout, Lead, Line, Symbol
from calccheck.annotate.drawing.posts import (
    APART,
    BOX_EDGE,
    RIGHT,
    ROW,
    Post,
    block_height,
    box_height,
    box_width,
    columns,
    flow_lines,
    leads_height,
    posts,
    words_height,
)
from calccheck.annotate.drawing.svg import SIZE, ascent, width
from calccheck.annotate.drawing.symbols import SYMBOL

_EDGE = 6.0  # round the whole
_ABOVE, _STRIP = 10.0, 15.0  # of a gap: below its upper line; above its lower line, for the node's lettering
_STUB = 8.0  # how far a line runs beyond its outermost parts
_PAD = 5.0  # between a conductor and a node's lettering


def layout(f: Figures) -> Layout:
    """The places of everything."""
    row = posts(f)
    made = Layout()
    xs = _across(row, columns(row), f, made)
    ys = _down(row, len(f.nodes), made)
    _node_lines(row, xs, ys, f, made)
    for k, (post, x) in enumerate(zip(row, xs, strict=True)):
        made.dots += [Dot(post.part.element.name, f.nodes[n], x, ys[n]) for n in post.meets]
        if post.part.upright:
            _upright(post, x, ys, made)
        else:
            _lead(post, x, ys, made)
            if post.first:
                _box(post, x, xs[k + len(post.part.pins) - 1], ys, made)
    return made


# --- places ---------------------------------------------------------------------------------------------------------


def _across(row: Sequence[Post], column: Sequence[int], f: Figures, made: Layout) -> list[float]:
    """The x of every conductor: columns as wide as their lettering and that of the nodes that begin or end in them."""
    count = column[-1] + 1 if column else 0
    left, need = [0.0] * count, [0.0] * count
    covered: list[set[int]] = [set() for _ in range(count)]
    for post, c in zip(row, column, strict=True):
        left[c], need[c] = max(left[c], post.left), max(need[c], post.need)
        covered[c] |= set(post.gaps)
    for n, node in enumerate(f.nodes):
        met = [c for post, c in zip(row, column, strict=True) if n in post.meets]
        _make_room(n, min(met), max(met), width(f.names[node]), width(f.potentials.get(node, "")), left, need, covered)
    at, x = [], _EDGE
    for c in range(count):
        at.append(x + left[c])
        x += left[c] + need[c] + RIGHT
    made.width = max(x, *(at[c] + need[c] for c in column), 0.0) + _EDGE
    return [at[c] for c in column]


def _make_room(
    n: int,
    first: int,
    last: int,
    name: float,
    end: float,
    left: Sequence[float],
    need: list[float],
    covered: Sequence[set[int]],
) -> None:
    """Widen columns for a node's name, which begins in the first, up to the next conductor that rises from its line."""
    if first == last:
        need[first] = max(need[first], _PAD + name + (SIZE + end if end else 0.0))
        return
    need[last] = max(need[last], _PAD + end)
    room = need[first]
    for c in range(first + 1, last):
        if n - 1 in covered[c]:
            break
        room += RIGHT + left[c] + need[c]
    need[first] += max(0.0, _PAD + name - room)


def _down(row: Sequence[Post], levels: int, made: Layout) -> list[float]:
    """The y of every level, and of one more where there is only one."""
    heights = [ROW] * max(1, levels - 1)
    for post in row:
        heights[post.gap] = max(heights[post.gap], block_height(post))
    ys = [_EDGE + _STRIP]
    for height in heights:
        ys.append(ys[-1] + _ABOVE + height + _STRIP)
    made.height = ys[-1] + _EDGE
    return ys


def _node_lines(row: Sequence[Post], xs: Sequence[float], ys: Sequence[float], f: Figures, made: Layout) -> None:
    for n, node in enumerate(f.nodes):
        met = [x for post, x in zip(row, xs, strict=True) if n in post.meets]
        first, last, y = min(met), max(met), ys[n]
        name, end = f.names[node], f.potentials.get(node, "")
        made.labels.append(Label(first + _PAD, y - 4.0, name, bold=True))
        beyond = first + _PAD + width(name) if first == last else last + _STUB
        if end:
            start = beyond + SIZE if first == last else last + _PAD
            made.labels.append(Label(start, y - 4.0, end))
            beyond = start + width(end)
        made.lines.append(Line(node, y, first - _STUB, beyond))


# --- parts ----------------------------------------------------------------------------------------------------------


def _zone(post: Post, ys: Sequence[float]) -> tuple[float, float]:
    """Where a part may stand in its gap."""
    return ys[post.gap] + _ABOVE, ys[post.gap + 1] - _STRIP


def _stretch(post: Post, x: float, y1: float, y2: float, ys: Sequence[float], made: Layout) -> None:
    """A piece of conductor; it passes the lines that run across its place and that it does not meet."""
    crossed = {line.y for line in made.lines if line.x1 < x < line.x2}
    passed = tuple(ys[n] for n in post.passes if ys[n] in crossed and y1 < ys[n] < y2)
    made.leads.append(Lead(post.part.element.name, x, y1, y2, passed))


def _upright(post: Post, x: float, ys: Sequence[float], made: Layout) -> None:
    part, (top, bottom) = post.part, post.meets
    above, below = _zone(post, ys)
    start = (above + below - block_height(post)) / 2
    words = words_height(part)
    inner = max(SYMBOL, words)
    y1 = start + (inner - SYMBOL) / 2
    made.symbols.append(Symbol(part, x, y1, post.down))
    _stretch(post, x, ys[top], y1, ys, made)
    _stretch(post, x, y1 + SYMBOL, ys[bottom], ys, made)
    y = start + (inner - words) / 2 + ascent()
    for k, line in enumerate((part.name, *part.lines)):
        made.labels.append(Label(x + post.behind, y + k * ROW, line, bold=k == 0))
    _flow(post, x, start + inner + APART, post.down, made)


def _flow(post: Post, x: float, y: float, inward_down: bool, made: Layout) -> None:
    """A current's arrow on its conductor and its words beside it, ``y`` being the top of its rows."""
    pin = post.pin
    for k, line in enumerate(flow_lines(pin)):
        made.labels.append(Label(x + post.behind, y + k * ROW + ascent(), line))
    if pin.flow and pin.flow.sign:
        made.arrows.append(Arrow(post.part.element.name, x, y + ROW / 2, inward_down == (pin.flow.sign > 0)))


def _box_sides(post: Post, ys: Sequence[float]) -> tuple[float, float]:
    above, below = _zone(post, ys)
    y1 = (above + below - box_height(post.part)) / 2
    return y1, y1 + box_height(post.part)


def _box(post: Post, first: float, last: float, ys: Sequence[float], made: Layout) -> None:
    part = post.part
    y1, y2 = _box_sides(post, ys)
    x1 = first - BOX_EDGE
    x2 = max(last + BOX_EDGE, x1 + box_width(part))
    made.boxes.append(Box(part.element.name, x1, y1, x2, y2))
    for k, line in enumerate((part.name, *part.lines)):
        made.labels.append(Label((x1 + x2) / 2, y1 + 2.0 + ROW * (k + 1) + ascent(), line, k == 0, "middle"))


def _lead(post: Post, x: float, ys: Sequence[float], made: Layout) -> None:
    """A box's lead, up or down to its node, its pin lettered inside the box."""
    y1, y2 = _box_sides(post, ys)
    (n,) = post.meets
    rises = n <= post.gap
    if rises:
        _stretch(post, x, ys[n], y1, ys, made)
    else:
        _stretch(post, x, y2, ys[n], ys, made)
    made.labels.append(Label(x, (y1 + 2.0 if rises else y2 - ROW) + ascent(), post.pin.word, False, "middle"))
    _flow(post, x, y1 - leads_height(post.part) if rises else y2 + 3.0, rises, made)
