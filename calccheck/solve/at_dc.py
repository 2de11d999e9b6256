"""What a part is at direct current, and what keeps a part by itself from being solved."""

from __future__ import annotations

from collections.abc import Iterable
from fractions import Fraction
from typing import Literal

from calccheck.model import Circuit, Control, Element, Finding
from calccheck.rules import RULES
from calccheck.source import Span

Role = Literal["resistor", "link", "gap", "voltage", "current", "controlled voltage", "controlled current"]

_ROLES: dict[str, Role] = {
    "resistor": "resistor",
    "voltage source": "voltage",
    "current source": "current",
    "controlled voltage source": "controlled voltage",
    "controlled current source": "controlled current",
    "short": "link",
    "inductor": "link",
    "open": "gap",
    "capacitor": "gap",
}
_WIDEST = 100  # a value lies within 2 to the power of ±this, about 1e±30 in SI, far outside any of the trade


def role(e: Element) -> Role | None:
    """A resistance of zero is a link, an inductor too, a capacitor a gap; ``None`` for parts that are not solved."""
    return "link" if e.kind == "resistor" and e.value == 0 else _ROLES.get(e.kind)


def value(e: Element) -> Fraction:
    """Ohms, volts, amperes or gain, of a part whose kind has one. Raises ``ValueError`` where it is missing."""
    if e.value is None:
        raise ValueError(f"{e.name} has no value")
    return e.value


def fault(message: str, span: Span, suggestion: str = "", kind: str = "structure") -> Finding:
    """A finding of this stage."""
    return Finding(kind, RULES[kind].severity, message, span, suggestion)


def part_faults(e: Element, circuit: Circuit) -> list[Finding]:
    """What is wrong with one part by itself: not solved, no value, a value out of all bounds, nothing to steer it."""
    if role(e) is None:
        return [
            fault(f"{e.name} is a part ({e.kind}) that this version does not solve.", e.span, kind="not-solved-here")
        ]
    if e.kind in ("short", "open", "inductor", "capacitor"):
        return []
    if e.value is None:
        return [fault(f"{e.name} has no number for a value, which a solution needs.", e.span)]
    if e.value and abs(e.value.numerator.bit_length() - e.value.denominator.bit_length()) > _WIDEST:
        return [fault(f"{e.name} has a value outside 1e−30 to 1e30 in SI units. Check prefix and exponent.", e.span)]
    return _control_faults(e, circuit) if e.kind.startswith("controlled") else []


def _control_faults(e: Element, circuit: Circuit) -> list[Finding]:
    control = e.control or Control()
    if control == Control():
        return [fault(f"{e.name} is a controlled source, but nothing is named that controls it.", e.span)]
    names = {x.name for x in circuit.elements} if control.part else {*circuit.nodes(), circuit.reference}
    missing = [
        n for n in ([control.part] if control.part else [control.plus, control.minus]) if n not in names or not n
    ]
    what = "the current of part" if control.part else "the voltage at node"
    return [
        fault(f"{e.name} is controlled by {what} {n or '(no name)'}, which this circuit does not have.{_near(n, names)}", e.span)
        for n in dict.fromkeys(missing)
    ]  # fmt: skip


def _near(name: str, names: Iterable[str]) -> str:
    from difflib import get_close_matches  # late: needed only in a message

    near = get_close_matches(name, sorted(n for n in names if n), n=1)
    return f" Did you mean {near[0]}?" if near else " Name one that it has, or add the one that is missing."
