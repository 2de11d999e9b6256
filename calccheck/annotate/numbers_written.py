"""Numbers as the sheet writes them, for outputs that set formulas."""

from __future__ import annotations

import re
from decimal import Decimal, InvalidOperation

from calccheck.formula import Number

_NUMBER = re.compile(
    r"(?P<digits>(?:\d[\d\u00a0\u2009\u202f]*)?\.?\d*)"
    r"(?:[eE](?P<e>[-+−]?\d+)|\s*[×·*]\s*10(?:(?P<up>[⁺⁻]?[⁰¹²³⁴-⁹]+)|\^\(?(?P<hat>[-+−]?\d+)\)?))?"
)
_LOWERED = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁺⁻−", "0123456789+--")
_RAISED = str.maketrans("0123456789-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻")


def number_written(node: Number, sheet: str) -> str:
    """Digits as written, where the sheet has them at the number's place, and the unit."""
    m = _NUMBER.match(sheet, node.span.start, node.span.end)
    digits = (_as_written(m, node.digits) if m else None) or str(node.digits)
    return digits + ("" if node.unit.text in ("", "°") else " ") + node.unit.text


def _as_written(m: re.Match[str], value: Decimal) -> str | None:
    """The matched digits with the exponent raised, if that is the number indeed."""
    power = (m["e"] or m["up"] or m["hat"] or "").translate(_LOWERED)
    try:
        plain = Decimal(re.sub(r"[\u00a0\u2009\u202f]", "", m["digits"])).scaleb(int(power or 0))
    except InvalidOperation:
        return None
    if plain != value:
        return None
    return m["digits"] + (f" × 10{str(int(power)).translate(_RAISED)}" if power else "")
