"""The title block of a sheet: its front matter as text, every value as the author wrote it, and its settings."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

from calccheck.document import Block
from calccheck.model import Finding, Settings
from calccheck.read.settings import SettingFault, with_setting
from calccheck.read.signatures import plainly_written, signature_lines
from calccheck.rules import RULES
from calccheck.source import Piece, Span, joined

LARGEST = 64 * 1024  # characters
DEEPEST = 20

# The simplest front matter, read without loading YAML (9 ms of a run's 60): a word, a colon, plain text in which no sign
# means anything to YAML. ``tests/test_titleblock.py`` holds this reading against PyYAML.
_SIMPLE = re.compile(r"(?P<key>[A-Za-z][A-Za-z0-9_]{0,39}):(?: +(?P<value>[^\W_][\w ,.;()/+%&°–—-]*?))? *")
_CONFLICT = re.compile(r"^<{7} .*$", re.MULTILINE)  # as git writes it


class _Fault(Exception):
    """Front matter that cannot be read, and where in its text."""

    def __init__(self, reason: str, start: int, end: int | None = None) -> None:
        super().__init__(reason)
        self.reason, self.start, self.end = reason, start, start + 1 if end is None else end


@dataclass(slots=True)
class _Entry:
    """A value with its place in the front matter's text: text, or named entries, or a list of entries."""

    start: int
    end: int
    text: str = ""
    fields: dict[str, _Entry] | None = None
    items: list[_Entry] = field(default_factory=list)
    keys: dict[str, tuple[int, int]] = field(default_factory=dict)


def read_titleblock(
    front: Block | None, repo_settings: Settings
) -> tuple[dict[str, str], Settings, tuple[Finding, ...]]:
    """The fields as text in the order written (``check`` left out), the sheet's settings over the repository's, findings.

    Signatures are a field here like any other; ``read.signatures`` reads them line by line.
    """
    if front is None:
        return {}, repo_settings, ()
    text = joined(front.lines)
    try:
        fields = _simple(front.lines) or _by_yaml(text.text)
    except _Fault as fault:
        return {}, repo_settings, (_finding("front-matter", fault.reason, _span(text, fault.start, fault.end, front)),)
    check = fields.fields.pop("check", None) if fields.fields else None
    title = {key: shown(entry) for key, entry in (fields.fields or {}).items()}
    if check is None:
        return title, repo_settings, ()
    settings, findings = _settings(check, repo_settings, text, front)
    return title, settings, findings


def _settings(check: _Entry, settings: Settings, text: Piece, front: Block) -> tuple[Settings, tuple[Finding, ...]]:
    if check.fields is None:
        message = "check holds settings, one a line below it: carry: 0.5 %"
        return settings, (_finding("setting", message, _span(text, check.start, check.end, front)),)
    findings = []
    for key, entry in check.fields.items():
        try:
            if entry.fields is not None or entry.items:
                raise SettingFault(f"{key} is one value, not several")
            settings = with_setting(settings, key, entry.text)
        except SettingFault as fault:
            findings.append(_finding("setting", str(fault), _span(text, check.keys[key][0], entry.end, front)))
    return settings, tuple(findings)


def _finding(kind: str, message: str, span: Span) -> Finding:
    return Finding(kind, RULES[kind].severity, message, span)


def _span(text: Piece, start: int, end: int, front: Block) -> Span:
    """A place in the sheet. Beyond the last character it is the last one that stands."""
    if not text.text:
        return front.span
    start = min(max(start, 0), len(text.text) - 1)
    return text.span(start, min(max(end, start + 1), len(text.text)))


def shown(entry: _Entry) -> str:
    """A value as one text: a list with commas between, a mapping with semicolons."""
    if entry.fields is not None:
        return "; ".join(f"{key}: {shown(e)}" for key, e in entry.fields.items())
    return ", ".join(shown(e) for e in entry.items) if entry.items else entry.text


def _simple(lines: tuple[Piece, ...]) -> _Entry | None:
    """Front matter of plain fields only; nothing where YAML is needed to be sure."""
    found = _Entry(0, 0, fields={})
    assert found.fields is not None
    signed = signature_lines(lines) or range(0)
    if signed:
        if not plainly_written(lines, signed):
            return None
        lines = (*lines[: signed.start + 1], *lines[signed.stop :])
    for line in lines:
        m = _SIMPLE.fullmatch(line.text)
        if m is None or m["key"] in found.fields or m["key"] == "check":
            return None
        found.fields[m["key"]] = _Entry(0, 0, m["value"] or "")
    return found


# --- YAML -----------------------------------------------------------------------------------------------------------


def _by_yaml(text: str) -> _Entry:
    """The front matter's mapping from PyYAML's events: text only, no tags, no aliases, no second value for a field."""
    if len(text) > LARGEST:
        raise _Fault(f"the front matter is longer than {LARGEST} characters", LARGEST)
    import yaml  # late: 9 ms, for front matter that is more than plain fields

    strange = yaml.reader.Reader.NON_PRINTABLE.search(text)
    if strange:
        raise _Fault(f"the character U+{ord(strange[0]):04X} may not stand in front matter", strange.start())
    loader: Any = getattr(yaml, "CBaseLoader", yaml.BaseLoader)
    try:
        return _document(yaml.parse(text, Loader=loader))
    except yaml.MarkedYAMLError as e:
        conflict = _CONFLICT.search(text)
        if conflict:
            reason = "a merge of two branches was left open here; settle it and delete the lines that git put in"
            raise _Fault(reason, *conflict.span()) from None
        mark = e.problem_mark or e.context_mark
        reason = " ".join(str(e.problem or e.context).split())
        raise _Fault(f"this is no YAML: {reason}", mark.index if mark else 0) from None


def _document(events: Iterator[Any]) -> _Entry:
    """The one mapping in a run of events."""
    next(events)  # the stream's start
    first = next(events)
    if _is(first, "StreamEnd"):
        return _Entry(0, 0, fields={})
    entry = _entry(next(events), events, 0)
    if entry.fields is None:
        raise _Fault("front matter is made of fields, one a line: subject: Bus voltage", entry.start, entry.end)
    next(events)  # the document's end
    last = next(events)
    if not _is(last, "StreamEnd"):
        raise _Fault("front matter is one document; a second one starts here", last.start_mark.index)
    return entry


def _is(event: Any, kind: str) -> bool:
    return type(event).__name__ == f"{kind}Event"


def _entry(event: Any, events: Iterator[Any], depth: int) -> _Entry:
    """The value that starts with an event."""
    start, end = event.start_mark.index, event.end_mark.index
    if _is(event, "Alias"):
        raise _Fault("a value is written out, not referred to by *", start, end)
    if depth > DEEPEST:
        raise _Fault(f"values nested deeper than {DEEPEST}", start)
    if _is(event, "Scalar"):
        return _Entry(start, end, event.value)
    entry = _Entry(start, end)
    if _is(event, "MappingStart"):
        _fill(entry, events, depth)
        return entry
    while not _is(item := next(events), "SequenceEnd"):
        entry.items.append(_entry(item, events, depth + 1))
        entry.end = entry.items[-1].end
    return entry


def _fill(entry: _Entry, events: Iterator[Any], depth: int) -> None:
    """The fields of a mapping up to its end."""
    entry.fields = {}
    while not _is(key := next(events), "MappingEnd"):
        start, end = key.start_mark.index, key.end_mark.index
        if not _is(key, "Scalar"):
            raise _Fault("a field's name is plain text", start, end)
        if key.value in entry.fields:
            raise _Fault(f"the field {key.value} stands twice", start, end)
        entry.keys[key.value] = (start, end)
        entry.fields[key.value] = _entry(next(events), events, depth + 1)
        entry.end = max(end, entry.fields[key.value].end)
