"""What cannot be solved, and why: decided from parts and nodes alone, before any equation is worked.

A near-singular matrix gives a confident wrong answer rather than an error, so the conditions under which a linear network has
a single solution are checked as such: a path from every node to the reference, no loop of voltage sources and links, no cut
set of current sources and gaps (L. O. Chua, C. A. Desoer, E. S. Kuh, Linear and Nonlinear Circuits, 1987; from memory).
Controlled sources vary with what steers them and are judged by their equations instead, in ``singular``.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Sequence
from fractions import Fraction

from calccheck.model import Circuit, Element, Finding
from calccheck.solve.at_dc import Role, fault, part_faults, role, value
from calccheck.units import AMPERE, VOLT, Dimension, printed

_FORMS: dict[str, str] = {
    "inductor": "an inductor, a link at DC",
    "capacitor": "a capacitor, a gap at DC",
    "resistor": "a resistance of zero",
}


def faults(circuit: Circuit) -> tuple[Finding, ...]:
    """Everything that keeps a circuit from having a single solution, by its structure; empty for a sound one."""
    if not circuit.elements:
        return (fault("The circuit block has no parts. Write each on a line, as in: R1: 4.7 kΩ, a to b", circuit.span),)
    found = [f for e in circuit.elements for f in part_faults(e, circuit)]
    if found:
        return tuple(found)
    found = _reference_faults(circuit) or _islands(circuit) + cut_sets(circuit, ("current",))
    return tuple(found + loops(circuit, ("link", "voltage")))


# --- paths to the reference -----------------------------------------------------------------------------------------


def _reference_faults(circuit: Circuit) -> list[Finding]:
    nodes = circuit.nodes()
    if circuit.reference in nodes:
        return []
    ends = [n for e in circuit.elements for n in (e.plus, e.minus)]
    offer = f"reference {max(nodes, key=ends.count)}"
    if circuit.reference:
        text = f"The reference {circuit.reference} is a node of no part. Name one that has some, as in: {offer}"
    else:
        text = f"No node is named as the reference, from which potentials count. Name one, as in: {offer}"
    return [fault(text, circuit.span, offer)]


def _islands(circuit: Circuit) -> list[Finding]:
    """Parts of the circuit with no path to the reference."""
    found = []
    for nodes in _apart(circuit, ("gap",)):
        touching = [e for e in circuit.elements if e.plus in nodes or e.minus in nodes]
        inside = [e for e in touching if role(e) != "gap"]
        gaps = [e for e in touching if role(e) == "gap"]
        text = f"{_nodes(nodes)} {'has' if len(nodes) == 1 else 'have'} no path to the reference {circuit.reference}"
        text += f"; parts there: {listed(e.name for e in inside)}" if inside else ""
        text += f"; only gaps lead on: {listed(_named(e) for e in gaps)}" if gaps else ""
        found.append(fault(f"{text}. Connect them to the rest, or take them out.", (inside or gaps)[0].span))
    return found


def cut_sets(circuit: Circuit, sources: Sequence[Role]) -> list[Finding]:
    """Nodes that only sources of those roles (current, controlled current) and gaps join to the reference's side."""
    islands = [set(nodes) for nodes in _apart(circuit, ("gap",))]
    found = []
    for nodes in _apart(circuit, ("gap", *sources)):
        if any(nodes[0] in island for island in islands):
            continue
        crossing = [e for e in circuit.elements if (e.plus in nodes) != (e.minus in nodes)]
        feeding = [e for e in crossing if role(e) in sources]
        gaps = [e for e in crossing if role(e) == "gap"]
        text = f"{_nodes(nodes)} {'is' if len(nodes) == 1 else 'are'} fed only by current sources ({listed(map(_named, feeding))})"
        text += f" and gaps ({listed(map(_named, gaps))})" if gaps else ""
        found.append(fault(f"{text}{_balance(nodes, feeding)}", feeding[0].span))
    return found


def _balance(nodes: Sequence[str], feeding: Sequence[Element]) -> str:
    remedy = "Put in the resistance that carries their current or holds the potential."
    if any(role(e) != "current" for e in feeding):
        return f", which leaves the potential there open. {remedy}"
    total = sum(((1 if e.minus in nodes else -1) * value(e) for e in feeding), Fraction(0))
    if total:
        return f", and the currents into it add up to {shown(total, AMPERE)} instead of zero. {remedy}"
    return f": the currents balance, but the potential there is not determined. {remedy}"


def _apart(circuit: Circuit, leaving_out: Sequence[Role]) -> list[list[str]]:
    """Sets of nodes that hang together, but not with the reference, without the parts of those roles."""
    near: dict[str, list[str]] = defaultdict(list)
    for e in circuit.elements:
        if role(e) not in leaving_out:
            near[e.plus].append(e.minus)
            near[e.minus].append(e.plus)
    seen: set[str] = set()
    sets = []
    for start in (circuit.reference, *circuit.nodes()):
        if start in seen:
            continue
        seen.add(start)
        reached = [start]
        for node in reached:
            fresh = [n for n in dict.fromkeys(near[node]) if n not in seen]
            seen.update(fresh)
            reached += fresh
        sets.append(reached)
    return sets[1:]


# --- loops without resistance ---------------------------------------------------------------------------------------


def loops(circuit: Circuit, roles: Sequence[Role]) -> list[Finding]:
    """Loops of parts of those roles (link, voltage, controlled voltage), one for each part that closes one."""
    tree: dict[str, list[tuple[Element, str]]] = defaultdict(list)
    found = []
    for e in circuit.elements:
        if role(e) not in roles:
            continue
        path = _path(tree, e.minus, e.plus)
        if path is None:
            tree[e.plus].append((e, e.minus))
            tree[e.minus].append((e, e.plus))
        else:
            found.append(_loop_fault(e, path))
    return found


def _path(tree: dict[str, list[tuple[Element, str]]], start: str, end: str) -> list[tuple[Element, int]] | None:
    """The branches from ``start`` to ``end``, each with 1 where it is walked from its plus node, else −1."""
    before: dict[str, tuple[Element, str] | None] = {start: None}
    reached = [start]
    for node in reached:
        for e, far in tree[node]:
            if far not in before:
                before[far] = (e, node)
                reached.append(far)
    if end not in before:
        return None
    path = []
    while (step := before[end]) is not None:
        e, end = step
        path.append((e, 1 if e.plus == end else -1))
    return path[::-1]


def _loop_fault(closing: Element, path: Sequence[tuple[Element, int]]) -> Finding:
    parts = sorted((closing, *(e for e, _ in path)), key=lambda e: e.span.start)
    total = abs(sum((sign * _volts(e) for e, sign in ((closing, 1), *path)), Fraction(0)))
    if not path:
        what = f"{_named(closing)} has both ends at node {closing.plus}"
        why = f"no node stands {shown(total, VOLT)} above itself" if total else "nothing determines the current in it"
        return fault(f"{what}: {why}. Connect it between two nodes, or take it out.", closing.span)
    if any(role(e) == "controlled voltage" for e in parts):
        why = "nothing determines the currents in it"
    elif total:
        why = f"the voltages around it add up to {shown(total, VOLT)} instead of zero"
    else:
        why = "the voltages around it agree, but the currents in it are not determined"
    what = f"{listed(map(_named, parts))} make a loop without resistance"
    return fault(f"{what}: {why}. Put in the resistance of a source or a wire, or take a part out.", closing.span)


def _volts(e: Element) -> Fraction:
    return value(e) if role(e) == "voltage" else Fraction(0)


# --- words ----------------------------------------------------------------------------------------------------------


def shown(amount: Fraction, dimension: Dimension) -> str:
    """A value with its unit to six figures at most, without zeros that say nothing."""
    number, space, unit = printed(amount, dimension).partition(" ")
    return (number.rstrip("0").rstrip(".") if "." in number else number) + space + unit


def listed(names: Iterable[str]) -> str:
    """``a``, ``a and b``, ``a, b and c``."""
    *most, last = names
    return f"{', '.join(most)} and {last}" if most else last


def _nodes(nodes: Sequence[str]) -> str:
    return f"Node{'s' if len(nodes) > 1 else ''} {listed(nodes)}"


def _named(e: Element) -> str:
    form = "" if e.kind == "resistor" and e.value else _FORMS.get(e.kind, "")
    return f"{e.name} ({form})" if form else e.name
