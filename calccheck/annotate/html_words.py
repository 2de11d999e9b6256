"""Words and marks as HTML: text of the sheet with nothing in it as markup, sentences of our own, links to marks."""

from __future__ import annotations

from collections.abc import Collection, Iterable
from html import escape
from itertools import groupby

from calccheck.annotate.characters import code_point, unseen
from calccheck.annotate.marks import MARKS
from calccheck.annotate.record import Entry
from calccheck.annotate.sentences import code_pieces


def said(text: str) -> str:
    """Text of the sheet as HTML: markup escaped, unseen characters as their code points."""
    parts = []
    for boxed, group in groupby(text, key=unseen):
        if boxed:
            parts += [f'<span class="point">{code_point(c)}</span>' for c in group]
        else:
            parts.append(escape("".join(group)))
    return "".join(parts)


def tell(text: str) -> str:
    """Words of our own as HTML: what stands between backticks as code."""
    return "".join(f"<code>{said(piece)}</code>" if code else said(piece) for code, piece in code_pieces(text))


def told(sentences: Iterable[str]) -> str:
    """Sentences, each on a line of its own."""
    return "".join(f'<span class="told">{tell(t)}</span>' for t in sentences)


def code(text: str) -> str:
    """Text of the sheet as code."""
    return f"<code>{said(text)}</code>"


def word_html(entry: Entry, key: str, target: str) -> str:
    """Sign, word and number of an entry, as a link. ``key``: its own anchor, if any."""
    anchor = f' id="{key}"' if key else ""
    more = f' <span class="ink-caution">{MARKS["caution"].label}</span>' if entry.cautions else ""
    return f'<a class="word ink-{entry.kind}"{anchor} href="#{target}">{_label(entry)}{more}</a>'


def to_mark(entry: Entry, placed: Collection[str]) -> str:
    """The link to an entry's mark in the sheet, or else to its row in the record. ``placed``: those with a mark."""
    return word_html(entry, "", entry.key if entry.key in placed else f"r-{entry.key}")


def in_record(entry: Entry, placed: Collection[str]) -> str:
    """The mark in the entry's own row of the record: a link where there is a mark in the sheet to lead to."""
    if entry.key in placed:
        return to_mark(entry, placed)
    return f'<span class="word ink-{entry.kind}">{_label(entry)}</span>'


def _label(entry: Entry) -> str:
    return f"{MARKS[entry.kind].label}<sup>{escape(entry.number)}</sup>"
