"""Characters that would not be seen, or would reorder their neighbours, and how the printed outputs show them instead."""

from __future__ import annotations

import re
import unicodedata

_UNSEEN = {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}
_SELECTORS = re.compile("[\u034f\u115f\u1160\u17b4\u17b5\u180b-\u180f\u3164\ufe00-\ufe0f\uffa0\U000e0100-\U000e01ef]")


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
