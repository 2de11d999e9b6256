"""One line of a circuit block that states a part: its name, what it is, its nodes, its attributes."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from fractions import Fraction

from calccheck.arithmetic import Doubt
from calccheck.model import Kind, Rating
from calccheck.read.attributes import is_drift, is_rating, is_tolerance, read_frequency, read_rating, split_tolerance
from calccheck.read.model_values import ModelValue, read_model_value
from calccheck.read.names import NODE, WORD, plain_name
from calccheck.source import Piece, Span
from calccheck.units import NONE, VOLT, Dimension, words

LONGEST_LINE = 2000  # characters; keeps the work on a line within bounds


@dataclass(frozen=True, slots=True)
class Shape:
    """What may stand behind the word that tells a part's kind. ``None`` for parts that are told by their unit.

    ``pairs``: how often ``NODE to NODE`` stands. ``values``: words with a value, of what dimension; ``needed``: those of them
    that must stand. ``together``: a flag and the value that it comes with.
    """

    kind: Kind | None
    form: str
    pairs: int = 0
    terminals: tuple[str, ...] = ()
    values: Mapping[str, Dimension] = field(default_factory=dict)
    needed: tuple[str, ...] = ()
    flags: tuple[str, ...] = ()


_PLAIN = Shape(None, "NAME: VALUE, NODE to NODE", pairs=1)
_TRANSISTOR = Shape(
    "transistor", "Q1: npn, base b, collector c, emitter e, V_BE 0.65 V, beta 150", terminals=("base", "collector", "emitter"),
    values={"V_BE": VOLT, "beta": NONE, "V_CE": VOLT}, needed=("V_BE", "beta"), flags=("saturated",),
)  # fmt: skip
SHAPES: dict[str, Shape] = {
    "short": Shape("short", "NAME: short, NODE to NODE", pairs=1),
    "open": Shape("open", "NAME: open, NODE to NODE", pairs=1),
    "op-amp": Shape(
        "op-amp", "U1: op-amp, plus p, minus m, out o", terminals=("plus", "minus", "out"), values={"swing": VOLT}
    ),
    "transformer": Shape("transformer", "T1: transformer 10:1, a to b, c to d", pairs=2),
    "npn": _TRANSISTOR,
    "pnp": _TRANSISTOR,
    "diode": Shape(
        "diode", "D1: diode, a to k, drop 0.6 V", pairs=1, values={"drop": VOLT}, needed=("drop",), flags=("blocking",)
    ),
}

_HEAD = re.compile(r"(?P<name>[^:,]*?)\s*:\s*(?P<rest>.*)", re.DOTALL)
_WORD = re.compile(WORD)
_PAIR = re.compile(rf"({NODE})\s+to\s+({NODE})")
_KIND = re.compile(r"(op-amp|[a-z]+)(?![\w-])")
_RATIO = re.compile(r"transformer\s+(\d{1,9}(?:\.\d{1,9})?)\s*:\s*(\d{1,9}(?:\.\d{1,9})?)")
_ATTRIBUTE = re.compile(r"(?P<word>[^\W\d]\w*)(?:\s+(?P<rest>.*))?", re.DOTALL)
_NODE = re.compile(NODE)


@dataclass(slots=True)
class PartLine:
    """A part's line as split.

    ``line``: all of it; ``body``: what of it stands before a comment; ``what``: the part's value or kind as written, without
    the tolerance; ``nodes``: in the order in which they stand; ``drift``: a second tolerance, where one of the two is by the
    kelvin; ``values``, ``flags``: of a part that is told by a word.
    """

    name: str
    name_span: Span
    line: Piece
    body: Piece
    what: Piece
    shape: Shape
    nodes: list[tuple[str, Span]] = field(default_factory=list)
    terminals: list[tuple[str, str]] = field(default_factory=list)
    tolerance: Piece | None = None
    drift: Piece | None = None
    ratings: list[Rating] = field(default_factory=list)
    values: dict[str, ModelValue] = field(default_factory=dict)
    flags: set[str] = field(default_factory=set)
    frequency: Piece | None = None
    hertz: Fraction | None = None

    @property
    def ends(self) -> tuple[str, str]:
        """The two nodes of a part that lies between two; empty names for a part with more terminals."""
        return (self.nodes[0][0], self.nodes[1][0]) if self.shape.pairs == 1 else ("", "")


def split_line(line: Piece, body: Piece) -> PartLine:
    """A part's line, ``body`` being the line without its comment. Raises ``Doubt`` where it is not of the form."""
    if len(body.text) > LONGEST_LINE:
        raise Doubt(f"longer than {LONGEST_LINE} characters", body.span(0, 40))
    head = _HEAD.fullmatch(body.text)
    if head is None:
        raise Doubt(f"expected {_PLAIN.form}, found no colon behind a name", body.span())
    name = body.part(*head.span("name"))
    if not _WORD.fullmatch(name.text):
        trouble = f"{name.text} is no name" if name.text else "a name is missing"
        raise Doubt(
            f"{trouble}; a part's name is a letter, then letters, digits and _", (name if name.text else body).span()
        )
    segments = _segments(body.part(head.start("rest"), len(body.text)))
    what, tolerance = split_tolerance(segments[0])
    shape = _shape(what)
    part = PartLine(plain_name(name.text), name.span(), line, body, what, shape, tolerance=tolerance)
    if not what.text:
        raise Doubt(f"{part.name} has no value; expected {shape.form}", body.span())
    _read_segments(part, segments[1:])
    if tolerance is not None and shape.kind:
        raise Doubt(f"a tolerance belongs behind a value, not behind {what.text}", tolerance.span())
    return part


def _segments(piece: Piece) -> list[Piece]:
    """The parts between commas outside all brackets. A comma at the very end parts nothing."""
    found: list[Piece] = []
    opened: list[int] = []
    start = 0
    for m in re.finditer(r"[,(){}\[\]]", piece.text):
        if m[0] in "({[":
            opened.append(m.start())
        elif m[0] != ",":
            if not opened:
                raise Doubt(f"nothing opens this {m[0]}", piece.span(m.start(), m.end()))
            opened.pop()
        elif not opened:
            found.append(piece.part(start, m.start()).strip())
            start = m.end()
    if opened:
        raise Doubt(f"nothing closes this {piece.text[opened[0]]}", piece.span(opened[0], opened[0] + 1))
    last = piece.part(start, len(piece.text)).strip()
    return [*found, last] if last.text or not found else found


def _shape(what: Piece) -> Shape:
    m = _KIND.match(what.text)
    shape = SHAPES.get(m[1], _PLAIN) if m else _PLAIN
    if shape.kind == "transformer" and not turns_ratio(what.text):
        raise Doubt(f"expected transformer 10:1, found {what.text}", what.span())
    if shape.kind not in (None, "transformer") and m and m.end() < len(what.text):
        rest = what.part(m.end(), len(what.text)).strip()
        raise Doubt(f"expected a comma behind {m[1]}, found {rest.text}", rest.span())
    return shape


def turns_ratio(text: str) -> Fraction:
    """The turns of the first pair over those of the second in ``transformer 10:1``; 0 for any other text."""
    m = _RATIO.fullmatch(text)
    return Fraction(m[1]) / Fraction(m[2]) if m and Fraction(m[2]) else Fraction(0)


def _read_segments(part: PartLine, segments: list[Piece]) -> None:
    shape, seen = part.shape, set[str]()
    for before, segment in zip([part.what, *segments], segments, strict=False):
        pair = _PAIR.fullmatch(segment.text)
        if pair and len(part.nodes) < 2 * shape.pairs:
            _add_pair(part, segment, pair)
        elif is_rating(segment):
            _add_rating(part, segment)
        elif not shape.kind and is_tolerance(segment):
            _add_tolerance(part, segment)
        elif shape.kind and _by_word(part, segment, seen):
            continue
        elif not shape.kind and len(part.nodes) == 2 and not part.frequency and (hertz := read_frequency(segment)):
            part.frequency, part.hertz = segment, hertz
        else:
            raise _unexpected(part, before, segment)
    missing = [word for word in (*shape.terminals, *shape.needed) if word not in seen]
    if len(part.nodes) < 2 * shape.pairs:
        missing.append("NODE to NODE")
    if ("saturated" in seen) != ("V_CE" in seen):
        missing.append("saturated and V_CE together")
    if missing:
        raise Doubt(f"{part.name} lacks {', '.join(missing)}; expected {shape.form}", part.body.span())


def _unexpected(part: PartLine, before: Piece, segment: Piece) -> Doubt:
    if before.text[-1:].isdigit() and segment.text[:1].isdigit():
        return Doubt("a comma between digits; a number is written with a point and without groups", segment.span())
    if len(part.nodes) < 2 * part.shape.pairs:
        return Doubt(f"expected NODE to NODE, found {segment.text or 'nothing between two commas'}", segment.span())
    known = (
        "a tolerance, a rating (max 0.25 W) or a source's frequency (50 Hz)" if not part.shape.kind else part.shape.form
    )
    return Doubt(f"expected {known}, found {segment.text or 'nothing between two commas'}", segment.span())


def _add_pair(part: PartLine, segment: Piece, pair: re.Match[str]) -> None:
    ends = [(plain_name(pair[k]), segment.span(*pair.span(k))) for k in (1, 2)]
    if ends[0][0] == ends[1][0]:
        raise Doubt(f"both ends of {part.name} lie at {ends[0][0]}", segment.span())
    if part.shape.kind == "transformer":
        side = "second" if part.nodes else "first"
        part.terminals += [(f"{side}{end}", name) for end, (name, _) in zip("+-", ends, strict=True)]
    part.nodes += ends


def _add_rating(part: PartLine, segment: Piece) -> None:
    rating = read_rating(segment)
    if any(r.dimension == rating.dimension for r in part.ratings):
        raise Doubt(f"{part.name} has two ratings for {words(rating.dimension)}", segment.span())
    part.ratings.append(rating)


def _add_tolerance(part: PartLine, segment: Piece) -> None:
    if part.tolerance is None:
        part.tolerance = segment
    elif part.drift is None and is_drift(segment) != is_drift(part.tolerance):
        part.drift = segment
    else:
        raise Doubt(
            f"{part.name} has two tolerances of a kind; one is read, and one by the kelvin beside it", segment.span()
        )


def _by_word(part: PartLine, segment: Piece, seen: set[str]) -> bool:
    """Read a terminal, a value or a flag by its word; false when the segment is none of these."""
    m = _ATTRIBUTE.fullmatch(segment.text)
    word = m["word"] if m else ""
    if m is None or word not in (*part.shape.terminals, *part.shape.values, *part.shape.flags):
        return False
    if word in seen:
        raise Doubt(f"{word} stands twice", segment.span())
    seen.add(word)
    if word in part.shape.flags:
        part.flags.add(word)
        return not m["rest"]
    rest = segment.part(*m.span("rest")) if m["rest"] else segment.part(len(segment.text), len(segment.text))
    if word in part.shape.values:
        part.values[word] = read_model_value(word, rest, part.shape.values[word], segment.span())
    elif _NODE.fullmatch(rest.text):
        part.terminals.append((word, plain_name(rest.text)))
        part.nodes.append((plain_name(rest.text), rest.span()))
    else:
        raise Doubt(f"expected a node behind {word}, found {rest.text or 'nothing'}", segment.span())
    return True
