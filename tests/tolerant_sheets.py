"""Sheets over tolerances for tests."""

from __future__ import annotations

from calccheck import check_text

DIVIDER = """```circuit
reference com
Vb: 12 V ±5 %,      a to com
R1: 10 kΩ ±1 %,     a to out
R2: 4.7 kΩ ±2 %,    out to com
given Vmax = 4.2 V ±1 %
given Vtyp = 4.2 V
```

"""
HIGH = 12.6 * 4.794 / (9.9 + 4.794)  # 4.11082 V
LOW = 11.4 * 4.606 / (10.1 + 4.606)  # 3.57054 V
NOMINAL = 12 * 4.7 / 14.7  # 3.83673 V


def front(**settings):
    lines = "\n".join(f"  {key}: {value}" for key, value in settings.items())
    return f"---\nsheet: TS-199\ncheck:\n{lines}\n---\n" if settings else ""


def judged(claim, circuit=DIVIDER, **settings):
    return check_text("sheet.md", f"{front(**settings)}{circuit}`{claim}`\n").claims[-1]


def verdict(claim, circuit=DIVIDER, **settings):
    return judged(claim, circuit, **settings).verdict


FILTER = "```circuit\nV1: 1 V, a to gnd, 1000 Hz\nR1: 1 kΩ ±5 %, a to b\nC1: 100 nF ±10 %, b to gnd\n```\n\n"
