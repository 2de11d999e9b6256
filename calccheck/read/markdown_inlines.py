"""The Markdown parser's inline tokens as inlines of our own, with their places.

The tokens of a paragraph cover its content from end to end, one behind the other; only their lengths are not told.
Those follow from token and content, so that adding them up gives every place.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

from markdown_it.token import Token

from calccheck.document import Inline, InlineKind
from calccheck.source import NOWHERE, Piece, Span

DEEPEST = 60
"""How deep inlines nest here; the mark-up of deeper ones is passed over, their text is not."""

_Placed = tuple[Token, int]  # a token, and where it starts in the content

_KINDS: dict[str, InlineKind] = {
    "code_inline": "code",
    "math_inline": "math",
    "math_inline_double": "math",
    "html_inline": "html",
    "softbreak": "softbreak",
    "hardbreak": "break",
    "footnote_ref": "note",
    "image": "image",
    "em_open": "emphasis",
    "strong_open": "strong",
    "s_open": "strike",
    "link_open": "link",
}
_BREAK = re.compile(r" *\\?\n[ \t]*")


@dataclass(slots=True)
class _Open:
    """An inline whose children are still being read."""

    kind: InlineKind
    start: int
    target: str
    children: list[Inline]


def read_inlines(tokens: Sequence[Token], content: Piece) -> tuple[Inline, ...]:
    """The inlines of ``content``; should the tokens not cover it, one run of text."""
    if len(tokens) == 1 and tokens[0].content == content.text and tokens[0].type == "text":
        return (Inline("text", _span(content, 0, len(content.text)), content),)  # the most common by far
    stack = [_Open("text", 0, "", [])]
    start = here = 0  # a run of text begins and ends there
    escapes: list[_Placed] = []
    for token in tokens:
        if token.type == "text":
            here += len(token.content)
            continue
        if token.type == "text_special":
            escapes.append((token, here))
            here += len(token.markup)
            continue
        if start < here:
            stack[-1].children.append(_text(content, start, here, escapes))
            escapes = []
        start, here = here, min(_end(token, content.text, here), len(content.text))
        _nest(stack, token, content, start, here)
        start = here
    if here != len(content.text):
        return (Inline("text", content.span(), content),)
    if start < here:
        stack[-1].children.append(_text(content, start, here, escapes))
    return tuple(stack[0].children)


def _end(token: Token, source: str, start: int) -> int:
    match token.type:
        case "code_inline":
            return _code_end(token, source, start)
        case "html_inline":
            return start + len(token.content)
        case "softbreak" | "hardbreak":
            found = _BREAK.match(source, start)
            return found.end() if found else start
        case "link_close" | "image" if "end" in token.meta:
            return int(token.meta["end"])
        case "link_open" | "link_close":
            return start + 1
        case "math_inline" | "math_inline_double":
            return start + 2 * len(token.markup) + len(token.content)
        case "footnote_ref":
            return start + len(f"[^{token.meta['label']}]")
        case _:  # marks of emphasis
            return start + len(token.markup)


def _code_end(token: Token, source: str, start: int) -> int:
    """One space at either end belongs to the mark-up, if both are there and the code is not all spaces."""
    inner = start + len(token.markup)
    bare = inner + len(token.content)
    as_written = source[inner:bare].replace("\n", " ") == token.content
    return bare + len(token.markup) + (0 if as_written else 2)


def _text(content: Piece, start: int, end: int, escapes: Sequence[_Placed]) -> Inline:
    """A run of text; what an escape or entity stands for stands where that begins."""
    piece = content.part(start, end)
    if escapes:
        text, at, here = "", list[int](), start
        for token, begin in escapes:
            text += content.text[here:begin] + token.content
            at += content.at[here:begin]
            here = begin + len(token.markup)
            if token.content == token.markup:  # a backslash before a letter is itself
                at += content.at[begin:here]
            else:
                at += [content.at[begin], *[NOWHERE] * (len(token.content) - 1)]
        piece = Piece(text + content.text[here:end], [*at, *content.at[here:end], piece.at[-1]])
    return Inline("text", _span(content, start, end), piece)


def _nest(stack: list[_Open], token: Token, content: Piece, start: int, end: int) -> None:
    """Put an inline among the children of the one around it, or open or close one."""
    around = stack[-1]
    if token.nesting == 0:
        around.children.append(_leaf(token, content, start, end))
    elif token.nesting > 0:
        children = around.children if len(stack) > DEEPEST else []
        stack.append(_Open(_KINDS[token.type], start, str(token.attrs.get("href", "")), children))
    else:
        stack.pop()
        if around.children is not stack[-1].children:
            span = _span(content, around.start, end)
            stack[-1].children.append(Inline(around.kind, span, None, tuple(around.children), around.target))


def _leaf(token: Token, content: Piece, start: int, end: int) -> Inline:
    kind, span = _KINDS[token.type], _span(content, start, end)
    match kind:
        case "code" | "math" | "html":
            lead = start + (end - start - len(token.content)) // 2
            inner = content.part(lead, lead + len(token.content))
            at = inner.at
            if "\n" in inner.text:  # read as a blank, which stands nowhere
                at = [NOWHERE if c == "\n" else p for c, p in zip(f"{inner.text} ", at, strict=True)]
            return Inline(kind, span, Piece(token.content, at))
        case "image":
            label = content.part(start + 2, start + 2 + len(token.content))
            return Inline(kind, span, None, read_inlines(token.children or (), label), str(token.attrs["src"]))
        case "note":
            return Inline(kind, span, target=str(token.meta["label"]))
        case _:
            return Inline(kind, span)


def _span(content: Piece, start: int, end: int) -> Span:
    """The place of ``content[start:end]``; a line's break reaches from the end of the text before it to the text behind."""
    at = content.at
    if isinstance(at, range):
        return Span(at[start], at[end])
    first = at[start] if at[start] != NOWHERE or start == 0 else at[start - 1] + 1
    last = at[end - 1] + 1 if at[end - 1] != NOWHERE else at[end]
    return Span(first, last) if NOWHERE < first <= last else content.span(start, end)
