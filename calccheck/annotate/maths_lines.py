r"""Lines of working and of dollar maths, as the outputs that set formulas need them: which members stand on which line."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence

from calccheck.annotate.places import Places, marks_in, runs
from calccheck.annotate.record import Entry
from calccheck.formula import Group, Reference
from calccheck.model import Judged, Member
from calccheck.source import NOWHERE, Piece

_MARKUP = re.compile(r"\s*\\(?:begin|end)\{\w+\*?\}\s*")  # of rows of dollar maths
_WORDS = re.compile(r"\\text\{([^{}]*)\}")  # the words behind a quantity in dollar maths


def without_markup(where: Places, lines: Sequence[Piece]) -> list[tuple[Piece, list[Entry]]]:
    """Lines with their marks; those of lines that hold nothing but markup go to the line before."""
    kept: list[tuple[Piece, list[Entry]]] = []
    for line in lines:
        if not _MARKUP.fullmatch(line.text):
            kept.append((line, marks_in(where, [line])))
        elif kept:
            kept[-1][1].extend(marks_in(where, [line]))
    return kept


def one_claim(
    where: Places, judged: Mapping[str, Judged], piece: Piece
) -> tuple[Entry, tuple[Member, ...], tuple[Entry, ...]] | None:
    """Of dollar maths within a line that is one claim: its entry, its members, the entries whose marks stand behind it."""
    found = runs(where, piece)
    entry = found[0].entry if len(found) == 1 else None
    members = judged[entry.key].claim.members if entry is not None and entry.key in judged else ()
    return (entry, members, found[0].ends) if entry is not None and members else None


def places_of(line: Piece) -> list[int]:
    """Where the characters of a line stand in the sheet."""
    return [at for at in line.at[: len(line.text)] if at != NOWHERE]


def members_on(line: Piece, judged: Judged) -> list[Member]:
    """The members of a claim that begin on a line."""
    on = places_of(line)
    return [m for m in judged.claim.members if on and on[0] <= m.span.start <= on[-1]]


def is_bracket(node: Group, sheet: str) -> bool:
    r"""Whether a group stands in brackets in the sheet: the bar of ``\frac`` groups without any."""
    return not sheet.startswith(("\\frac", "\\dfrac", "\\tfrac", "\\cfrac"), node.span.start)


def around_name(node: Reference) -> tuple[str, str]:
    """The words before a name (``max``) and behind it (``due to Vb``)."""
    before, _, behind = node.text.partition(node.word)
    if node.maths:
        before, behind = node.prefix, " ".join(_WORDS.findall(node.text))
    return " ".join(before.split()), " ".join(behind.split())
