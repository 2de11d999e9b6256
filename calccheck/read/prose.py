"""Claims left in plain prose: a name of the circuit or a quantity, a relation and a value, outside of code.

Nobody can tell where such a claim ends, so it is not guessed at: it is unchecked, with the line to copy.
"""

from __future__ import annotations

import re
from bisect import bisect_left
from collections.abc import Collection, Iterator, Sequence
from html import unescape

from calccheck.document import Block, inlines
from calccheck.model import Claim, Problem

_SIGN = re.compile("[=≈<≤>≥≅≃∼~＝]")
_QUANTITY = r"(?:Isc|[VIPRZSQ])(?:\\?_\{[^{}]*\}|\\?_[A-Za-z0-9]\w*)|\|[VI]\\?_\w+\|"
_VALUE = r"[-−+]?\s?(?:\d+(?:[.,]\d+)?|\.\d+)(?:\s?[a-zA-ZµμΩΩ%°][\w/·°%²³]*)?"
_RELATION = r"(?:~=|\\?[<>]=?|[=≈≤≥~≅≃∼]|&(?:l[te]|g[te]|leq|geq|ap|asymp|approx|equals);)"
_MAY_STATE = re.compile(r"[=≈<≤>≥~≅≃∼&]")
_ABOUT = dict.fromkeys(("~", "~=", "≅", "≃", "∼"), "≈")


_STATED = re.compile(
    rf"(?<![\w.])_{{0,3}}(?:(?P<quantity>{_QUANTITY})|(?P<word>(?P<sign>[+\-−]?)\w+[′″']*))[*_]{{0,3}}\s*"
    rf"(?P<relation>{_RELATION})\s*(?:about\s|approx\.?\s|ca\.?\s)?\s*[*_]{{0,3}}(?P<value>{_VALUE})"
)


def prose_claims(block: Block, names: Collection[str], circuit: int) -> list[Claim]:
    """What reads as a claim in a block's plain text.

    Code, maths and HTML in it are left out, but for names in code whose relation and value stand outside: `` `V_b` = 8 V ``.
    """
    content = block.content
    if content is None or not _MAY_STATE.search(content.text):
        return []
    text = list(content.text)
    at = content.at if isinstance(content.at, range) else _rising(content.at)
    for inline in inlines(block.inlines):
        if inline.kind in ("code", "math", "html"):
            first, last = bisect_left(at, inline.span.start), bisect_left(at, inline.span.end)
            words = text[first:last]
            text[first:last] = " " * (last - first)
            if inline.kind != "html" and not _SIGN.search(content.text, first, last):
                text[first:last] = [" " if c in "`$" else c for c in words]
    claims = []
    for subject, m in _stated("".join(text), names):
        span = content.span(m.start(), m.end())
        sign = unescape(m["relation"].strip("\\"))
        written = f"{subject.replace(chr(92), '').strip('*_')} {_ABOUT.get(sign, sign)} {m['value']}"
        problem = Problem("a claim in plain prose: put it in code", span, f"`{written}`")
        claims.append(Claim(written, span, "prose", circuit, problem=problem))
    return claims


def _stated(text: str, names: Collection[str]) -> Iterator[tuple[str, re.Match[str]]]:
    """What is stated of a quantity or of a known name: the subject, and the match with relation and value."""
    m = _STATED.search(text)
    while m is not None:
        subject = m["quantity"] or _known(m[0][: m.end("word") - m.start()], names)
        if subject:
            yield subject, m
        m = _STATED.search(text, m.end() if subject else m.end("sign") if m["sign"] else m.end("word"))


def _known(word: str, names: Collection[str]) -> str:
    """The known name that a word is, up to three marks of emphasis at either end taken off."""
    lead, trail = (min(3, len(word) - len(bare)) for bare in (word.lstrip("_"), word.rstrip("_")))
    inner = (word[k : len(word) - j] for k in range(lead, -1, -1) for j in range(trail + 1))
    return next((name for name in inner if name in names), "")


def _rising(at: Sequence[int]) -> list[int]:
    """Offsets with those of characters that stand nowhere filled in, so that they can be searched."""
    last, filled = 0, []
    for p in at:
        last = max(last, p)
        filled.append(last)
    return filled
