"""The calc register as text for a terminal, as Markdown for a page, and as JSON for other programs."""

from __future__ import annotations

import json
from collections.abc import Sequence
from datetime import date
from typing import Any

from calccheck.annotate.marks import MARKS
from calccheck.annotate.record import LIMITS
from calccheck.annotate.register import ASSUMED, Remark, Row, Signed
from calccheck.annotate.to_json import SURROGATES
from calccheck.annotate.to_markdown import escaped
from calccheck.annotate.visible import one_line, visible
from calccheck.model import ROLES

FORM = 1  # of the JSON register, described in docs/reviewing.md
_COLUMNS = ("sheet", "rev", "date", "verdict", "claims", "failing", "given", *ROLES, "subject")
_NUMBERS = ("claims", "failing", "given")
_NONE = "-"


def register_text(rows: Sequence[Row], day: date) -> str:
    """The register as a table, then what is to be mended and what is open, each line with its place."""
    table = [_COLUMNS, *(tuple(map(one_line, _cells(row))) for row in rows)]
    widths = [max(len(line[k]) for line in table) for k in range(len(_COLUMNS))]
    lines = [_title(rows, day), "", *(_aligned(line, widths) for line in table)]
    for title, remarks in _lists(rows):
        lines += ["", f"{title}:"]
        lines += [f"{visible(row.path)}:{r.line}: {one_line(r.message)}" for row, r in remarks]
    return "\n".join([*lines, "", LIMITS[-1]]) + "\n"


def _aligned(cells: Sequence[str], widths: Sequence[int]) -> str:
    padded = [
        c.rjust(w) if name in _NUMBERS else c.ljust(w) for c, w, name in zip(cells, widths, _COLUMNS, strict=True)
    ]
    return "  ".join(padded).rstrip()


def register_markdown(rows: Sequence[Row], day: date) -> str:
    """The register as a page: heading, table, two lists."""
    rule = [":---" if name not in _NUMBERS else "---:" for name in _COLUMNS]
    table = [_COLUMNS, rule, *([escaped(one_line(c)) for c in _cells(row)] for row in rows)]
    lines = [f"# {_title(rows, day)}", "", *(f"| {' | '.join(line)} |" for line in table)]
    for title, remarks in _lists(rows):
        lines += ["", f"## {title}", ""]
        lines += [f"- {escaped(_place(row, r))}: {escaped(one_line(r.message))}" for row, r in remarks]
    return "\n".join([*lines, "", LIMITS[-1]]) + "\n"


def _place(row: Row, remark: Remark) -> str:
    return f"{visible(row.number or row.path)}, line {remark.line}"


def _title(rows: Sequence[Row], day: date) -> str:
    return f"Calc register of {len(rows)} sheet{'' if len(rows) == 1 else 's'}, {day.isoformat()}"


def _cells(row: Row) -> tuple[str, ...]:
    failing = row.counts["differs"] + row.counts["unchecked"]
    title = [row.title.get(name, "") or _NONE for name in ("revision", "date", "subject")]
    signed = (_signature(row.signed(role)) for role in ROLES)
    numbers = (str(row.claims), str(failing), str(row.counts["given"]))
    return (row.number or row.path, *title[:2], MARKS[row.verdict].label, *numbers, *signed, title[2])


def _signature(signed: Signed | None) -> str:
    if signed is None:
        return _NONE
    return f"{signed.name} {signed.on.isoformat()}{' VOID' if signed.void else ''}"


def _lists(rows: Sequence[Row]) -> list[tuple[str, list[tuple[Row, Remark]]]]:
    """The two lists of remarks, without an empty one."""
    lists = [
        ("To mend", [(row, r) for row in rows for r in row.to_mend]),
        ("Open", [(row, r) for row in rows for r in _together(row.open)]),
    ]
    return [(title, remarks) for title, remarks in lists if remarks]


def _together(remarks: Sequence[Remark]) -> list[Remark]:
    """The assumptions of a sheet in one remark, by their names; a sheet may have dozens."""
    assumed = [r for r in remarks if r.kind == "assumption"]
    if len(assumed) < 2:
        return list(remarks)
    names = ", ".join(r.message.removeprefix(ASSUMED).partition(" =")[0] for r in assumed)
    listed = f"{len(assumed)} values {ASSUMED}{names}"
    return [*(r for r in remarks if r.kind != "assumption"), Remark("assumption", assumed[0].line, listed)]


# --- JSON -----------------------------------------------------------------------------------------------------------


def register_json(rows: Sequence[Row], day: date, program: str) -> str:
    """The register as JSON; ``program``: the program's version."""
    record = {"register": FORM, "program": program, "on": day.isoformat(), "sheets": [_record(row) for row in rows]}
    return json.dumps(record, ensure_ascii=False, indent=2, allow_nan=False).translate(SURROGATES) + "\n"


def _record(row: Row) -> dict[str, Any]:
    title = {name: row.title.get(name, "") for name in ("project", "subject", "revision", "by", "date")}
    return {
        "path": row.path,
        "sheet": row.number,
        **title,
        "verdict": row.verdict,
        "claims": {"total": row.claims, **row.counts},
        "errors": row.errors,
        "signatures": [
            {"role": s.role, "name": s.name, "on": s.on.isoformat(), "holds": not s.void, "void": s.void}
            for s in row.signatures
        ],
        "to_mend": [_remark(r) for r in row.to_mend],
        "open": [_remark(r) for r in row.open],
    }


def _remark(remark: Remark) -> dict[str, Any]:
    return {"kind": remark.kind, "line": remark.line, "message": remark.message}
