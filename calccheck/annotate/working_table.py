"""The independent working of one quantity as tables: each source alone and the sum, by both routes; what moves it, and how far."""

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
    lines = [lines[0], rule, *lines[1:split], *([rule] if rows else []), *lines[split:]]
    return "\n".join([*lines, *_moved(worked)]) + "\n"


def _moved(worked: WorkedQuantity) -> list[str]:
    """By how much each value moves the quantity, largest first: itself one percent larger, and alone at the ends of its tolerance."""
    if not worked.sensitivities:
        return []
    table = [("moved by", "+1 %", "at its low end", "at its high end")]
    for s in worked.sensitivities:
        fixed = not s.low.value and not s.high.value
        ends = ("-", "-") if fixed else (_signed(s.low), _signed(s.high))
        table.append((one_line(s.name), _signed(s.by_percent), *ends))
    widths = [max(len(row[k]) for row in table) for k in range(4)]
    lines = [
        "  ".join(c.ljust(w) if k == 0 else c.rjust(w) for k, (c, w) in enumerate(zip(row, widths, strict=True)))
        for row in table
    ]
    return ["", lines[0], "-" * (sum(widths) + 6), *lines[1:]]


def _signed(a: Amount) -> str:
    told = shown(a, figures=4)
    return told if told.startswith("−") or not a.value else f"+{told}"


def _share(part: Amount, total: Amount) -> str:
    if not total.value or isinstance(part.value, complex) or isinstance(total.value, complex):
        return "-"  # phasors have no shares: they need not point the same way
    return f"{digits(100 * part.value / total.value, 3)} %".replace("-", "−")
