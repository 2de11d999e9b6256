"""The three values of a row of the record as text: printed, recomputed, deviation."""

from __future__ import annotations

from fractions import Fraction

from calccheck.annotate.maths_words import plain
from calccheck.arithmetic import Amount
from calccheck.formula import Binary, Node, Number, Range, Unary, numbers
from calccheck.model import Claim, Judged, Member
from calccheck.printing import shown
from calccheck.units import PLAIN, UNITS, Unit, digits


def _value_member(claim: Claim) -> Member | None:
    """The member that prints the claim's value: the last literal behind ``=`` or ``≈``, else the last behind a bound."""
    tail = [m for m in claim.members if _is_value(m.node)]
    stated = [m for m in tail if m.relation in ("=", "≈")]
    chosen = stated or tail
    return chosen[-1] if chosen else None


def _is_value(node: Node) -> bool:
    if isinstance(node, Binary):
        return node.operator == "∠" and _is_value(node.left) and _is_value(node.right)
    return isinstance(node, Number | Range) or (isinstance(node, Unary) and isinstance(node.operand, Number))


def printed_value(judged: Judged) -> str:
    """The value as the claim prints it."""
    member = _value_member(judged.claim)
    if member is not None:
        text = plain(member.text)
        return text if member.relation in ("", "=") else f"{member.relation} {text}"
    return _amount(judged.claimed, _unit(judged))


def computed_value(judged: Judged) -> str:
    """The recomputed value, in the unit of the printed one."""
    unit = _unit(judged)
    if judged.low is not None and judged.high is not None:
        return f"{_amount(judged.low, unit)} … {_amount(judged.high, unit)}"
    return _amount(judged.computed or judged.low or judged.high, unit)


def _unit(judged: Judged) -> Unit:
    """The unit that the claim's value is printed in."""
    member = _value_member(judged.claim)
    found = [n.unit for n in numbers(member.node)] if member else []
    if member is not None and isinstance(member.node, Binary):  # a phasor: behind it stands the unit of the angle
        found = found[:1] if found[0].text else []
    return found[-1] if found else UNITS.get(judged.claimed_unit, PLAIN)


def _amount(amount: Amount | None, unit: Unit) -> str:
    return "" if amount is None else shown(amount, unit)


def deviation_text(judged: Judged) -> str:
    """Printed minus recomputed in percent of the recomputed value's size; without a sign where it is not known."""
    if judged.deviation is None:
        return ""
    percent = abs(judged.deviation) * 100
    if percent < 5e-4:
        return "0 %" if percent == 0 else "< 0.001 %"
    claimed, computed = (a.value if a is not None else None for a in (judged.claimed, judged.computed))
    sign = ""
    if isinstance(claimed, Fraction | float) and isinstance(computed, Fraction | float):
        sign = "+" if judged.deviation > 0 else "−"
    return f"{sign}{digits(percent, 2 if percent < 0.1 else 3)} %"
