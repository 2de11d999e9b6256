"""A substitution laid beside its formula: each printed number stands where a name or a bracket of the formula stands.

``12.6 V × 0.594 Ω/(0.22 Ω + 0.594 Ω)`` beside ``Vb × (Rp ∥ RL)/(Rb + Rp ∥ RL)``. Where every number is right for what stands in
its place, nothing has to be guessed from values.
"""

from __future__ import annotations

from itertools import takewhile

from calccheck.arithmetic import Amount
from calccheck.formula import Binary, Call, Group, Node, Number, Reference, Unary
from calccheck.judge.ground import Ground
from calccheck.judge.members import Worked, restates_part
from calccheck.judge.rounding import Printed, bare_zero, equal, printed, within

Pairs = list[tuple[Printed, Node]]  # a printed number of the member, and what stands there in the formula


def number_by_number(w: Worked, ground: Ground) -> bool:
    """Whether a formula before the member equals the truth, and every number of the member is right for its place in it."""
    for m in takewhile(lambda other: other is not w, ground.members):
        if m.sort != "formula" or m.amount is None or not equal(m.amount.value, ground.truth.value):
            continue
        pairs: Pairs = []
        known = {id(node): a for node, a in m.pieces}
        if _aligned(m.node, w.node, pairs) and all(_right(p, piece, known, ground) for p, piece in pairs):
            return True
    return False


def _aligned(formula: Node, member: Node, pairs: Pairs) -> bool:
    """Whether the member has the formula's form, its numbers noted with what stands in their places."""
    number = printed(member)
    if number is not None:
        pairs.append((number, _open(formula)))
        return True
    formula, member = _open(formula), _open(member)
    match formula, member:
        case Reference(), Reference():
            return formula.text == member.text
        case Binary(), Binary():
            same = formula.operator == member.operator or {formula.operator, member.operator} == {"×", "·"}
            left = same and _aligned(formula.left, member.left, pairs)
            return left and _aligned(formula.right, member.right, pairs)
        case Unary(), Unary():
            return formula.sign == member.sign and _aligned(formula.operand, member.operand, pairs)
        case Call(), Call():
            same = formula.function == member.function and len(formula.arguments) == len(member.arguments)
            both = zip(formula.arguments, member.arguments, strict=same)
            return same and all(_aligned(f, m, pairs) for f, m in both)
    return False


def _open(node: Node) -> Node:
    while isinstance(node, Group) and not node.unit.text:
        node = node.inner
    return node


def _right(p: Printed, piece: Node, known: dict[int, Amount], ground: Ground) -> bool:
    """Whether a number is the very value of a part, an assumption or a number in its place, or a right rounding of the rest."""
    a = known.get(id(piece))
    if a is None or isinstance(a.value, complex):
        return False
    if a.dimension != p.amount.dimension or a.point != p.amount.point or a.level != p.amount.level:
        return False
    if _exact(piece, ground) or bare_zero(p):
        return equal(p.value, a.value)
    return within(p, a.value)


def _exact(piece: Node, ground: Ground) -> bool:
    if not isinstance(piece, Reference):
        return isinstance(piece, Number)
    meaning = ground.names.meaning(piece)
    if meaning is None or meaning.defined is None:
        return restates_part(piece, [meaning])
    return meaning.defined.given and meaning.defined.printed is not None
