"""Ranges whose two values share one unit: ``3.21 … 3.45 V``, ``3.33 ± 0.12 V``, ``(3.33 ± 0.12) V``."""

from __future__ import annotations

from dataclasses import replace

from calccheck.formula import Group, Node, Number, Range, Unary
from calccheck.source import Span
from calccheck.units import Unit


def with_unit_of(low: Node, high: Node) -> Node:
    """The first value with the unit of the last, where it has none; a percentage is its own unit."""
    inner = low.operand if isinstance(low, Unary) else low
    last = high.operand if isinstance(high, Unary) else high
    if isinstance(inner, Number) and isinstance(last, Number) and not inner.unit.text and last.unit.text != "%":
        inner = replace(inner, unit=last.unit, unit_words=last.unit_words)
        return replace(low, operand=inner) if isinstance(low, Unary) else inner
    return low


def bracketed(middle: Node, half: Node, span: Span, unit: Unit, unit_words: tuple[str, ...]) -> Range:
    """``(3.33 ± 0.12) V``."""
    ends = [_plainly(Group(n, n.span, unit, unit_words)) for n in (middle, half)]
    return Range(ends[0], ends[1], span, centred=True)


def _plainly(group: Group) -> Node:
    """``(3.33) V`` as 3.33 V."""
    if isinstance(group.inner, Number) and not group.inner.unit.text:
        return replace(group.inner, unit=group.unit, unit_words=group.unit_words)
    return group
