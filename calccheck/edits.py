"""The program's own marks in a sheet's text: put in behind claims, known again, taken out without a trace.

A mark is a footnote reference behind a claim, a trailing comment in a fence, or a line below display mathematics; a list at the
end of the sheet holds the notes. Every mark carries a label that occurs nowhere else in the sheet, a comment also the digest of
its own words, the list a digest of itself. So taking out removes nothing but what the program wrote: what somebody has changed
by hand since stays where it is, and ``stray`` names it.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Literal

from calccheck.source import Span

_BEGIN = "marks, written by the program; `calccheck mark --remove` takes them out -->"
_END = r"<!-- (calccheck\d*) marks end here ([0-9a-f]{16}) -->([ \t\r\n]*)\Z"
_LINE_END = re.compile(r"\r\n|\r|\n")
_GUARD = "<!---->"  # between a reference and a bracket, which together would read as a link
_STRAY = (  # compiled only for a text that says calccheck
    r"(?P<list><!-- calccheck\d* marks(?:,| end here)[^\r\n]*?-->)"
    r"|\[\^calccheck\d*-\d+m?\]"
    r"| {2}# [^\r\n]{0,2000}? \(calccheck\d*-[0-9a-f]{6}\)(?=[\r\n]|\Z)"
)
_CHANGED = (
    "the marks of an earlier run cannot be taken out, because their list was changed or something stands behind it; "
    "restore the list (text of your own belongs above it), or delete the marks by hand"
)
_ORDER = {"note": 0, "comment": 1, "below": 2}


@dataclass(frozen=True, slots=True)
class Edit:
    """A mark to be put in.

    ``note``: a footnote, referred to at offset ``at``; ``comment``: a comment at the end of the line in which ``at`` stands;
    ``below``: a footnote, referred to in a paragraph of its own below that line. ``words``: one line, Markdown in a footnote,
    plain in a comment, without double spaces.
    """

    at: int
    words: str
    form: Literal["note", "comment", "below"] = "note"


# --- putting in -----------------------------------------------------------------------------------------------------


def put_in(text: str, edits: Sequence[Edit], closing: Sequence[str] = ()) -> str:
    """The text with its marks and, at the end, the notes and the ``closing`` lines of Markdown; without either, the text."""
    if not edits and not closing:
        return text
    label = _free_label("\n".join([text, *(e.words for e in edits), *closing]))
    end = newline(text)
    pieces, notes, last = [], [], 0
    for at, inserted, defined in _insertions(text, edits, label, end):
        pieces += [text[last:at], inserted]
        notes += defined
        last = at
    body = "".join([*pieces, text[last:]])
    listing = end.join([f"<!-- {label} {_BEGIN}", "", *notes, *([""] if notes and closing else []), *closing, "", ""])
    listing += f"<!-- {label} marks end here {_digest(listing, 16)} -->"
    return f"{body}{end}{listing}{end}" if body.endswith(("\n", "\r")) else f"{body}{end}{end}{listing}"


def newline(text: str) -> str:
    """The line end that the text uses first."""
    m = _LINE_END.search(text)
    return m.group() if m else "\n"


def _free_label(everything: str) -> str:
    """``calccheck``, or with the first number behind it that occurs nowhere in what is to be marked."""
    number, label = 1, "calccheck"
    while f"{label}-" in everything:
        number += 1
        label = f"calccheck{number}"
    return label


def _insertions(text: str, edits: Sequence[Edit], label: str, end: str) -> Iterator[tuple[int, str, list[str]]]:
    """Offset, text to put in and notes to list, in the order of the text; marks that share a place in one piece."""
    placed: dict[tuple[int, str], list[str]] = {}
    for edit in edits:
        at = edit.at if edit.form == "note" else _line_stop(text, edit.at)
        placed.setdefault((at, edit.form), []).append(edit.words)
    number = 0
    for (at, form), words in sorted(placed.items(), key=lambda item: (item[0][0], _ORDER[item[0][1]])):
        if form == "comment":
            comment = "; ".join(words)
            yield at, f"  # {comment} ({label}-{_digest(comment, 6)})", []
            continue
        tail = "m" if form == "below" else ""
        labels = [f"[^{label}-{number + k}{tail}]" for k in range(1, len(words) + 1)]
        number += len(words)
        notes = [f"{name}: {w}" for name, w in zip(labels, words, strict=True)]
        if form == "below":
            margin = _margin(text, at)
            yield at, f"{end}{margin}{end}{margin}Above: {' '.join(labels)}", notes
        else:
            guard = _GUARD if re.match(rf"\(|\[(?!\^)|{_GUARD}", text[at : at + len(_GUARD)]) else ""
            yield at, "".join(labels) + guard, notes


def _line_stop(text: str, at: int) -> int:
    m = _LINE_END.search(text, at)
    return m.start() if m else len(text)


def _line_start(text: str, at: int) -> int:
    return max(text.rfind("\n", 0, at), text.rfind("\r", 0, at)) + 1


def _margin(text: str, at: int) -> str:
    """What keeps a further paragraph in the same quote or list item: the line's markers, those of lists as spaces."""
    lead = re.match(r"(?:[ \t>]|(?:[-*+]|\d{1,9}[.)])[ \t])*", text[_line_start(text, at) : at])
    return "".join(c if c in " \t>" else " " for c in lead.group()) if lead else ""


def _digest(words: str, length: int) -> str:
    """The beginning of the SHA-256 of words, the same whatever the line ends are."""
    from hashlib import sha256  # late: most texts bear no marks

    return sha256(_LINE_END.sub("\n", words).encode("utf-8", "surrogatepass")).hexdigest()[:length]


# --- taking out -----------------------------------------------------------------------------------------------------


def unmark(text: str) -> str:
    """The text without the program's marks; any text that bears none comes back as it is."""
    while cuts := _cuts(text):
        text = "".join(text[a:b] for a, b in _between(cuts, len(text)))
    return text


def kept(text: str) -> Sequence[int]:
    """For each character of ``unmark(text)`` its offset in the text; the last entry is the text's length."""
    at: Sequence[int] = range(len(text) + 1)
    while cuts := _cuts(text):
        pieces = _between(cuts, len(text))
        at = [*(k for a, b in pieces for k in at[a:b]), at[-1]]
        text = "".join(text[a:b] for a, b in pieces)
    return at


def _between(cuts: Sequence[Span], length: int) -> list[tuple[int, int]]:
    """What is left of a text of some length between its cuts."""
    return list(zip([0, *(c.end for c in cuts)], [*(c.start for c in cuts), length], strict=True))


@dataclass(frozen=True, slots=True)
class Stray:
    """A mark left in a text from which the marks were taken out. ``listing``: it is the list of notes itself."""

    span: Span
    message: str
    listing: bool


def stray(text: str) -> list[Stray]:
    """Marks that were copied from elsewhere or changed by hand.

    Where the list of notes is among them nothing could be taken out, and it stands for all.
    """
    found = list(re.finditer(_STRAY, text)) if "calccheck" in text else []
    lists = [m for m in found if m["list"]]
    if lists:
        return [Stray(Span(*lists[0].span()), _CHANGED, True)]
    return [Stray(Span(*m.span()), f"{m.group().strip()} is a mark of another run; delete it", False) for m in found]


def _cuts(text: str) -> list[Span]:
    """What to take out, in order; nothing unless the text ends in an unchanged list of notes."""
    closing = re.search(_END, text) if "<!-- calccheck" in text else None
    if closing is None:
        return []
    label = closing[1]
    begin = 1 + max(text.rfind(f"{end}<!-- {label} {_BEGIN}", 0, closing.start()) for end in "\r\n")
    if not begin or _digest(text[begin : closing.start()], 16) != closing[2]:
        return []
    listing = _list_span(text, begin, closing)
    return [*sorted(_in_body(text[:begin], label), key=lambda s: s.start), listing]


def _list_span(text: str, begin: int, closing: re.Match[str]) -> Span:
    """The list with its own line ends: two before it, or one on either side where the text before ends its last line."""
    end = newline(text[begin:])
    before, behind = begin - len(end), closing.start(3)
    if closing[3].startswith(end) and text.startswith(end, before) and text.endswith(("\n", "\r"), 0, before):
        return Span(before, behind + len(end))
    if not closing[3].startswith(end) and text.endswith(end + end, 0, begin):
        return Span(before - len(end), behind)
    return Span(begin, behind)


def _in_body(body: str, label: str) -> Iterator[Span]:
    """The marks in the text before the list."""
    if f"{label}-" not in body:
        return
    below = rf"(\r\n|\r|\n)([> \t]*)\1\2Above:(?: \[\^{label}-\d+m\])+(?=[\r\n]|\Z)"
    for pattern in (below, rf"(?:\[\^{label}-\d+\])+(?:{_GUARD})?"):
        yield from (Span(*m.span()) for m in re.finditer(pattern, body))
    for m in re.finditer(rf" \({label}-([0-9a-f]{{6}})\)(?=[\r\n]|\Z)", body):
        start = body.rfind("  # ", _line_start(body, m.start()), m.start())
        if start >= 0 and _digest(body[start + 4 : m.start()], 6) == m[1]:
            yield Span(start, m.end())
