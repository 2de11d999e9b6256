"""From text to expression nodes: a parser by binding powers (Pratt, 1973), every node with its place in the sheet.

What two engineers would read differently is a ``Doubt``, never a guess.
"""

from __future__ import annotations

from dataclasses import replace
from decimal import Decimal
from typing import cast

from calccheck.arithmetic import Doubt
from calccheck.formula import (
    NO_QUALIFIERS,
    OVER_TOLERANCES,
    Binary,
    Call,
    Group,
    Node,
    Number,
    Operator,
    Prefix,
    Qualifiers,
    Range,
    Reference,
    Unary,
    children,
)
from calccheck.model import Member, Relation
from calccheck.read.cursor import Cursor
from calccheck.read.numbers_with_units import number_at, unit_behind
from calccheck.read.over_tolerances import bracket, bracketed_in, over
from calccheck.read.qualifiers import qualifiers
from calccheck.read.ranges import bracketed, with_unit_of
from calccheck.read.tokens import RELATIONS, Token, superscript
from calccheck.read.words import FUNCTIONS, PREFIXES, RESERVED
from calccheck.source import Piece
from calccheck.units import UNITS

DEEPEST = 100
LONGEST_SUM = 200
LONGEST_CHAIN = 200
TALLEST = 220  # levels of operations, which are worked out one within the other

_BINDING = {"+": 10, "-": 10, "×": 20, "·": 20, "÷": 20, "∥": 30, "^": 50, "∠": 45}
_JUXTAPOSED = 40
_NO_FACTORS = RESERVED - FUNCTIONS - {"e"}  # words behind which no product goes on
_SIGN = 25  # −R1 ∥ R2 is −(R1 ∥ R2)


def parse(piece: Piece) -> Node:
    """One expression. Raises ``Doubt`` with the place and, where one can be offered, the corrected text."""
    p = Cursor(piece)
    node = expression(p)
    p.expect_end()
    refuse_tall(p, node)
    return node


def parse_value(piece: Piece) -> Node:
    """One expression or range: ``3.21 V … 3.45 V``, ``3.33 V ± 0.12 V``."""
    p = Cursor(piece)
    node = member(p)
    p.expect_end()
    refuse_tall(p, node)
    return node


def parse_chain(piece: Piece, seen: list[Token] | None = None) -> tuple[Member, ...]:
    """``member = member ≤ member``: the members with the relation before each. ``seen``: tokens of dollar maths."""
    p = Cursor(piece, seen)
    members: list[Member] = []
    relation = ""
    while True:
        start = p.now.start
        node = member(p)
        refuse_tall(p, node)
        if len(members) == LONGEST_CHAIN:
            p.fail(f"more than {LONGEST_CHAIN} members in one chain; part it")
        end = p.seen[p.at - 1].end
        text = piece.text[start:end]
        members.append(Member(cast(Relation, relation), node, text, piece.span(start, end)))
        if p.now.kind == "operator" and p.now.text in RELATIONS:
            relation = p.take().text
            continue
        p.expect_end()
        return tuple(members)


def parse_qualifiers(piece: Piece) -> Qualifiers:
    """Qualifiers alone, as a table's edge holds them."""
    p = Cursor(piece)
    found = qualifiers(p)
    p.expect_end()
    return found


def refuse_tall(c: Cursor, node: Node) -> None:
    """Operations within operations may not pile up beyond what can be worked out."""
    if len(c.seen) < TALLEST:
        return
    level, height = [node], 0
    while level:
        level, height = [inner for n in level for inner in (*children(n), *bracketed_in(n))], height + 1
        if height > TALLEST:
            raise Doubt(f"more than {TALLEST} operations within one another; part the formula", node.span)


def member(c: Cursor) -> Node:
    """An expression or a range."""
    start = c.now.start
    node = expression(c)
    if c.is_operator("±"):
        c.take()
        half = expression(c)
        return Range(with_unit_of(node, half), half, c.span(start), centred=True)
    if c.is_operator("…") or (c.now.kind == "word" and c.now.text == "to"):
        c.take()
        high = expression(c)
        return Range(with_unit_of(node, high), high, c.span(start))
    return node


def expression(c: Cursor, above: int = 0) -> Node:
    """An expression whose operators bind tighter than ``above``."""
    c.deep += 1
    if c.deep > DEEPEST:
        c.fail(f"brackets nested deeper than {DEEPEST}")
    start = c.now.start
    node = operand(c)
    for _ in range(LONGEST_SUM):
        further = operation(c, node, start, above)
        if further is None:
            c.deep -= 1
            return node
        node = further
    c.fail(f"more than {LONGEST_SUM} operations in a row; part the sum")


def operation(c: Cursor, left: Node, start: int, above: int) -> Node | None:
    """``left`` and the next operator with its operand, or nothing when none binds tighter than ``above``."""
    t = c.now
    if t.kind == "end":
        return None
    if t.kind == "superscript":
        c.take()
        if len(t.text) > 4:
            c.fail("the power does not fit a floating-point number", t)
        exponent = Number(Decimal(superscript(t.text)), c.piece.span(t.start, t.end))
        return Binary("^", left, exponent, c.span(start))
    if t.kind == "word" and t.text in UNITS and _is_power_of_numbers(left):
        unit, unit_words = unit_behind(c)  # 10⁻³ V
        return Group(left, c.span(start), unit, unit_words)
    if t.kind in ("number", "imaginary", "word", "braced") or c.is_operator("("):
        return juxtaposed(c, left, start, above)
    binding = _BINDING.get(t.text, 0) if t.kind == "operator" else 0
    if binding <= above:
        return None
    c.take()
    if t.text == "∠":
        return phasor(c, left, start)
    right = power_behind(c) if t.text == "^" else expression(c, binding)
    if t.text == "÷" and isinstance(right, Binary) and right.operator == "·":
        raise Doubt(
            "what stands behind the stroke can be read two ways: put brackets around all that is below it",
            right.span,
        )
    sign = cast(Operator, "×" if t.text == "·" else t.text)
    return Binary(sign, left, right, c.span(start))


def phasor(c: Cursor, magnitude: Node, start: int) -> Node:
    """The angle behind ∠, and the unit that may stand behind the angle: ``10 ∠ 30° V``."""
    t = c.now
    sign = c.take() if c.is_operator("-", "+") else None
    angle = operand(c)
    if sign is not None and sign.text == "-":
        angle = Unary("-", angle, c.span(t.start))
    if isinstance(magnitude, Number) and not magnitude.unit.text:
        unit, unit_words = unit_behind(c)
        magnitude = replace(magnitude, unit=unit, unit_words=unit_words)
    return Binary("∠", magnitude, angle, c.span(start))


def power_behind(c: Cursor) -> Node:
    """What stands behind ^: its sign belongs to it alone, and a unit behind it would belong to the power."""
    t = c.now
    sign = c.take() if c.is_operator("-", "+") else None
    right = expression(c, _BINDING["^"] - 1)
    if isinstance(right, Number) and right.unit.text:
        c.fail("a unit behind an exponent: write 1e-3 A or 10^-3 × 1 A", t)
    return right if sign is None else Unary("-" if sign.text == "-" else "+", right, c.span(t.start))


def juxtaposed(c: Cursor, left: Node, start: int, above: int) -> Node | None:
    """``2 R1``, ``2(R1 + R2)``: a product without a sign."""
    t = c.now
    if t.kind == "word" and t.text in _NO_FACTORS:
        return None
    if above >= _JUXTAPOSED:
        return None
    if t.kind in ("number", "imaginary"):
        c.fail(f"{c.shown(t)} follows without an operator; write × for a product")
    if isinstance(left, Unary) and left.sign == "√" and not isinstance(left.operand, Group):
        c.fail("a root without brackets beside a product can be read two ways")
    right = expression(c, _JUXTAPOSED)
    return Binary("·", left, right, c.span(start))


def operand(c: Cursor) -> Node:
    """A number, a name or quantity, a function, a bracket, or one of these behind a sign."""
    t = c.take()
    if t.kind == "number":
        return number_at(c, t)
    if t.kind == "imaginary":
        value = number_at(c, t)
        return Binary("·", Reference("j", c.piece.span(t.start, t.start + 1), text="j"), value, c.span(t.start))
    if t.kind in ("word", "braced"):
        return word(c, t)
    if t.kind == "operator":
        if t.text in ("-", "+"):
            inner = expression(c, _SIGN)
            return Unary("-" if t.text == "-" else "+", inner, c.span(t.start))
        if t.text == "√":
            return Unary("√", expression(c, _JUXTAPOSED), c.span(t.start))
        if t.text == "(":
            return group(c, t)
        if t.text == "|":
            inner = expression(c)
            c.close("|", t)
            return Call("abs", (qualified(c, inner),), c.span(t.start))
    c.fail("expected a value behind this" if t.kind == "end" else f"expected a value, found {c.shown(t)}", t)


def qualified(c: Cursor, inner: Node) -> Node:
    """``|V_out| at 50 Hz``: qualifiers behind the bar belong to the quantity between the bars."""
    found = qualifiers(c)
    if found == NO_QUALIFIERS:
        return inner
    if not isinstance(inner, Reference) or inner.qualifiers != NO_QUALIFIERS:
        c.fail("qualifiers behind a bar belong to one quantity between the bars", c.seen[c.at - 1])
    return replace(inner, qualifiers=found)


def group(c: Cursor, opened: Token) -> Node:
    """A bracket, or a range in one, and the unit that multiplies it where one stands behind."""
    inner = expression(c)
    half = expression(c) if c.is_operator("±") and c.take() else None
    c.close(")", opened)
    unit, unit_words = unit_behind(c)
    if half is not None:
        return bracketed(inner, half, c.span(opened.start), unit, unit_words)
    return Group(inner, c.span(opened.start), unit, unit_words)


def word(c: Cursor, t: Token) -> Node:
    """A function, a prefix with its quantity, or a name with its qualifiers."""
    opens = c.is_operator("(")
    if t.text in FUNCTIONS and opens:
        return call(c, t)
    if t.text in PREFIXES:
        return prefixed(c, t)
    if t.text in ("j", "e") or t.text == "π":
        return Reference(t.text, c.span(t.start), text=t.text)
    if t.text in RESERVED:
        c.fail(f"{t.text} is a word of the language and stands for no value here", t)
    return reference(c, t)


def call(c: Cursor, t: Token) -> Node:
    """``sqrt(x)``, ``max(a, b)``."""
    opened = c.take()
    arguments = [expression(c)]
    while c.is_operator(","):
        c.take()
        arguments.append(expression(c))
    c.close(")", opened)
    if t.text in ("min", "max") and len(arguments) == 1:
        return over(c, t, (("", arguments[0]),))
    return Call(t.text, tuple(arguments), c.span(t.start))


def prefixed(c: Cursor, t: Token) -> Node:
    """``max V_out``, ``max |V_out|``, ``max mag V_out``, ``worst (V_adc / Vref)``, ``yield (V_out ≤ 3.4 V)``."""
    if t.text in OVER_TOLERANCES:
        if c.is_operator("("):
            return over(c, t, bracket(c, expression))
        if c.is_operator("|"):
            return over(c, t, (("", operand(c)),))
        if c.now.kind == "word" and c.now.text in PREFIXES and c.now.text not in OVER_TOLERANCES:
            return over(c, t, (("", prefixed(c, c.take())),))
    if c.now.kind not in ("word", "braced") or c.now.text in RESERVED:
        c.fail(f"expected a quantity behind {t.text}, found {c.shown(c.now)}")
    node = reference(c, c.take())
    return replace(node, prefix=cast(Prefix, t.text), span=c.span(t.start), text=f"{t.text} {node.text}")


def reference(c: Cursor, t: Token) -> Reference:
    """A name or quantity with its qualifiers."""
    letter, _, subscript = t.text.partition("_")
    braced = t.kind == "braced"
    parts = tuple(s.strip() for s in subscript.strip("{}").split(",")) if subscript else ()
    if braced and not all(parts):
        c.fail(f"{c.shown(t)}: a subscript is empty", t)
    found = qualifiers(c)
    return Reference(
        t.text, c.span(t.start), letter if parts else "", parts, braced, found,
        text=c.piece.text[t.start : c.seen[c.at - 1].end], maths=c.maths,
    )  # fmt: skip


def _is_power_of_numbers(node: Node) -> bool:
    if not (isinstance(node, Binary) and node.operator == "^" and isinstance(node.left, Number)):
        return False
    exponent = node.right.inner if isinstance(node.right, Group) else node.right
    exponent = exponent.operand if isinstance(exponent, Unary) else exponent
    return isinstance(exponent, Number) and not node.left.unit.text
