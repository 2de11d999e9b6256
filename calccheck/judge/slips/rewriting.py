"""Slips in a formula of the working: the formula written again with the slip, at each place where it can be made."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace

from calccheck.arithmetic import DimensionFault, Doubt, Value, evaluate, size
from calccheck.formula import Binary, Call, Group, Node, Unary
from calccheck.judge.members import Names
from calccheck.judge.rounding import equal
from calccheck.judge.slips.case import Case, Guess
from calccheck.units import Dimension

Rewriting = tuple[Node, str, str]  # the rewritten expression, the slip that writes it (or none), the slip that it mends
Rule = Callable[[Node, Names], Iterator[Rewriting]]


def in_formulas(case: Case, rule: Rule) -> Iterator[Guess]:
    """What the chain's formulas and substitutions come to with the slip; for a wrong one, whether it is right without it."""
    wrong = case.members("differs")
    for w in (case.held, *(w for w, _ in case.miss.judged)):
        if w.sort not in ("formula", "substitution"):
            continue
        for node, made, mended in rewritten(w.node, rule, case.names):
            try:
                value = evaluate(node, case.names.amount)
            except (Doubt, DimensionFault):
                continue
            if value.dimension != case.miss.truth.dimension:
                continue
            shown = value.value if value.level else case.log(value.value)
            if w not in wrong and made:
                yield Guess(f"{made} in the working", shown)
            elif w in wrong and _right(w.sort, shown, case):
                yield Guess(f"{mended} in {w.member.text}", certain=True)


def _right(sort: str, value: Value, case: Case) -> bool:
    if sort == "formula":
        return equal(value, case.truth)
    return bool(size(value - case.truth) <= case.ledger.settings.carry * size(case.truth))


def rewritten(node: Node, rule: Rule, names: Names) -> Iterator[Rewriting]:
    """The expression with the rule applied at one place, for every place."""
    yield from rule(node, names)
    match node:
        case Unary():
            yield from (
                (replace(node, operand=n), made, mended) for n, made, mended in rewritten(node.operand, rule, names)
            )
        case Group():
            yield from (
                (replace(node, inner=n), made, mended) for n, made, mended in rewritten(node.inner, rule, names)
            )
        case Binary():
            yield from ((replace(node, left=n), made, mended) for n, made, mended in rewritten(node.left, rule, names))
            yield from (
                (replace(node, right=n), made, mended) for n, made, mended in rewritten(node.right, rule, names)
            )
        case Call():
            for k, one in enumerate(node.arguments):
                for n, made, mended in rewritten(one, rule, names):
                    yield replace(node, arguments=(*node.arguments[:k], n, *node.arguments[k + 1 :])), made, mended


def everywhere(node: Node, change: Callable[[Node], Node | None]) -> Node:
    """The expression with every piece changed for which ``change`` gives another."""
    changed = change(node)
    if changed is not None:
        return changed
    match node:
        case Unary():
            return replace(node, operand=everywhere(node.operand, change))
        case Group():
            return replace(node, inner=everywhere(node.inner, change))
        case Binary():
            return replace(node, left=everywhere(node.left, change), right=everywhere(node.right, change))
        case Call():
            return replace(node, arguments=tuple(everywhere(x, change) for x in node.arguments))
    return node


def dimension_of(node: Node, names: Names) -> Dimension | None:
    """The dimension of a piece of a formula, ``None`` where it has no value."""
    try:
        return evaluate(node, names.amount).dimension
    except (Doubt, DimensionFault):
        return None


def factors(node: Node) -> Iterator[Node]:
    """The factors of a product."""
    if isinstance(node, Binary) and node.operator in ("×", "·"):
        yield from factors(node.left)
        yield from factors(node.right)
    else:
        yield node


def opened(node: Node) -> Node:
    """An expression without the brackets round it."""
    while isinstance(node, Group) and not node.unit.text:
        node = node.inner
    return node


def same(a: Node, b: Node, names: Names) -> bool:
    """Whether two pieces come to the same."""
    try:
        left, right = (evaluate(x, names.amount) for x in (a, b))
    except (Doubt, DimensionFault):
        return False
    return left.dimension == right.dimension and equal(left.value, right.value)
