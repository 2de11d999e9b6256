"""What the judging says in fragments, as sentences for people to read: a capital in front, a full stop behind.

A name keeps its letters: ``tin is 46.35 °C`` begins small because the quantity does.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from calccheck.model import Report

_WORD = re.compile(r"[^\W\d]\w*")
_LEAD = re.compile(r"([a-z]+)(?: ([a-z]+)(?![\w]))?")
_OF_NAMES = {
    "comes",
    "differs",
    "due",
    "has",
    "is",
    "names",
    "stands",
    "stores",
    "with",
    "without",
}  # what follows a name
_ENDS = (".", "?", "!", "…", ":", ";", "`")
_VALUE = re.compile(r"(?<=\d) (?=(?:[a-zA-ZµΩ]{1,3}|%|°C?)(?![\w]))")
_CODE = re.compile(r"`([^`\n]+)`")


def names_in(report: Report) -> frozenset[str]:
    """Every word that may be a name in this sheet: those of claims, parts and nodes."""
    found = {word for claim in report.reading.claims for word in _WORD.findall(claim.text)}
    for circuit in report.reading.circuits:
        found.update(e.name for e in circuit.elements)
        found.update(circuit.nodes())
    return frozenset(found)


def sentence(text: str, names: frozenset[str] = frozenset()) -> str:
    """The text as a sentence."""
    lead = _LEAD.match(text)
    if lead and text[lead.end(1) : lead.end(1) + 1] in ("", " ", ",", ":"):
        is_name = lead[1] in names and (lead[2] is None or lead[2] in _OF_NAMES)
        text = text if is_name else text[0].upper() + text[1:]
    return text if not text or text.endswith(_ENDS) else f"{text}."


def unparted(text: str) -> str:
    """The text with values kept on one line with their units, by no-break spaces."""
    return _VALUE.sub("\u00a0", text)


def code_pieces(text: str) -> Iterator[tuple[bool, str]]:
    """The text in pieces, each with whether it stood between backticks, which are left out; values kept with their units."""
    for k, piece in enumerate(_CODE.split(unparted(text))):
        if piece:
            yield k % 2 == 1, piece
