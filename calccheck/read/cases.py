"""Named cases of a circuit: ``case hot: Rt = 3.3 kΩ; Q1 beta 80``."""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import cast

from calccheck.arithmetic import Amount, Doubt
from calccheck.formula import Change, ChangeKind, Node
from calccheck.model import Case, Element
from calccheck.read.closed_formulas import number_node
from calccheck.read.expression import parse_qualifiers
from calccheck.read.model_values import read_model_value
from calccheck.read.names import NOT_FOR_PARTS, WORD, listed, nearest, plain_name
from calccheck.read.part_lines import PartLine
from calccheck.read.part_values import SOURCES, read_value, write
from calccheck.read.value_names import Scope
from calccheck.source import Piece, whole
from calccheck.units import words

_FORM = "case NAME: Rt = 3.3 kΩ; RL open"
_CASE = re.compile(r"case\b\s*(?P<name>[^:]*?)\s*:\s*(?P<changes>.+)", re.DOTALL)
_NAME = re.compile(r"[^\W_]\w*(?:\s+\w+)*")
_CHANGE = re.compile(
    rf"(?P<part>{WORD})(?:\s*=\s*(?P<value>\S.*)|\s+(?P<how>open|shorted)|\s+(?P<word>[^\W\d]\w*)\s+(?P<number>\S.*))",
    re.DOTALL,
)
_LIKE_RESISTORS = ("resistor", "impedance", "short", "open")


def read_case(body: Piece, elements: Mapping[str, Element], scope: Scope, complete: bool) -> Case:
    """A ``case`` statement.

    Raises ``Doubt`` or ``DimensionFault`` where it is not of the form or a change makes no sense. A change of a part whose line
    could not be read is left out, as is, unless ``complete``, one of a part that the circuit does not have.
    """
    m = _CASE.fullmatch(body.text)
    if m is None or not _NAME.fullmatch(m["name"]):
        raise Doubt(f"expected {_FORM}, found {body.text}", body.span())
    name = _name(body.part(*m.span("name")))
    changes: dict[tuple[str, str], Change] = {}
    for piece in _pieces(body.part(*m.span("changes"))):
        change = _change(piece, elements, scope, complete)
        if change is None:
            continue
        key = (change.part, change.what if change.what in ("beta", "V_BE", "V_CE", "drop") else "")
        if key in changes:
            raise Doubt(f"{change.part} changes twice in this case", piece.span())
        changes[key] = change
    return Case(name, tuple(changes.values()), body.span())


def _name(piece: Piece) -> str:
    """The case's name as ``in case NAME`` will be read."""
    name = " ".join(piece.text.split())
    try:
        read = "" if name in NOT_FOR_PARTS else parse_qualifiers(whole(f"in case {name}")).case
    except Doubt:
        read = ""
    if read != name:
        raise Doubt(f"{name} has a word of the language in it; a case is called otherwise", piece.span())
    return name


def _pieces(piece: Piece) -> list[Piece]:
    return [piece.part(*m.span()).strip() for m in re.finditer(r"[^;]+", piece.text) if m[0].strip()]


def _change(piece: Piece, elements: Mapping[str, Element], scope: Scope, complete: bool) -> Change | None:
    m = _CHANGE.fullmatch(piece.text)
    if m is None:
        reason = "expected a change such as Rt = 3.3 kΩ, Rt open, Rt shorted or Q1 beta 80"
        raise Doubt(f"{reason}, found {piece.text}", piece.span())
    name = plain_name(m["part"])
    if complete and name not in scope.parts:
        near = nearest(name, scope.parts)
        hint = f"; is {near} meant?" if near else ""
        raise Doubt(f"this circuit has no part {name}{hint}", piece.span(*m.span("part")))
    element = elements.get(name)
    if element is None:
        return None
    if m["word"]:
        return _of_model(piece, m, element, scope.parts[name])
    if element.device is not None and element.kind != "diode":
        raise Doubt(f"{name} has several terminals; {_changeable(scope.parts[name])}", piece.span())
    if m["how"]:
        return Change(name, "open" if m["how"] == "open" else "shorted", piece.span())
    return Change(name, "as", piece.span(), _value(piece.part(*m.span("value")), element, scope))


def _value(what: Piece, element: Element, scope: Scope) -> Node:
    """The value that a part takes."""
    if element.control is not None or element.device is not None:
        kind = "controlled source" if element.control else element.kind
        raise Doubt(f"{element.name} is {_article(kind)}; a value cannot take its place", what.span())
    written = write(what, element.name, scope)
    unknown = [s for s in written.symbols if s not in scope.symbols]
    if unknown:
        raise Doubt(f"{unknown[0]} has no value and is no free symbol of this circuit's parts", what.span())
    value = read_value(written, scope)
    fits = value.kind in _LIKE_RESISTORS if element.kind in _LIKE_RESISTORS else value.kind == element.kind
    if not fits or value.control is not None:
        found = "a controlled source" if value.control is not None else words(value.dimension)
        raise Doubt(f"{element.name} is {_article(element.kind)}; {found} cannot take its place", what.span())
    if value.alternating and element.kind in SOURCES and element.frequency is None:
        raise Doubt(f"{element.name} is a source at DC; a phasor cannot take its place", what.span())
    return value.node


def _of_model(piece: Piece, m: re.Match[str], element: Element, part: PartLine) -> Change:
    """``Q1 beta 80``."""
    word = m["word"]
    if word == "swing" or word not in part.shape.values:
        raise Doubt(f"no {word} of {element.name} can change; {_changeable(part)}", piece.span(*m.span("word")))
    if word == "V_CE" and "saturated" not in part.flags:
        raise Doubt(f"{element.name} is not saturated and has no V_CE", piece.span(*m.span("word")))
    value = read_model_value(word, piece.part(*m.span("number")), part.shape.values[word], piece.span())
    if value.tolerance is not None:
        raise Doubt("a value in a case has no tolerance of its own", value.tolerance.span)
    node = number_node(Amount(value.value, part.shape.values[word]), piece.span(*m.span("number")))
    return Change(element.name, cast(ChangeKind, word), piece.span(), node)


def _changeable(part: PartLine) -> str:
    """What a case can change of a part."""
    model_words = [w for w in part.shape.values if w != "swing"]
    if model_words:
        return f"a case changes its {listed(model_words, 'or')}"
    several = part.shape.terminals or part.shape.pairs > 1
    return f"a case changes nothing of {part.what.text}" if several else "a case changes its value"


def _article(kind: str) -> str:
    return f"an {kind}" if kind[0] in "aeiou" else f"a {kind}"
