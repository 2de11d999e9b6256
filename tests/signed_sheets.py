"""A sheet with something in every part that a signature covers, and ways to sign it. Its numbers are worked by hand.

10 V over 1 kΩ and 3 kΩ: 10 × 3/4 = 7.5 V at b, 2.5 mA, 7.5 V × 2.5 mA = 18.75 mW. With k = 2, 2 × 7.5 V = 15 V. 7.9 V is measured and accepted.
"""

from __future__ import annotations

from datetime import date

from calccheck.command.signing import put_signature
from calccheck.model import ROLES, Reading, Settings
from calccheck.read.sheet import read_sheet
from calccheck.signatures import digest_of, signature_line
from calccheck.source import Sheet

SIGNED_ON = date(2026, 11, 20)
SHEET = """---
project: Example
subject: Divider
sheet: EX-1
revision: A
by: QD
date: 2026-11-18
check:
  carry: 0.4 %
---

# Divider

Some words before the circuit.

```circuit
reference g
V1: 10 V, a to g          # supply
R1: 1 kΩ ±5 %, a to b
R2: 3 kΩ, b to g, max 0.5 W
```

The node is at `V_b = 7.5 V` and so `I_R2 = 2.50 mA`.

```working
given k = 2               # gain
Vout = k × V_b = 15.0 V
V_a due to V1 = 10.0 V
P_R2 = 19 mW = 18750 µW
```

|        | total  | with R2 open |
|--------|--------|--------------|
| `V_b`  | 7.50 V | 10.0 V       |

Measured: `V_b = 7.9 V` <!-- calccheck: accept 7.9 V for 7.5 V "measured, log 4" by QD until 2027-03-01 -->.
"""


def read(text: str) -> Reading:
    return read_sheet(Sheet("sheet.md", text), Settings())


def sign_text(text: str, role: str = "originator", name: str = "QD", day: date = SIGNED_ON) -> str:
    """The text with a signature, by the function that the command uses."""
    reading = read(text)
    front = next((b for b in reading.page[:1] if b.kind == "front matter"), None)
    assert role in ROLES
    return put_signature(text, front, role, signature_line(name, day, digest_of(reading)))
