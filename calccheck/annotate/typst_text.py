"""Text of the sheet as typst source: every character of it inside a string literal, so that nothing in it is ever code.

What would not be seen or would reorder its neighbours (controls, bidirectional controls, zero-width and private characters)
and what no font shows becomes its code point in a box.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from itertools import groupby

from calccheck.annotate.characters import code_point, unseen

_LONG = re.compile(r"\S{32,}")
_CHUNK = re.compile(r"(.{16})(?=.)")
_ESCAPES = {"\\": "\\\\", '"': '\\"', "\n": "\\n", "\r": "\\r", "\t": "\\t"}
_SPECIAL = re.compile('[\\\\"\x00-\x1f\x7f-\x9f\u2028\u2029]')


def literal(text: str) -> str:
    """A typst string literal of exactly this text. A lone surrogate, which no encoding holds, becomes U+FFFD."""
    whole = text.encode("utf-8", "surrogatepass").decode("utf-8", "replace")
    return '"' + _SPECIAL.sub(lambda m: _ESCAPES.get(m[0]) or f"\\u{{{ord(m[0]):x}}}", whole) + '"'


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
