"""The names in a circuit block: what a name may look like, and which names stand in each other's way."""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable, Sequence
from dataclasses import dataclass

from calccheck.model import Finding
from calccheck.read.tokens import SUPERSCRIPTS
from calccheck.read.words import RESERVED
from calccheck.rules import RULES
from calccheck.source import Piece, Sheet, Span
from calccheck.units import AMPERE, FARAD, HENRY, LOOKALIKES, OHM, SIEMENS, VOLT, Dimension

_IN_WORD = rf"[^\W{SUPERSCRIPTS}]"
WORD = rf"[^\W\d_{SUPERSCRIPTS}]{_IN_WORD}*[′″']*"
NODE = rf"(?!to\b)[+\-−]?{_IN_WORD}+[′″']*"
_QUANTITY = re.compile(r"(?:V|I|P|Isc)_")
_ORDINAL = re.compile(r"(.*?)_?(\d*)")
_MANY = 200
NOT_FOR_PARTS = RESERVED | {"π"}

# First letter and unit by the custom of the trade (common practice). A letter with two small ones behind it begins a word
# (Lamp, Cable, Relay) and promises nothing.
_CUSTOM: dict[str, tuple[Dimension, ...]] = {
    "R": (OHM, SIEMENS), "C": (FARAD,), "L": (HENRY,), "V": (VOLT,), "I": (AMPERE,),
}  # fmt: skip
_BY_CUSTOM = re.compile(r"[RCLVI](?![a-z]{2})")


@dataclass(frozen=True, slots=True)
class Named:
    """A name and its first place; ``line``: of a part, its whole line."""

    name: str
    span: Span
    line: Piece | None = None


def plain_name(text: str) -> str:
    """A name with look-alike characters read as what they look like."""
    return text.translate(LOOKALIKES)


def reads_as_quantity(name: str) -> bool:
    """Whether a name looks like a voltage, current or power: ``V_x``."""
    return _QUANTITY.match(name) is not None


def listed(names: Sequence[str], joint: str = "and") -> str:
    """``a, b and c``."""
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} {joint} {names[-1]}"


def nearest(name: str, known: Collection[str]) -> str:
    """The known name that looks most like a mistyped one; empty where none does, and among too many to look through."""
    from difflib import get_close_matches  # late: only for a name that is unknown

    near = get_close_matches(name, list(known), 1) if len(known) <= _MANY else []
    return near[0] if near else ""


def customary(name: str) -> tuple[Dimension, ...]:
    """The dimensions that a part's first letter promises; none when it promises nothing."""
    return _CUSTOM[name[0]] if _BY_CUSTOM.match(name) else ()


def check_names(
    parts: Sequence[Named], nodes: Sequence[Named], symbols: Sequence[Named], sheet: Sheet
) -> list[Finding]:
    """Names that are not allowed, used twice, or differ only in case.

    Each spelling of a node or free symbol stands once. Symbols are held against each other only.
    """
    first_node = {n.name: n for n in nodes}
    first_part: dict[str, Named] = {}
    used = {n.name for n in (*parts, *nodes)}
    found: list[Finding] = []
    for part in parts:
        fault = _fault(part, first_part.get(part.name), first_node.get(part.name), sheet)
        if fault:
            found.append(_finding(part, fault, used))
        first_part.setdefault(part.name, part)
    return found + _differing_in_case((*first_part.values(), *nodes), sheet) + _differing_in_case(symbols, sheet)


def _fault(part: Named, other: Named | None, node: Named | None, sheet: Sheet) -> str:
    """Why a part may not be called so; empty when it may."""
    if part.name in NOT_FOR_PARTS:
        return f"{part.name} is a word of the language; a part is called otherwise"
    if reads_as_quantity(part.name):
        return f"{part.name} reads as a quantity; a part is called otherwise"
    if other:
        return f"{part.name} names two parts, on lines {_line(other, sheet)} and {_line(part, sheet)}"
    if node:
        return f"{part.name} names a part (line {_line(part, sheet)}) and a node (line {_line(node, sheet)})"
    return ""


def _finding(part: Named, message: str, used: Collection[str]) -> Finding:
    return Finding("circuit-name", RULES["circuit-name"].severity, message, part.span, _renamed(part, used))


def _renamed(part: Named, used: Collection[str]) -> str:
    """The part's line under the next free name: ``V_x`` as ``Vx``, a second ``R1`` as ``R2``."""
    if part.line is None:
        return ""
    name = part.name.replace("_", "", 1) if reads_as_quantity(part.name) else part.name
    m = _ORDINAL.fullmatch(name)
    stem, number = (m[1], int(m[2] or 0)) if m else (name, 0)
    for _ in range(len(used) + 1):
        if name not in used and name not in NOT_FOR_PARTS and re.fullmatch(WORD, name):
            break
        number += 1
        name = f"{stem}{number}"
    text = part.line.text
    lead = len(text) - len(text.lstrip())
    return text[:lead] + name + text[text.index(":", lead) :].rstrip()


def _differing_in_case(names: Iterable[Named], sheet: Sheet) -> list[Finding]:
    found: list[Finding] = []
    seen: dict[str, Named] = {}
    for named in names:
        first = seen.setdefault(named.name.casefold(), named)
        if first.name != named.name:
            message = f"{first.name} (line {_line(first, sheet)}) and {named.name} differ only in upper and lower case"
            found.append(Finding("letter-case", RULES["letter-case"].severity, message, named.span))
    return found


def _line(named: Named, sheet: Sheet) -> int:
    return sheet.line_column(named.span.start)[0]
