"""A sheet of sixty pages and four hundred claims, made up: twenty dividers, each with prose, working and a table, one value in twenty wrong."""

from __future__ import annotations

from fractions import Fraction

SECTIONS, CLAIMS_EACH = 20, 20


def large_sheet(sections: int = SECTIONS) -> str:
    head = "---\nproject: Made up\nsubject: A sheet of many pages\nsheet: LS-1\nby: AB\ndate: 2026-03-04\n---\n\n# Many dividers\n\n"
    return head + "\n".join(_section(k) for k in range(1, sections + 1))


def _printed(value: Fraction, unit: str) -> str:
    return f"{float(value):.6g} {unit}"


def _section(k: int) -> str:
    """A source, two resistors in series and a third at their joint: the values by hand formulas of the divider."""
    v, r1, r2, r3 = Fraction(k + 4), Fraction(1), Fraction(2 + k % 3), Fraction(6)  # volts and kilohms
    low = r2 * r3 / (r2 + r3)
    i = v / (r1 + low)
    b = i * low
    words = (
        "The divider feeds its load as it stands; the values follow from the parts in parallel and the whole in series. "
        * 11
    )
    rows = "".join(f"| `V_b{k} × {n}` | {_printed(b * n, 'V')} |\n" for n in range(1, 6))
    wrong = _printed(b * Fraction(11, 10), "V")
    lines = [
        f"Rlow{k} = R2x{k} × R3x{k} / (R2x{k} + R3x{k}) = {float(r2):g} kΩ × {float(r3):g} kΩ / ({float(r2):g} kΩ + {float(r3):g} kΩ) = {_printed(low, 'kΩ')}",
        f"I_R1x{k} = V1x{k} / (R1x{k} + Rlow{k}) = {_printed(i, 'mA')}",
        f"V_b{k} = V1x{k} − R1x{k} × I_R1x{k} = {_printed(b, 'V')}",
        *(f"I_R1x{k} × {n} = {_printed(i * n, 'mA')}" for n in range(2, 8)),
        f"V_b{k} × 1 = {wrong}",
    ]
    working = "\n".join(lines)
    said = "\n\n".join(f"Taken {n} times it is `V_b{k} × {n} = {_printed(b * n, 'V')}`. {words}" for n in range(11, 16))
    return (
        f"## Divider {k}\n\n{words}\n\n```circuit d{k}\nreference com\nV1x{k}: {float(v):g} V, a{k} to com\n"
        f"R1x{k}: 1 kΩ, a{k} to b{k}\nR2x{k}: {float(r2):g} kΩ, b{k} to com\nR3x{k}: 6 kΩ, b{k} to com\n```\n\n"
        f"```working\n{working}\n```\n\n| quantity | value |\n|---|---|\n{rows}\n{said}\n"
    )
