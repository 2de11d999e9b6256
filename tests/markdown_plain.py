"""The outline of a page made from the parser's tokens as they come, without any of our rules, to compare ours with."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import replace
from functools import cache

from markdown_it import MarkdownIt
from markdown_it.token import Token
from markdown_pages import outline
from mdit_py_plugins.dollarmath import dollarmath_plugin
from mdit_py_plugins.footnote import footnote_plugin

from calccheck.document import Block

_OPENINGS = {
    "paragraph_open": "paragraph",
    "blockquote_open": "quote",
    "bullet_list_open": "list bullet",
    "list_item_open": "item",
    "table_open": "table",
    "em_open": "emphasis",
    "strong_open": "strong",
    "s_open": "strike",
}
_LEAVES = {
    "hr": "rule",
    "code_block": "code",
    "html_block": "html",
    "code_inline": "code",
    "math_inline": "math",
    "math_inline_double": "math",
    "html_inline": "html",
    "softbreak": "softbreak",
    "hardbreak": "break",
}


@cache
def _plain_parser() -> MarkdownIt:
    parser = MarkdownIt("commonmark", {"maxNesting": 62}).enable(["table", "strikethrough"])
    parser.use(dollarmath_plugin, double_inline=True)
    return parser.use(footnote_plugin, inline=False, move_to_end=False)


def plain_outline(body: str) -> str:
    """The outline of a page without front matter by the parser alone, white space left out."""
    return re.sub(r"\s", "", "".join(_token(token) for token in _tokens(_plain_parser().parse(body))))


def same_outline(tree: tuple[Block, ...]) -> str:
    """Our outline as ``plain_outline`` can know it: no spare cells, no closing of fences, white space left out."""
    return re.sub(r"\s", "", outline(tuple(map(_without_spare, tree))).replace(" unclosed[", "["))


def _without_spare(block: Block) -> Block:
    children = tuple(map(_without_spare, block.children))
    if block.kind == "table":
        columns = len(children[0].children)
        children = tuple(replace(row, children=row.children[:columns]) for row in children)
    return replace(block, children=children)


def _tokens(tokens: Sequence[Token]) -> Iterator[Token]:
    head = True
    for token in tokens:
        if token.type == "inline":
            yield from _tokens(token.children or ())
        elif token.type == "tbody_open" or token.type == "thead_open":
            head = token.type == "thead_open"
        elif token.type not in ("tbody_close", "thead_close"):
            token.hidden = head
            yield token


def _token(token: Token) -> str:
    if token.nesting < 0:
        return "]"
    align = str(token.attrs.get("style", "")).removeprefix("text-align:")
    match token.type:
        case "text" | "text_special":  # the parser leaves escapes apart in an image within an image
            return token.content
        case "heading_open":
            return f"heading{token.tag[1]}["
        case "ordered_list_open":
            return f"listordered{token.attrs.get('start', 1) or ''}["
        case "footnote_reference_open":
            return f"note{token.meta['label']}["
        case "tr_open":
            return f"row{'head' if token.hidden else ''}["
        case "th_open" | "td_open":
            return f"cell{align}["
        case "link_open":
            return f"link{token.attrs['href']}["
        case "image":
            return f"image{token.attrs['src']}[{''.join(map(_token, token.children or ()))}]"
        case "fence":
            return f"fence{token.info}[{'/'.join(token.content.removesuffix(chr(10)).split(chr(10)))}]"
        case "footnote_ref":
            return f"note{token.meta['label']}[]"
        case "math_block" | "math_block_label":
            lines = token.content.split("\n")
            lines = lines if lines[0].strip() else lines[1:]
            lines = lines if not lines or lines[-1].strip() else lines[:-1]
            return f"math{token.info}[{'/'.join(lines)}]"
        case opening if opening in _OPENINGS:
            return f"{_OPENINGS[opening]}["
        case leaf if token.block:
            return f"{_LEAVES[leaf]}[{token.content.removesuffix(chr(10)).replace(chr(10), '/')}]"
        case leaf:
            return f"{_LEAVES[leaf]}[{token.content}]"
