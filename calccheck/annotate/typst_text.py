"""Text of the sheet as typst source: every character of it inside a string literal, so that nothing in it is ever code.

What would not be seen or would reorder its neighbours (controls, bidirectional controls, zero-width and private characters)
and what no font shows becomes its code point in a box.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable
from itertools import groupby

_UNSEEN = {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}
_SELECTORS = re.compile("[\u034f\u115f\u1160\u17b4\u17b5\u180b-\u180f\u3164\ufe00-\ufe0f\uffa0\U000e0100-\U000e01ef]")
_LONG = re.compile(r"\S{32,}")
_CHUNK = re.compile(r"(.{16})(?=.)")
_ESCAPES = {"\\": "\\\\", '"': '\\"', "\n": "\\n", "\r": "\\r", "\t": "\\t"}
_SPECIAL = re.compile("[\\\\\"\x00-\x1f\x7f-\x9f\u2028\u2029]")


def literal(text: str) -> str:
    """A typst string literal of exactly this text. A lone surrogate, which no encoding holds, becomes U+FFFD."""
    whole = text.encode("utf-8", "surrogatepass").decode("utf-8", "replace")
    return '"' + _SPECIAL.sub(lambda m: _ESCAPES.get(m[0]) or f"\\u{{{ord(m[0]):x}}}", whole) + '"'


def unseen(character: str) -> bool:
    """Whether a character is a control, a format character or the like, which is shown as its code point."""
    if character in "\t\n":
        return False
    return unicodedata.category(character) in _UNSEEN or _SELECTORS.match(character) is not None


def code_point(character: str) -> str:
    """``U+202E``."""
    return f"U+{ord(character):04X}"


def told(text: str) -> str:
    """Text for places that take no markup (alternative text, titles): unseen characters as ``[U+202E]``."""
    return "".join(f"[{code_point(c)}]" if unseen(c) else c for c in text)


def shown(text: str, missing: Iterable[str] = ()) -> str:
    """Typst markup that shows this text. ``missing``: characters that no font has."""
    absent = set(missing)
    parts = []
    for boxed, group in groupby(text, key=lambda c: unseen(c) or c in absent):
        if boxed:
            parts += [f"#point({literal(code_point(c))});" for c in group]
        else:
            parts.append(f"#{literal(_LONG.sub(_parted, ''.join(group)))};")
    return "".join(parts)


def _parted(m: re.Match[str]) -> str:
    """A long word may break: else it would run off the paper."""
    return _CHUNK.sub("\\1\u200b", m[0])
