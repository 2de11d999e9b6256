"""Products and sums as an engineer regroups them: ``R2/(R1 + R2)`` is a piece of ``Vb × R2/(R1 + R2)``, though no bracket says so.

A printed 0.697 in ``12 V × 0.697`` rounds such a piece.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from itertools import combinations

from calccheck.arithmetic import Amount, size
from calccheck.formula import Binary, Group, Node, Unary
from calccheck.judge.phasors import Sized
from calccheck.units import Dimension

MOST = 6  # factors or terms; more of them are not regrouped
_PRODUCT, _SUM = "×·÷", "+-"


def regrouped(pieces: Sequence[tuple[Node, Amount]]) -> list[Sized]:
    """Magnitudes of the products of some factors of each product, of their reciprocals, and of the sums of some terms."""
    known = {id(node): a for node, a in pieces}
    found: list[Sized] = []
    for node, _ in pieces:
        for signs in (_PRODUCT, _SUM):
            if isinstance(node, Binary) and node.operator in signs:
                parts = [(known[id(n)], sign) for n, sign in _parts(node, signs, 1) if id(n) in known]
                if len(parts) <= MOST:
                    found += _products(parts) if signs == _PRODUCT else _sums(parts)
    return found


def _parts(node: Node, signs: str, sign: int) -> Iterator[tuple[Node, int]]:
    """The factors of a product or the terms of a sum, with −1 where one divides or is taken away."""
    match node:
        case Group(inner=inner) if not node.unit.text:
            yield from _parts(inner, signs, sign)
        case Unary(sign="-"):
            yield from _parts(node.operand, signs, sign if signs == _PRODUCT else -sign)
        case Binary(operator=operator) if operator in signs:
            yield from _parts(node.left, signs, sign)
            yield from _parts(node.right, signs, -sign if operator in "÷-" else sign)
        case _:
            yield node, sign


def _products(parts: Sequence[tuple[Amount, int]]) -> Iterator[Sized]:
    for count in range(1, len(parts)):
        for some in combinations(parts, count):
            over = math.prod(float(size(a.value)) for a, sign in some if sign > 0)
            under = math.prod(float(size(a.value)) for a, sign in some if sign < 0)
            dimension: Dimension = tuple(sum(sign * a.dimension[k] for a, sign in some) for k in range(5))
            if 0 < over < math.inf and 0 < under < math.inf:
                yield dimension, over / under
                yield tuple(-x for x in dimension), under / over


def _sums(parts: Sequence[tuple[Amount, int]]) -> Iterator[Sized]:
    for count in range(2, len(parts)):
        for some in combinations(parts, count):
            yield some[0][0].dimension, float(size(sum((sign * a.value for a, sign in some), start=0)))
