"""Names that a sheet gives itself: assumptions, and names defined by a formula; what such a name may be."""

from __future__ import annotations

from collections.abc import Sequence
from contextlib import suppress
from dataclasses import replace
from fractions import Fraction

from calccheck.arithmetic import Amount, Doubt
from calccheck.formula import Node, Reference
from calccheck.judge import hints
from calccheck.judge.members import Names, Worked, bare_name, work
from calccheck.judge.rounding import Printed, equal, fit
from calccheck.judge.scope import QUANTITY_LETTERS, Defined, Ledger, define, quantity_key
from calccheck.model import Claim, Judged


def assume(claim: Claim, ledger: Ledger, names: Names) -> Judged:
    """An assumption entered under its name. Raises ``Doubt`` where it gives no name a value, or a name that is taken."""
    name = bare_name(claim.members[0].node)
    if name is None:
        raise Doubt("an assumption gives a plain name a value: given NAME = VALUE UNIT", claim.members[0].span)
    _refuse_taken(name, claim, ledger)
    members = [work(m, names) for m in claim.members[1:]]
    for w in members:
        if w.doubt is not None:
            raise w.doubt
        if w.fault is not None:
            raise Doubt(w.fault.reason, w.fault.span)
    last = members[-1]
    amount = members[0].amount
    assert amount is not None
    _refuse_two_values(members, amount)
    shown = last.printed
    rounded = bool(claim.from_sheet) and isinstance(shown, Printed)  # a result of another sheet
    spread = shown.half if rounded and isinstance(shown, Printed) else Fraction(0)
    _refuse_tolerance(claim, amount)
    start, nearest = claim.span.start, claim.circuit
    define(Defined(name, amount, shown, "working", True, start, spread, None, nearest, claim.tolerance), ledger)
    return Judged(
        claim, "given", quantity=name, claimed=amount, claimed_unit=shown.written_in.text if shown else "",
        message=f"assumed, from {claim.from_sheet}" if claim.from_sheet else "assumed",
    )  # fmt: skip


def assumptions(claims: Sequence[Claim], ledger: Ledger) -> dict[str, Defined]:
    """All assumptions of a sheet, where one of them has a tolerance: for parts that are worked from them, wherever they stand."""
    givens = [c for c in claims if c.given and c.problem is None]
    if not any(c.tolerance for c in givens):
        return {}
    scratch = replace(ledger, names={}, exact=set())
    for claim in givens:
        with suppress(Doubt):  # said where the assumption is judged
            assume(claim, scratch, Names(claim.circuit, scratch))
    return scratch.names


def _refuse_tolerance(claim: Claim, amount: Amount) -> None:
    t = claim.tolerance
    if t is None:
        return
    if isinstance(amount.value, complex):
        raise Doubt("a phasor has no tolerance here; give its magnitude one", t.span)
    if t.relative and amount.value == 0:
        raise Doubt(f"{t.text} of zero is nothing; write it in the unit of the value", t.span)
    if t.relative and amount.point:
        raise Doubt(f"{t.text} of a temperature depends on where degrees count from; write it in K", t.span)


def _refuse_two_values(members: Sequence[Worked], amount: Amount) -> None:
    """An assumption is one value; a second one may only be its right rounding."""
    for w in members[1:]:
        if w.relation not in ("=", "≈"):
            raise Doubt("a bound is a claim of its own; an assumption ends before it", w.member.span)
        p, same = w.printed, w.amount is not None and w.amount.dimension == amount.dimension
        near = (
            isinstance(p, Printed) and isinstance(amount.value, Fraction | float) and fit(p, amount.value, Fraction(0))
        )
        if not same or w.amount is None or not (near == "exact place" or equal(w.amount.value, amount.value)):
            raise Doubt(f"the assumption has two values: {w.member.text} is not what stands before it", w.member.span)


def _refuse_taken(name: str, claim: Claim, ledger: Ledger) -> None:
    known = ledger.names.get(name)
    place = claim.members[0].span
    if known is not None:
        word = "assumed" if known.given else "defined"
        raise Doubt(f"{name} is {word} above already; a name has one value in a sheet", place)
    _refuse_of_circuit(claim.members[0].node, ledger)


def _refuse_of_circuit(node: Node, ledger: Ledger) -> None:
    """A new name may not be a part or a quantity of any circuit in the sheet."""
    assert isinstance(node, Reference)
    for k, c in enumerate(ledger.circuits):
        called = f" {c.name}" if c.name else ""
        if c.element(node.word) is not None:
            raise Doubt(f"{node.word} is a part of the circuit{called}; choose another name", node.span)
        if quantity_key(node, k, c, ledger) is not None:
            raise Doubt(f"{node.word} is a quantity of the circuit{called}; choose another name", node.span)
    _refuse_near_quantity(node, ledger)


def new_name(workings: Sequence[Worked], claim: Claim, ledger: Ledger) -> str | None:
    """The name that the chain defines, if its first member is one that nothing has and a formula follows."""
    first = workings[0]
    name = bare_name(first.node)
    if name is None or first.sort != "new name":
        return None
    if not any(w.sort in ("formula", "substitution") for w in workings[1:]):
        raise next((w.doubt for w in workings[1:] if w.doubt is not None), None) or _only_a_value(
            name, workings, claim, ledger
        )
    _refuse_of_circuit(first.node, ledger)
    return name


def _only_a_value(name: str, workings: Sequence[Worked], claim: Claim, ledger: Ledger) -> Doubt:
    """A new name with a value and nothing to work it from: a slip for a known one, or an assumption without the word."""
    first = workings[0]
    assert isinstance(first.node, Reference)
    sentence, hint = hints.unknown(first.node, claim.circuit, ledger)
    if workings[1].relation != "=":
        return Doubt(sentence, first.member.span, hint)
    assume = f"given {name} = {workings[1].member.text}"
    return Doubt(
        f"{sentence} An assumption is written {assume}" if hint else f"{sentence}; an assumption is written {assume}",
        first.member.span,
    )


def _refuse_near_quantity(ref: Reference, ledger: Ledger) -> None:
    """A defined name shaped like a quantity differs from all in the circuit in more than a letter, and more than in case."""
    if not ref.subscripts or ref.letter.capitalize() not in QUANTITY_LETTERS:
        return
    sub = ref.subscripts[0]
    for c in ledger.circuits:
        for known in (*c.nodes(), *(e.name for e in c.elements)):
            if sub.lower() == known.lower() or _one_letter_off(sub, known):
                raise Doubt(
                    f"{ref.word} may be a slip for {ref.letter.capitalize()}_{known}; to define a name, choose one less alike",
                    ref.span,
                )


def _one_letter_off(a: str, b: str) -> bool:
    """Whether two words differ in one letter put in, left out or changed (a single letter is no word)."""
    if min(len(a), len(b)) < 2 or abs(len(a) - len(b)) > 1:
        return len(a) == len(b) == 1 and a == b
    if len(a) == len(b):
        return sum(x != y for x, y in zip(a, b, strict=True)) <= 1
    short, long = sorted((a, b), key=len)
    return any(long[:k] + long[k + 1 :] == short for k in range(len(long)))
