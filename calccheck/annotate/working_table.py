"""The independent working of one quantity as a table: each source alone, the sum, the nodal value, the gap between the two."""

from __future__ import annotations

from collections.abc import Sequence

from calccheck.annotate.visible import one_line
from calccheck.arithmetic import Amount, Real
from calccheck.units import digits, printed


def working_table(
    quantity: str, alone: Sequence[tuple[str, Amount]], total: Amount, nodal: Amount, gap: float, unit: str = ""
) -> str:
    """The table as text.

    ``alone``: each independent source with the quantity's value when it acts by itself, in SI; ``total``: their sum;
    ``nodal``: the value by nodal solution; ``gap``: their difference relative to the circuit's scale; ``unit``: the unit to
    print in, the handiest where none is given. A source's share is its value over the sum.
    """
    rows = [(f"due to {name}", _shown(a, unit), _share(a.value, total.value)) for name, a in alone]
    rows += [("sum", _shown(total, unit), ""), ("nodal solution", _shown(nodal, unit), ""), ("gap", f"{gap:.1e}", "")]
    heads = (one_line(quantity), "value", "share")
    rows = [heads, *((one_line(name), value, share) for name, value, share in rows)]
    widths = [max(len(row[k]) for row in rows) for k in range(3)]
    lines = [f"{n:<{widths[0]}}  {v:>{widths[1]}}  {s:>{widths[2]}}".rstrip() for n, v, s in rows]
    rule = "-" * (sum(widths) + 4)
    return "\n".join([lines[0], rule, *lines[1 : 1 + len(alone)], rule, *lines[1 + len(alone) :]]) + "\n"


def _shown(amount: Amount, unit: str) -> str:
    return printed(amount.value, amount.dimension, 6, unit)


def _share(part: Real, total: Real) -> str:
    return f"{digits(100 * part / total, 3)} %".replace("-", "−") if total else "-"
