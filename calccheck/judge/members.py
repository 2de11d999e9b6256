"""The members of a chain worked out: what each one is, what it comes to, and on what it rests."""

from __future__ import annotations

import cmath
import re
from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import TYPE_CHECKING, Literal

from calccheck.arithmetic import Amount, DimensionFault, Doubt, Real, evaluate, size
from calccheck.formula import (
    NO_QUALIFIERS,
    OVER_TOLERANCES,
    Binary,
    Group,
    Node,
    Number,
    Range,
    Reference,
    numbers,
    references,
    walk,
)
from calccheck.judge import hints, quantities
from calccheck.judge.phasors import PrintedPhasor, printed_phasor
from calccheck.judge.rounding import SLACK, Printed, printed
from calccheck.judge.scope import Key, Ledger, Meaning, circuit_index, is_taken, meaning, quantity_key
from calccheck.loose_units import with_loose_units
from calccheck.model import Basis, Element, Member, Relation
from calccheck.units import PLAIN

if TYPE_CHECKING:  # loaded late: few sheets state tolerances
    from calccheck.judge.spreads import Found, Spreading

Sort = Literal["value", "formula", "substitution", "range", "new name"]


@dataclass(frozen=True, slots=True)
class Worked:
    """A member with what it comes to; ``doubt`` or ``fault`` say why it comes to nothing.

    ``basis``: ``circuit`` where a quantity of a circuit or a name resting on one is in it, ``working`` where only names are.
    ``key``: of a member that is one bare quantity or name. ``restates``: it is a part's own value and nothing else.
    ``pieces``: what each piece of a formula comes to, as far as it could be worked out. ``nodes``: the node and all below it.
    """

    member: Member
    node: Node
    sort: Sort
    basis: Basis = ""
    amount: Amount | None = None
    printed: Printed | PrintedPhasor | None = None
    key: Key | None = None
    restates: bool = False
    doubt: Doubt | None = None
    fault: DimensionFault | None = None
    pieces: Sequence[tuple[Node, Amount]] = ()
    nodes: Sequence[Node] = ()

    @property
    def relation(self) -> Relation:
        """The relation before the member."""
        return self.member.relation

    @property
    def numbers(self) -> list[Number]:
        """The printed numbers in the member."""
        return [n for n in self.nodes if isinstance(n, Number)]

    @property
    def references(self) -> list[Reference]:
        """The names and quantities in the member."""
        return [n for n in self.nodes if isinstance(n, Reference)]


class Names:
    """The meanings of the references in one claim, each worked out once."""

    __slots__ = ("_amounts", "_meanings", "founds", "ledger", "nearest")

    def __init__(self, nearest: int, ledger: Ledger) -> None:
        self.nearest, self.ledger = nearest, ledger
        self.founds: dict[Reference, Found] = {}  # values over tolerances, with what is to be said of them
        self._amounts: dict[Reference, Amount] = {}
        self._meanings: dict[Reference, Meaning] = {}

    def meaning(self, ref: Reference) -> Meaning | None:
        """What a reference means, or nothing."""
        found = self._meanings.get(ref)
        if found is None and (found := self._meaning(ref)) is not None:
            self._meanings[ref] = found
        return found

    def _meaning(self, ref: Reference) -> Meaning | None:
        if not ref.bracket:
            return meaning(ref, self.nearest, self.ledger)
        inner = [r for _, n in ref.bracket for r in references(n)]
        return Meaning("bracket", basis=_basis([self.meaning(r) for r in inner], ref))

    @property
    def spreading(self) -> Spreading:
        """For expressions of this claim over their tolerances."""
        from calccheck.judge.spreads import Spreading

        return Spreading(
            self.nearest, self.ledger, lambda r, n: (self if n == self.nearest else Names(n, self.ledger)).amount(r)
        )

    def allowance(self, w: Worked) -> Real:
        """How far a value at random that a member is, or is worked from, may be off."""
        found = [f for r in w.references if (f := self.founds.get(r)) is not None and f.allowance]
        if not found or w.amount is None:
            return 0
        return size(w.amount.value) * max(f.allowance / size(f.amount.value) if f.amount.value else 1 for f in found)

    def known(self, ref: Reference) -> bool:
        """Whether a reference means anything, or would if its circuit were told."""
        try:
            return self.meaning(ref) is not None
        except Doubt:
            return True

    def amount(self, ref: Reference) -> Amount:
        """The exact amount of a reference. Raises ``Doubt`` where it has none."""
        found = self._amounts.get(ref)
        if found is None:
            found = self._amounts[ref] = self._work(ref)
        return found

    def _work(self, ref: Reference) -> Amount:
        if ref.prefix in OVER_TOLERANCES:
            from calccheck.judge.spreads import over

            self.founds[ref] = over(ref, lambda n: evaluate(n, self.amount), self.spreading)
            return self.founds[ref].amount
        m = self.meaning(ref)
        if m is None:
            sentence, hint = hints.unknown(ref, self.nearest, self.ledger)
            raise Doubt(sentence, ref.span, hint)
        if m.sort == "quantity":
            assert m.key is not None
            return _component(ref, m.key, self.ledger)
        if ref.prefix:
            raise Doubt(f"{ref.prefix} stands before a voltage, a current or an impedance", ref.span)
        q = ref.qualifiers
        if q.due_to or q.changes:
            raise Doubt(
                f"{ref.word} has one value, whatever sources act: qualifiers belong to V, I, P, R and Isc", ref.span
            )
        if m.constant is not None:
            return m.constant
        if m.defined is not None:
            return m.defined.exact
        assert m.element is not None
        if q.case:
            return self._in_case(ref, m.element)
        if m.element.stated is None:
            raise Doubt(f"{ref.word} is {m.element.kind} and has no value of its own", ref.span)
        return m.element.stated

    def _in_case(self, ref: Reference, element: Element) -> Amount:
        """A part's own value in a case."""
        circuit = self.ledger.circuits[circuit_index(ref, self.nearest, self.ledger)]
        key = quantity_key(replace(ref, letter="I", subscripts=(element.name,)), 0, circuit, self.ledger)
        told = next((v for part, _, v in key.changes if part == element.name and v is not None), None) if key else None
        if told is None and element.stated is None:
            raise Doubt(f"{ref.word} is {element.kind} and has no value of its own", ref.span)
        return told or element.stated or Amount(0)


def _component(ref: Reference, key: Key, ledger: Ledger) -> Amount:
    """A quantity, or its magnitude, angle, real or imaginary part, or its rms value over all frequencies."""
    if ref.prefix == "rms":
        return quantities.rms(key, ledger, ref.span)
    a = quantities.amount(key, ledger, ref.span)
    match ref.prefix:
        case "mag":
            return Amount(size(a.value), a.dimension)
        case "re":
            return Amount(a.value.real, a.dimension)
        case "im":
            return Amount(a.value.imag if isinstance(a.value, complex) else Fraction(0), a.dimension)
        case "arg":
            if size(a.value) <= SLACK * quantities.scale(key, ledger, a.dimension):
                raise Doubt(f"{ref.text}: its magnitude is zero, which has no angle", ref.span)
            return Amount(cmath.phase(complex(a.value)))
    return a


def work_all(members: Sequence[Member], names: Names) -> list[Worked]:
    """The members of a chain worked out; a first one that is a name which nothing has is left for the chain to define."""
    first, rest = members[0], [work(m, names) for m in members[1:]]
    word = bare_name(first.node)
    if word is not None and isinstance(first.node, Reference) and not names.known(first.node):
        return [Worked(first, first.node, "new name", nodes=(first.node,)), *rest]
    return [work(first, names), *rest]


def bare_name(node: Node) -> str | None:
    """The name that a member is, where it is nothing but a name."""
    if not isinstance(node, Reference) or node.braced or node.prefix or node.qualifiers != NO_QUALIFIERS:
        return None
    return node.word


def work(member: Member, names: Names) -> Worked:
    """One member worked out."""
    node = with_loose_units(member.node, names.known)
    if isinstance(node, Range):
        return Worked(member, node, "range", doubt=_range_doubt(node))
    nodes = [*walk(node)]
    value = printed(node)
    if value is not None:
        return _printed_value(member, node, nodes, value, names)
    phasor = printed_phasor(node)
    found = [n for n in nodes if isinstance(n, Reference)]
    sort: Sort = "value" if phasor is not None else "substitution" if _has_printed(nodes, found) else "formula"
    basis: Basis = ""
    key = amount = doubt = fault = None
    restates = False
    pieces: list[tuple[Node, Amount]] = []
    try:
        _refuse_units_that_are_names(nodes, names)
        _refuse_half_prefixed(member, found, names)
        meanings = [names.meaning(r) for r in found]
        basis, key, restates = _basis(meanings, node), _key(node, meanings), restates_part(node, meanings)
        if phasor is None:
            amount = evaluate(node, names.amount, note=lambda n, a: pieces.append((n, a)))
        else:
            amount, pieces = phasor.amount, [(node, phasor.amount)]
    except Doubt as d:
        doubt = d
    except DimensionFault as f:
        fault = f
    return Worked(member, node, sort, basis, amount, phasor, key, restates, doubt, fault, pieces, nodes)


def _printed_value(member: Member, node: Node, nodes: Sequence[Node], value: Printed, names: Names) -> Worked:
    """A member that is a printed real value and nothing else, as most are."""
    try:
        _refuse_units_that_are_names(nodes, names)
    except Doubt as d:
        return Worked(member, node, "value", printed=value, doubt=d, nodes=nodes)
    return Worked(member, node, "value", "", value.amount, value, pieces=[(node, value.amount)], nodes=nodes)


def _range_doubt(node: Range) -> Doubt:
    if node.centred:
        return Doubt(
            "a deviation of a computed value: say of which kind by worst or rss before the quantity", node.span
        )
    return Doubt("a range belongs behind worst or rss", node.span)


def _has_printed(nodes: Sequence[Node], found: Sequence[Reference]) -> bool:
    """Whether a printed value stands in the member: a number with a unit, or any number where no name stands."""
    printings = [n for n in nodes if isinstance(n, Number)]
    return any(n.unit.text for n in printings) or (bool(printings) and not found)


def _basis(meanings: Sequence[Meaning | None], node: Node) -> Basis:
    bases: set[Basis] = set()
    for m in meanings:
        if m is None or m.sort == "constant":
            continue
        if m.sort == "quantity":
            bases.add("circuit")
        elif m.sort == "bracket":
            bases.add(m.basis)
        elif m.defined is not None:
            bases.add(m.defined.basis or "working")
        else:
            bases.add("circuit" if isinstance(node, Reference) else "working")
    return "circuit" if "circuit" in bases else "working" if bases - {""} else ""


def _key(node: Node, meanings: Sequence[Meaning | None]) -> Key | None:
    if not isinstance(node, Reference) or not meanings or meanings[0] is None or node.prefix in OVER_TOLERANCES:
        return None
    m = meanings[0]
    return Key(-1, "name", (node.word,)) if m.sort == "name" else m.key


_WORKED = re.compile(r"[*×·/÷∥()^√]|^(?!.*\d)")


def restates_part(node: Node, meanings: Sequence[Meaning | None]) -> bool:
    """Whether the member is a part's own value as written; one that the block works from others is rounded like any."""
    first = meanings[0] if meanings and isinstance(node, Reference) and not node.prefix else None
    if first is None or first.element is None or first.sort != "part":
        return False
    return not _WORKED.search(first.element.written)


def _refuse_units_that_are_names(nodes: Sequence[Node], names: Names) -> None:
    for n in nodes:
        for word in n.unit_words if isinstance(n, Number | Group) else ():
            if is_taken(word, names.nearest, names.ledger):
                before = n.digits if isinstance(n, Number) else "(…)"
                raise Doubt(
                    f"{word} is a unit and a name here: for the product write {before} × {word}, "
                    f"for the unit give the name another spelling",
                    n.span,
                )


def _refuse_half_prefixed(member: Member, found: Sequence[Reference], names: Names) -> None:
    """``max V_out / Vref``: the largest V_out over Vref, or the largest of the ratio?"""
    over_them = [r for r in found if r.prefix in OVER_TOLERANCES]
    if not over_them or len(over_them) == len(found):
        return
    others = [r for r in found if r not in over_them]
    beside = next((r for r in others if (m := names.meaning(r)) is not None and m.sort != "constant"), None)
    if beside is not None:
        first = over_them[0]
        rest = member.text.replace(first.text, first.text.removeprefix(first.prefix).strip(), 1)
        reason = (
            f"{first.text} beside {beside.text} can be read two ways: {first.prefix} takes one quantity or one bracket"
        )
        raise Doubt(reason, first.span, f"{first.prefix} ({rest})")


def without_unit(w: Worked) -> bool:
    """Whether the member has numbers and none of them has a unit; exponents have none and say nothing."""
    if any(isinstance(n, Group) and n.unit.text for n in w.nodes):
        return False
    powers = [n.right for n in w.nodes if isinstance(n, Binary) and n.operator == "^"]
    exponents = {id(n) for power in powers for n in numbers(power)}
    found = [n for n in w.numbers if id(n) not in exponents]
    return bool(found) and all(n.unit == PLAIN for n in found)
