"""Text from a sheet or a file name, safe to show: what a terminal or reader would obey or hide is spelt out."""

from __future__ import annotations

import re

# C0, DEL and C1 controls; marks, embeddings, overrides and isolates of the bidirectional algorithm (Unicode Standard Annex 9);
# zero-width characters, line and paragraph separators; lone surrogates, which stand for the odd bytes of a file name
_UNSEEN = re.compile("[\x00-\x1f\x7f-\x9f\u00ad\u061c\u200b-\u200f\u2028-\u202e\u2060-\u2069\ufeff\ud800-\udfff]")


def visible(text: str) -> str:
    """The text with control, direction and zero-width characters as escapes: ``\\x1b``, ``\\u202e``."""
    return _UNSEEN.sub(_escape, text)


def one_line(text: str) -> str:
    """The text as one line of words, a space between them, and safe to show."""
    return visible(" ".join(text.split()))


def _escape(m: re.Match[str]) -> str:
    code = ord(m.group())
    return f"\\x{code:02x}" if code < 0x100 else f"\\u{code:04x}"
