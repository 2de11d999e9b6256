"""Text from a sheet or a file name, safe to show: what a terminal or reader would obey or hide stands as its code point."""

from __future__ import annotations

from calccheck.annotate.characters import code_point, unseen


def visible(text: str) -> str:
    """The text with controls (line ends and tabs too), direction and zero-width characters as ``[U+202E]``."""
    if text.isascii() and text.isprintable():
        return text
    return "".join(f"[{code_point(c)}]" if c in "\t\n" or unseen(c) else c for c in text)


def one_line(text: str) -> str:
    """The text as one line of words, a space between them, and safe to show."""
    return visible(" ".join(text.split()))
