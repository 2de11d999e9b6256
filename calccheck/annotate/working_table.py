"""The independent working of one quantity as a table: each source alone, the sum, the nodal value, the gap between the two."""

from __future__ import annotations

from calccheck.annotate.visible import one_line
from calccheck.arithmetic import Amount
from calccheck.model import WorkedQuantity
from calccheck.printing import shown
from calccheck.units import digits


def working_table(worked: WorkedQuantity) -> str:
    """The table as text. A source's share is its value over the sum; the gap is relative to the circuit's scale."""
    rows = [(f"due to {name}", shown(alone), _share(alone, worked.total)) for name, alone in worked.rows]
    sums = [("sum", shown(worked.total), "")]
    if worked.nodal is not None:
        sums += [("nodal solution", shown(worked.nodal), ""), ("gap", f"{worked.gap:.1e}", "")]
    table = [(one_line(worked.quantity), "value", "share"), *((one_line(n), v, s) for n, v, s in (*rows, *sums))]
    widths = [max(len(row[k]) for row in table) for k in range(3)]
    lines = [f"{n:<{widths[0]}}  {v:>{widths[1]}}  {s:>{widths[2]}}".rstrip() for n, v, s in table]
    rule = "-" * (sum(widths) + 4)
    split = 1 + len(rows)
    return "\n".join([lines[0], rule, *lines[1:split], *([rule] if rows else []), *lines[split:]]) + "\n"


def _share(part: Amount, total: Amount) -> str:
    if not total.value or isinstance(part.value, complex) or isinstance(total.value, complex):
        return "-"  # phasors have no shares: they need not point the same way
    return f"{digits(100 * part.value / total.value, 3)} %".replace("-", "−")
