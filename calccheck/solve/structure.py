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

from calccheck.arithmetic import Amount, Value, size
from calccheck.model import Circuit, Element, Finding
from calccheck.printing import shown as printed
from calccheck.solve.branches import Branch, Network, Role
from calccheck.solve.part_faults import fault, hertz
from calccheck.units import AMPERE, VOLT, Dimension

_ZERO_FORMS = {
    "inductor": "an inductance of zero", "capacitor": "a capacitance of zero", "resistor": "a resistance of zero",
    "impedance": "an impedance of zero",
}  # fmt: skip
_DC_FORMS = {"inductor": "an inductor, a link at DC", "capacitor": "a capacitor, a gap at DC"}
_SIDES = {
    "base": "base to emitter", "collector": "collector to emitter", "out": "its output", "first+": "its first pair",
    "second+": "its second pair",
}  # fmt: skip
_BALANCED = 1e-12  # a sum of phasors below this part of the largest is zero


def faults(network: Network) -> tuple[Finding, ...]:
    """Everything that keeps a network from having a single solution, by its structure; empty for a sound one."""
    found = _reference_faults(network.circuit) or _islands(network) + cut_sets(network, ("current",))
    return tuple(found + loops(network, ("link", "voltage")))


# --- paths to the reference -----------------------------------------------------------------------------------------


def _reference_faults(circuit: Circuit) -> list[Finding]:
    nodes = circuit.nodes()
    if circuit.reference in nodes:
        return []
    ends = [n for e in circuit.elements for n in _touched(e)]
    offer = f"reference {max(nodes, key=ends.count)}"
    if circuit.reference:
        text = f"The reference {circuit.reference} is a node of no part. Name one that has some, as in: {offer}"
    else:
        text = f"No node is named as the reference, from which potentials count. Name one, as in: {offer}"
    return [fault(text, circuit.span, offer)]


def _touched(e: Element) -> tuple[str, ...]:
    return tuple(node for _, node in e.terminals) or (e.plus, e.minus)


def _islands(network: Network) -> list[Finding]:
    """Parts of the network with no path to the reference."""
    found = []
    for nodes in _apart(network, ("gap",)):
        gaps = [b for b in network.branches if b.role == "gap" and (b.plus in nodes or b.minus in nodes)]
        leading = [b.part.name for b in gaps]
        inside = [e for e in network.circuit.elements if e.name not in leading and set(nodes) & set(_touched(e))]
        text = f"{_nodes(nodes)} {'has' if len(nodes) == 1 else 'have'} no path to the reference {network.circuit.reference}"
        text += f"; parts there: {listed(e.name for e in inside)}" if inside else ""
        text += f"; only gaps lead on: {listed(named(b, network) for b in gaps)}" if gaps else ""
        first = inside[0] if inside else gaps[0].part
        found.append(fault(f"{text}. Connect them to the rest, or take them out.", first.span))
    return found


def cut_sets(network: Network, sources: Sequence[Role]) -> list[Finding]:
    """Nodes that only sources of those roles (current, controlled current) and gaps join to the reference's side."""
    islands = [set(nodes) for nodes in _apart(network, ("gap",))]
    found = []
    for nodes in _apart(network, ("gap", *sources)):
        if any(nodes[0] in island for island in islands):
            continue
        crossing = [b for b in network.branches if (b.plus in nodes) != (b.minus in nodes)]
        feeding = [b for b in crossing if b.role in sources]
        gaps = [b for b in crossing if b.role == "gap"]
        text = f"{_nodes(nodes)} {'is' if len(nodes) == 1 else 'are'} fed only by current sources ({_listed(feeding, network)})"
        text += f" and gaps ({_listed(gaps, network)})" if gaps else ""
        found.append(fault(f"{text}{_balance(nodes, feeding)}", feeding[0].part.span))
    return found


def _balance(nodes: Sequence[str], feeding: Sequence[Branch]) -> str:
    remedy = "Put in the resistance that carries their current or holds the potential."
    if any(b.role != "current" for b in feeding):
        return f", which leaves the potential there open. {remedy}"
    total = _added([(1 if b.minus in nodes else -1, b.value) for b in feeding])
    if total:
        return f", and the currents into it add up to {shown(total, AMPERE)} instead of zero. {remedy}"
    return f": the currents balance, but the potential there is not determined. {remedy}"


def _added(terms: Sequence[tuple[int, Value]]) -> Value:
    """A signed sum, zero where phasors leave no more than rounding."""
    total: Value = Fraction(0)
    for sign, x in terms:
        total = total + sign * x
    largest = max((size(x) for _, x in terms), default=0)
    return Fraction(0) if isinstance(total, complex) and abs(total) <= _BALANCED * largest else total


def _apart(network: Network, leaving_out: Sequence[Role]) -> list[list[str]]:
    """Sets of nodes that hang together, but not with the reference, without the branches of those roles."""
    near: dict[str, list[str]] = defaultdict(list)
    for b in network.branches:
        if b.role not in leaving_out:
            near[b.plus].append(b.minus)
            near[b.minus].append(b.plus)
    seen: set[str] = set()
    sets = []
    for start in (network.circuit.reference, *network.nodes):
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


def loops(network: Network, roles: Sequence[Role]) -> list[Finding]:
    """Loops of branches of those roles (link, voltage, controlled voltage), one for each branch that closes one."""
    tree: dict[str, list[tuple[Branch, str]]] = defaultdict(list)
    found = []
    for b in network.branches:
        if b.role not in roles:
            continue
        path = _path(tree, b.minus, b.plus)
        if path is None:
            tree[b.plus].append((b, b.minus))
            tree[b.minus].append((b, b.plus))
        else:
            found.append(_loop_fault(b, path, network))
    return found


def _path(tree: dict[str, list[tuple[Branch, str]]], start: str, end: str) -> list[tuple[Branch, int]] | None:
    """The branches from ``start`` to ``end``, each with 1 where it is walked from its plus node, else −1."""
    before: dict[str, tuple[Branch, str] | None] = {start: None}
    reached = [start]
    for node in reached:
        for b, far in tree[node]:
            if far not in before:
                before[far] = (b, node)
                reached.append(far)
    if end not in before:
        return None
    path = []
    while (step := before[end]) is not None:
        b, end = step
        path.append((b, 1 if b.plus == end else -1))
    return path[::-1]


def _loop_fault(closing: Branch, path: Sequence[tuple[Branch, int]], network: Network) -> Finding:
    branches = sorted((closing, *(b for b, _ in path)), key=lambda b: b.part.span.start)
    total = _added([(sign, b.value) for b, sign in ((closing, 1), *path) if b.role == "voltage"])
    volts = shown(size(total), VOLT)
    if not path:
        what = f"{named(closing, network)} has both ends at node {closing.plus}"
        why = f"no node stands {volts} above itself" if total else "nothing determines the current in it"
        return fault(f"{what}: {why}. Connect it between two nodes, or take it out.", closing.part.span)
    if any(b.role in ("controlled voltage", "nullor") for b in branches):
        why = "nothing determines the currents in it"
    elif total:
        why = f"the voltages around it add up to {volts} instead of zero"
    else:
        why = "the voltages around it agree, but the currents in it are not determined"
    what = f"{_listed(branches, network)} make a loop without resistance"
    return fault(f"{what}: {why}. Put in the resistance of a source or a wire, or take a part out.", closing.part.span)


# --- words ----------------------------------------------------------------------------------------------------------


def shown(value: Value, dimension: Dimension) -> str:
    """A value with its unit to six figures at most, without zeros that say nothing."""
    number, space, unit = printed(Amount(value, dimension)).partition(" ")
    return (number.rstrip("0").rstrip(".") if "." in number else number) + space + unit


def listed(names: Iterable[str]) -> str:
    """``a``, ``a and b``, ``a, b and c``."""
    *most, last = names
    return f"{', '.join(most)} and {last}" if most else last


def named(b: Branch, network: Network) -> str:
    """The part that a branch belongs to, with what it is here where that is not plain."""
    form = _form(b, network.frequency)
    return f"{b.part.name} ({form})" if form else b.part.name


def _form(b: Branch, frequency: Fraction) -> str:
    e = b.part
    if e.terminals:
        return _SIDES.get(b.name.removeprefix(f"{e.name},"), "")
    if e.kind in ("voltage source", "current source") and b.role in ("link", "gap"):
        return f"zeroed at {hertz(frequency)}"
    if not frequency and e.kind in _DC_FORMS:
        return _DC_FORMS[e.kind]
    if e.kind == "diode":
        return "a diode, blocking" if b.role == "gap" else "a diode"
    return _ZERO_FORMS.get(e.kind, "") if b.role in ("link", "gap") else ""


def _listed(branches: Iterable[Branch], network: Network) -> str:
    return listed(named(b, network) for b in branches)


def _nodes(nodes: Sequence[str]) -> str:
    return f"Node{'s' if len(nodes) > 1 else ''} {listed(nodes)}"
