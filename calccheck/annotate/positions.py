"""Places in a text as editors count them: lines from 0, columns from 0 in units of an encoding (Language Server Protocol 3.17)."""

from __future__ import annotations

from calccheck.source import Sheet


def units(text: str, encoding: str) -> int:
    """The length of a text in units of ``utf-8``, ``utf-16`` or ``utf-32``."""
    match encoding:
        case "utf-8":
            return len(text.encode("utf-8", "surrogatepass"))
        case "utf-16":
            return len(text) + sum(c > "\uffff" for c in text)
        case _:
            return len(text)


def position_of(sheet: Sheet, offset: int, encoding: str) -> tuple[int, int]:
    """Line and column of an offset."""
    line, column = sheet.line_column(offset)
    return line - 1, units(sheet.text[offset - column + 1 : offset], encoding)


def offset_of(sheet: Sheet, line: int, column: int, encoding: str) -> int:
    """The offset of a place; behind the end of its line the line's end, inside a character that character."""
    starts = sheet.line_starts
    if line >= len(starts):
        return len(sheet.text)
    end = starts[line + 1] if line + 1 < len(starts) else len(sheet.text)
    text = sheet.text[starts[line] : end].rstrip("\r\n")
    passed = 0
    for k, character in enumerate(text):
        passed += units(character, encoding)
        if passed > column:
            return starts[line] + k
    return starts[line] + len(text)
