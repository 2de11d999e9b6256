"""How a formula depends on each single value: what of its extremes must lie at corners of a box.

Each open value stands in one row of a circuit's equations, so that by Cramer's rule the determinant D, and the numerator of
every unknown, has it to the first power at most. A quotient (a + b·x)/(c + d·x) rises or falls all along x where its divisor
does not pass zero. A formula that is such a quotient in every single value has its extremes at corners; the size or the square
of one has its largest value there.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, replace
from typing import Literal

from calccheck.formula import Binary, Call, Group, Node, Number, Reference, Unary
from calccheck.toleranced import Formula, Reading

Kind = Literal["quotient", "valley", "hill"]  # extremes at corners: both, the largest, the least


@dataclass(frozen=True, slots=True)
class Form:
    """``own``: the one value along which the formula has, at most, one turning point instead.

    ``inner``: of a valley or a hill, the quotient that it bends at zero.
    """

    kind: Kind
    own: str = ""
    inner: Node | None = None


def form_of(formula: Formula) -> Form | None:
    """The form of a formula, ``None`` where it is of none that is known."""
    if any(r.frequency for r in formula.readings.values()):
        return None
    return _form(formula.node, formula)


def _form(node: Node, formula: Formula) -> Form | None:
    match node:
        case Group():
            inner = _form(node.inner, formula)
            return inner if node.unit.factor > 0 or inner is None else _turned(inner)
        case Unary(sign="-"):
            inner = _form(node.operand, formula)
            return inner and _turned(inner)
        case Call(function="abs"):
            signed = node.arguments[0]
            return Form("valley", inner=signed) if _is_quotient(signed, formula) else None
        case Call(function="power"):
            return _power(node, formula)
        case Binary(operator="+" | "-"):
            left, right = node.left, node.right
            if not _varies(left, formula) or not _varies(right, formula):
                inner = _form(left if _varies(left, formula) else right, formula)
                turned = node.operator == "-" and not _varies(left, formula)
                if inner is not None and inner.kind != "quotient":
                    return _turned(inner) if turned else inner
        case Binary(operator="^", right=Number(digits=digits)) if digits == 2 and _is_quotient(node.left, formula):
            return Form("valley", inner=node.left)
    ratio = _ratio(node, formula)
    return _quotient(ratio, formula) if ratio is not None else None


def _turned(form: Form) -> Form:
    turned: dict[Kind, Kind] = {"quotient": "quotient", "valley": "hill", "hill": "valley"}
    return replace(form, kind=turned[form.kind])


def _varies(node: Node, formula: Formula) -> bool:
    ratio = _ratio(node, formula)
    return ratio is None or bool(ratio.over or ratio.under or ratio.solved)


def _power(node: Call, formula: Formula) -> Form | None:
    """A resistance times the square of its own current: X·(n/(a + b·X))² has one turning point, the matched load."""
    names = [n for n in (node.arguments[0],) if isinstance(n, Reference)]
    own = next((n.word for n in names if any(v.key == n.word for v in formula.varied)), "")
    current = node.arguments[1]
    return Form("valley", own, current) if _is_quotient(current, formula) else None


# --- degrees --------------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Ratio:
    """Powers of each varied value over and under the stroke, and of each determinant, by its frequency and circuit."""

    over: Counter[str]
    under: Counter[str]
    solved: Counter[tuple[int, float]]


def _is_quotient(node: Node, formula: Formula) -> bool:
    ratio = _ratio(node, formula)
    return ratio is not None and _quotient(ratio, formula) == Form("quotient")


def _quotient(ratio: _Ratio, formula: Formula) -> Form | None:
    """Whether no value stands to a higher power than the first, or only one does and has one turning point: a + b·x + c·x²."""
    over, under = Counter(ratio.over), Counter(ratio.under)
    for circuit, power in ratio.solved.items():
        for key in _in_determinant(circuit, formula):
            (under if power > 0 else over)[key] += abs(power)
    steep = [k for k in {*over, *under} if over[k] > 1 or under[k] > 1]
    if not steep:
        return Form("quotient")
    if len(steep) == 1 and over[steep[0]] == 2 and under[steep[0]] == 0:
        return Form("quotient", steep[0])
    return None


def _in_determinant(circuit: tuple[int, float], formula: Formula) -> set[str]:
    reading = next(r for r in formula.readings.values() if _of(r) == circuit)
    sources = {e.name for e in reading.circuit.elements if e.kind in ("voltage source", "current source")}
    drops = ("v_be", "v_ce", "drop")
    return {_name(e.node) for e in reading.effects if e.part not in sources and e.field not in drops}


def _of(reading: Reading) -> tuple[int, float]:
    return id(reading.circuit), float(reading.frequency)


def _name(node: Node) -> str:
    """The one varied value that a part's value is, or is one over."""
    if isinstance(node, Binary):
        node = node.right
    return node.word if isinstance(node, Reference) else ""


def _ratio(node: Node, formula: Formula) -> _Ratio | None:
    match node:
        case Number():
            return _Ratio(Counter(), Counter(), Counter())
        case Reference():
            return _of_name(node.word, formula)
        case Group():
            return _ratio(node.inner, formula)
        case Unary(sign="-" | "+"):
            return _ratio(node.operand, formula)
        case Call(function="power", arguments=(x, i)):
            factors = [_ratio(n, formula) for n in (x, i, i)]
            return _product(_product(factors[0], factors[1]), factors[2])
        case Binary(operator="×" | "·"):
            return _product(_ratio(node.left, formula), _ratio(node.right, formula))
        case Binary(operator="÷"):
            return _product(_ratio(node.left, formula), _inverse(_ratio(node.right, formula)))
        case Binary(operator="+" | "-"):
            return _sum(_ratio(node.left, formula), _ratio(node.right, formula), formula)
    return None


def _of_name(name: str, formula: Formula) -> _Ratio | None:
    reading = formula.readings.get(name)
    if reading is None:
        varies = any(v.key == name for v in formula.varied)
        return _Ratio(Counter([name] if varies else []), Counter(), Counter())
    names = [_name(e.node) for e in reading.effects]
    if "" in names or len(set(names)) < len(names):
        return None  # a value worked from others, or one that stands in two rows
    return _Ratio(Counter(names), Counter(), Counter([_of(reading)]))


def _product(a: _Ratio | None, b: _Ratio | None) -> _Ratio | None:
    if a is None or b is None:
        return None
    solved = Counter(a.solved)
    for key, power in b.solved.items():
        solved[key] += power
    return _Ratio(a.over + b.over, a.under + b.under, Counter({k: n for k, n in solved.items() if n}))


def _inverse(a: _Ratio | None) -> _Ratio | None:
    return a and _Ratio(a.under, a.over, Counter({k: -n for k, n in a.solved.items()}))


def _sum(a: _Ratio | None, b: _Ratio | None, formula: Formula) -> _Ratio | None:
    """Two ratios on one denominator: the determinants of both, each as often as in the one that has it oftener."""
    if a is None or b is None:
        return None
    common = Counter({k: max(a.solved[k], b.solved[k]) for k in {*a.solved, *b.solved}})
    same = a.under == b.under
    sides = []
    for mine, other in ((a, b), (b, a)):
        over = Counter(mine.over) if same else mine.over + other.under
        for k, power in common.items():
            for name in _in_determinant(k, formula):
                over[name] += power - mine.solved[k]
        sides.append(over)
    return _Ratio(
        sides[0] | sides[1],
        Counter(a.under) if same else a.under + b.under,
        Counter({k: n for k, n in common.items() if n}),
    )
