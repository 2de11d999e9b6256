"""Units that stand loose behind a number: a word that nothing is called in the sheet, but that is a unit.

``0.00393 /K`` and ``0.004 /°C`` are coefficients where nothing is called K; ``3 lbf`` is a force where pint knows the unit and
the sheet no such name. The parser cannot tell them from a quotient and a product, because it knows no names.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from calccheck.formula import Binary, Group, Node, Number, Reference, Unary
from calccheck.source import Span
from calccheck.units import PLAIN, UNITS, Unit, beyond_table, times


def with_loose_units(node: Node, is_name: Callable[[Reference], bool]) -> Node:
    """The expression with loose units taken into the numbers before them. ``is_name`` tells what the sheet knows."""
    match node:
        case Binary():
            left, right = with_loose_units(node.left, is_name), with_loose_units(node.right, is_name)
            if (
                isinstance(left, Number)
                and not left.unit.text
                and isinstance(right, Reference)
                and not right.subscripts
            ):
                unit = _unit(node.operator, right, is_name)
                if unit is not None:
                    return Number(left.digits, Span(left.span.start, right.span.end), unit, (right.word,))
            if node.operator == "÷" and isinstance(right, Reference) and not right.subscripts:
                unit = _unit("÷", right, is_name)
                taken = _onto_last(left, unit, right) if unit is not None else None
                if taken is not None:
                    return taken
            same = left is node.left and right is node.right
            return node if same else replace(node, left=left, right=right)
        case Unary():
            operand = with_loose_units(node.operand, is_name)
            return node if operand is node.operand else replace(node, operand=operand)
        case Group():
            inner = with_loose_units(node.inner, is_name)
            return node if inner is node.inner else replace(node, inner=inner)
    return node


def _onto_last(node: Node, unit: Unit, word: Reference) -> Node | None:
    """``E × 0.31 /kWh``: the unit taken into the last factor of a product, where that is a number without one."""
    if isinstance(node, Number) and not node.unit.text:
        return Number(node.digits, Span(node.span.start, word.span.end), unit, (word.word,))
    if isinstance(node, Binary) and node.operator in ("×", "·"):
        right = _onto_last(node.right, unit, word)
        return None if right is None else replace(node, right=right, span=Span(node.span.start, word.span.end))
    return None


def _unit(operator: str, ref: Reference, is_name: Callable[[Reference], bool]) -> Unit | None:
    if operator == "÷" and ref.word in UNITS and not is_name(ref):
        return times(PLAIN, UNITS[ref.word], -1)
    if operator == "·" and not is_name(ref):
        return beyond_table(ref.word)
    return None
