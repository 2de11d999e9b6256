"""What stands behind ``min``, ``max``, ``worst``, ``rss``, ``sigma`` and ``yield``, which look at all values within tolerances."""

from __future__ import annotations

from collections.abc import Callable
from typing import cast

from calccheck.formula import Node, Prefix, Reference
from calccheck.read.cursor import Cursor
from calccheck.read.tokens import RELATIONS, Token

Bracket = tuple[tuple[str, Node], ...]


def bracket(c: Cursor, expression: Callable[[Cursor], Node]) -> Bracket:
    """``(V_adc / Vref)``, ``(V_out ≤ 3.4 V)``: the members with the relation before each."""
    opened = c.take()
    members = [("", expression(c))]
    while c.now.kind == "operator" and c.now.text in RELATIONS:
        relation = c.take().text
        members.append((relation, expression(c)))
    c.close(")", opened)
    return tuple(members)


def over(c: Cursor, t: Token, members: Bracket) -> Reference:
    """The prefix at a token with the bracket behind it."""
    prefix = cast(Prefix, t.text)
    related = len(members) > 1
    if related and prefix != "yield":
        c.fail(f"a relation in a bracket belongs behind yield; {prefix} looks at one expression", t)
    if prefix == "yield" and not related:
        c.fail("yield needs a relation: yield (V_out ≤ 3.4 V)", t)
    text = " ".join(c.piece.text[t.start : c.seen[c.at - 1].end].split())
    return Reference(text, c.span(t.start), prefix=prefix, text=text, maths=c.maths, bracket=members)


def bracketed_in(node: Node) -> tuple[Node, ...]:
    """The members of the bracket that a node is a prefix of."""
    return tuple(n for _, n in node.bracket) if isinstance(node, Reference) else ()
