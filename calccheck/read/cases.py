"""Named cases of a circuit: ``case hot: Rt = 3.3 kΩ; Q1 beta 80``. Read and kept; this version solves none."""

from __future__ import annotations

import re
from collections.abc import Collection
from dataclasses import dataclass

from calccheck.arithmetic import Doubt
from calccheck.component_code import component_code
from calccheck.read.expression import parse
from calccheck.read.names import NOT_FOR_PARTS, WORD, plain_name
from calccheck.source import Piece, Span

_FORM = "case NAME: Rt = 3.3 kΩ; RL open"
_CASE = re.compile(r"case\b\s*(?P<name>[^:]*?)\s*:\s*(?P<changes>.+)", re.DOTALL)
_NAME = re.compile(r"[^\W_]\w*(?:\s+\w+)*")
_CHANGE = re.compile(
    rf"(?P<part>{WORD})(?:\s*=\s*(?P<value>\S.*)|\s+(?:open|shorted)|\s+(?P<word>[^\W\d]\w*)\s+(?P<number>\S.*))",
    re.DOTALL,
)


@dataclass(frozen=True, slots=True)
class Case:
    """A named case: its changes as written, one after the other."""

    name: str
    changes: tuple[Piece, ...]
    span: Span


def read_case(body: Piece, parts: Collection[str], complete: bool) -> Case:
    """A ``case`` statement. Raises ``Doubt`` where it is not of the form, or, when ``complete``, changes no part of ``parts``."""
    m = _CASE.fullmatch(body.text)
    if m is None or not _NAME.fullmatch(m["name"]):
        raise Doubt(f"expected {_FORM}, found {body.text}", body.span())
    name = " ".join(m["name"].split())
    if name in NOT_FOR_PARTS:
        raise Doubt(f"{name} is a word of the language; a case is called otherwise", body.span(*m.span("name")))
    changes = tuple(_pieces(body.part(*m.span("changes"))))
    for change in changes:
        _check(change, parts, complete)
    return Case(name, changes, body.span())


def _pieces(piece: Piece) -> list[Piece]:
    return [piece.part(*m.span()).strip() for m in re.finditer(r"[^;]+", piece.text) if m[0].strip()]


def _check(change: Piece, parts: Collection[str], complete: bool) -> None:
    m = _CHANGE.fullmatch(change.text)
    if m is None:
        raise Doubt(
            f"expected a change such as Rt = 3.3 kΩ, Rt open, Rt shorted or Q1 beta 80, found {change.text}",
            change.span(),
        )
    if complete and plain_name(m["part"]) not in parts:
        raise Doubt(f"this circuit has no part {m['part']}", change.span(*m.span("part")))
    value = "value" if m["value"] else "number" if m["number"] else ""
    if value and component_code(m[value]) is None:
        parse(change.part(*m.span(value)))
