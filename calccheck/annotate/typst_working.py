"""Working as mathematics: each line of a working fence or of display maths as one row, its relations one below the other.

A line whose claim could not be read stands as written, in monospace.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence

from calccheck.annotate.characters import told
from calccheck.annotate.marks import MARKS
from calccheck.annotate.maths_lines import members_on, one_claim, places_of, without_markup
from calccheck.annotate.places import Places, runs
from calccheck.annotate.record import NOTED, Entry
from calccheck.annotate.typst_marks import commented, line_number, mark_source, run_source
from calccheck.annotate.typst_math import mathematics, relation
from calccheck.annotate.typst_text import literal, shown
from calccheck.formula import Reference
from calccheck.model import Judged, Member
from calccheck.source import NOWHERE, Piece, Sheet

_RELATION_AT_END = re.compile(r"\s*(?:[=≈<≤>≥]|~=|<=|>=|&)+\s*$")
_ROW_END = re.compile(r"^\s*\\\\(?:\[[^\]]*\])?\s*$")
_LONGEST_HEAD = 30  # characters
_UNBROKEN = 24  # characters


def math_rows(
    sheet: Sheet, where: Places, judged: Mapping[str, Judged], missing: frozenset[str], lines: Sequence[Piece]
) -> str:
    """Lines as rows of typst's grid ``working``."""
    return "".join(
        _math_row(sheet, where, judged, missing, line, marks) for line, marks in without_markup(where, lines)
    )


def _math_row(
    sheet: Sheet,
    where: Places,
    judged: Mapping[str, Judged],
    missing: frozenset[str],
    line: Piece,
    marks: Sequence[Entry],
) -> str:
    number = literal(line_number(sheet, line))
    owners = {run.entry.key: run.entry for run in runs(where, line) if run.entry is not None}
    entry = next(iter(owners.values()), None)
    members = members_on(line, judged[entry.key]) if entry is not None and entry.key in judged else []
    if entry is None or len(owners) > 1 or not members:
        body = "".join(run_source(run, shown(run.text, missing)) for run in runs(where, line))
        return f'..wide-row({number}, "", [#code[{body}]], []),'
    beside = "".join(mark_source(e) for e in marks) or _step_mark(line, judged[entry.key])
    before, behind = _around(line, members, missing)
    to_mend = [e.key for e in marks if e.to_mend]
    head = members[:1] if _is_head(members[0]) else []
    left = before + formula(sheet, head)
    right = commented(to_mend, formula(sheet, members[len(head) :])) + behind
    if not head and not members[0].relation:
        return f"..wide-row({number}, {literal(entry.kind)}, [{left}{right}], [{beside}]),"
    return f"..formula-row({number}, {literal(entry.kind)}, [{left}], [{right}], [{beside}]),"


def inline_formula(sheet: Sheet, where: Places, judged: Mapping[str, Judged], piece: Piece) -> str:
    """Dollar maths within a line that is one claim as read; nothing where it is not that."""
    read = one_claim(where, judged, piece)
    if read is None:
        return ""
    entry, members, ends = read
    body = commented([e.key for e in ends if e.to_mend], f"#tint({literal(entry.kind)})[{formula(sheet, members)}];")
    return body + "".join(mark_source(e) for e in ends)


def _is_head(member: Member) -> bool:
    """Whether a member stands left of the column of relations: a short name that begins its chain."""
    return not member.relation and isinstance(member.node, Reference) and len(member.text) <= _LONGEST_HEAD


def _around(line: Piece, members: list[Member], missing: frozenset[str]) -> tuple[str, str]:
    """What a line holds before its first member (``given``) and behind its last (a tolerance, a comment)."""
    cut = [k for k, at in enumerate(line.at[: len(line.text)]) if at >= members[0].span.start or at == NOWHERE]
    end = [k for k, at in enumerate(line.at[: len(line.text)]) if at >= members[-1].span.end]
    before = line.text[: cut[0]] if cut else ""
    behind = line.text[end[0] :] if end else ""
    before = _RELATION_AT_END.sub("", before).strip() if members[0].relation else before.strip()
    behind = _ROW_END.sub("", behind).strip()
    return (
        f"{shown(before, missing)}#h(0.4em);" if before else "",
        f"#h(0.8em);#aside[{shown(behind, missing)}];" if behind else "",
    )


def formula(sheet: Sheet, members: Iterable[Member]) -> str:
    """Each member with its relation as one equation, so that a chain breaks before its relations, a short one never within.

    The sheet's own characters are the alternative text.
    """
    return " ".join(_equation(sheet, m) for m in members)


def _equation(sheet: Sheet, m: Member) -> str:
    alt = f"{m.relation} {m.text}".strip()
    source = f"#formula({literal(told(alt))}, ${relation(m.relation)} {mathematics(m.node, sheet.text)}$);"
    return f"#box[{source}];" if len(m.text) <= _UNBROKEN else source


def _step_mark(line: Piece, judged: Judged) -> str:
    """A mark at a step that fails above the line where its chain's own mark stands."""
    on = places_of(line)
    for step in judged.steps:
        if step.verdict in NOTED and step.verdict in MARKS and on[0] <= step.span.start <= on[-1]:
            return f"#step-mark({literal(step.verdict)});"
    return ""
