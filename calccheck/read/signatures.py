"""The signatures in the front matter, one a line, each below the role that signs:

    signatures:
      originator:
        QD 2026-11-18 form:1 sha256:… circuit:… claims:… givens:… waivers:… settings:…
      checker:
      approver:

A line of its own between any two of them lets two branches of a repository sign in different roles and merge.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from datetime import date

from calccheck.document import Block
from calccheck.model import ROLES, Finding, Role, Signature
from calccheck.rules import RULES
from calccheck.source import Piece, Span

HEAD = re.compile(r"signatures:[ \t]*(?:#.*)?")
ROLE = re.compile(rf"[ ]+(?P<role>{'|'.join(ROLES)}):[ \t]*")
NAME = r"[^\W\d_](?:[\w.,'’&()/+-]| (?! ))*"
LINE = re.compile(
    rf"[ ]+(?P<name>{NAME}) +(?P<on>\d{{4}}-\d\d-\d\d) +form:(?P<form>\d{{1,4}}) +sha256:(?P<digest>[0-9a-f]{{64}})"
    r"(?P<parts>(?: +[a-z]+:[0-9a-f]{8})*) *"
)
_FAULT = (
    f"this is no signature; each stands on one line below its role ({', '.join(ROLES)}), as calccheck sign writes it"
)
_BESIDE = re.compile(r"[ \t]*(?:#.*)?")


def read_signatures(front: Block, stated: bool) -> tuple[tuple[Signature, ...], tuple[Finding, ...]]:
    """The signatures of a sheet and what cannot be read as one. ``stated``: whether YAML has a field of that name."""
    if not stated:
        return (), ()
    block = signature_lines(front.lines)
    if block is None:
        return (), (
            _finding("signatures stand one a line, each below its role; calccheck sign writes them", front.span),
        )
    found: list[Signature] = []
    faults: list[Finding] = []
    role = ""
    for line in front.lines[block.start + 1 : block.stop]:
        if _BESIDE.fullmatch(line.text):
            continue
        heading = ROLE.fullmatch(line.text)
        signature = _signature(line, role) if role and not heading else None
        if heading:
            role = heading["role"]
        elif signature is not None:
            found.append(signature)
            role = ""
        else:
            faults.append(_finding(_FAULT, line.strip().span()))
    return tuple(found), tuple(faults)


def signature_lines(lines: Sequence[Piece]) -> range | None:
    """The lines of the front matter from ``signatures:`` to the last that belongs to it."""
    first = next((k for k, line in enumerate(lines) if HEAD.fullmatch(line.text)), None)
    if first is None:
        return None
    stop = first + 1
    for k in range(first + 1, len(lines)):
        if _BESIDE.fullmatch(lines[k].text):
            continue
        if not lines[k].text.startswith((" ", "\t", "-")):  # a list may stand without indentation
            break
        stop = k + 1
    return range(first, stop)


def plainly_written(lines: Sequence[Piece], block: range) -> bool:
    """Whether the block is one that ``calccheck sign`` writes, which says to YAML what it says here."""
    roles: list[str] = []
    open_role = False
    for line in lines[block.start + 1 : block.stop]:
        heading = ROLE.fullmatch(line.text)
        if heading and line.text.startswith("  ") and line.text[2] != " ":
            roles.append(heading["role"])
        elif not (open_role and line.text.startswith("    ") and LINE.fullmatch(line.text)):
            return False
        open_role = heading is not None
    return lines[block.start].text == "signatures:" and 0 < len(roles) == len(set(roles))


def _signature(line: Piece, role: str) -> Signature | None:
    m = LINE.fullmatch(line.text)
    day = _day(m["on"]) if m else None
    if m is None or day is None:
        return None
    parts = dict(part.split(":") for part in m["parts"].split())
    own: Role = next(r for r in ROLES if r == role)
    return Signature(own, m["name"], day, int(m["form"]), m["digest"], parts, line.strip().span())


def _day(text: str) -> date | None:
    try:
        return date.fromisoformat(text)
    except ValueError:
        return None


def _finding(message: str, span: Span) -> Finding:
    return Finding("signature", RULES["signature"].severity, message, span)
