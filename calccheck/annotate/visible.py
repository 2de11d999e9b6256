"""Text from a sheet or a file name, safe to show: what a terminal or reader would obey or hide is spelt out."""

from __future__ import annotations

from unicodedata import category


def visible(text: str) -> str:
    """The text with what is not printed as escapes: controls, direction and zero-width characters, lone surrogates.

    ``\\x1b``, ``\\u202e``, ``\\U000e0041``. Spaces of every width stay (Unicode category Zs).
    """
    return text if text.isprintable() else "".join(map(_shown, text))


def one_line(text: str) -> str:
    """The text as one line of words, a space between them, and safe to show."""
    return visible(" ".join(text.split()))


def _shown(c: str) -> str:
    if c.isprintable() or category(c) == "Zs":
        return c
    code = ord(c)
    return f"\\x{code:02x}" if code < 0x100 else f"\\u{code:04x}" if code < 0x10000 else f"\\U{code:08x}"
