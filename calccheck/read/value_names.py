"""What the names in a part's value stand for: givens, constants, the voltages and currents that steer a source."""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping
from dataclasses import dataclass

from calccheck.arithmetic import Amount, Doubt
from calccheck.formula import NO_QUALIFIERS, Node, Reference, references
from calccheck.model import Control
from calccheck.read.names import nearest

_CONSTANTS = {"e": math.e, "π": math.pi}


class UnknownName(Doubt):
    """A name that no part or node of the circuit has; it may stand on a line that could not be read."""


@dataclass(frozen=True, slots=True)
class Scope:
    """What the names in a value may stand for. ``parts``: name and ends."""

    parts: Mapping[str, tuple[str, str]]
    nodes: Collection[str]
    reference: str
    givens: Mapping[str, Amount]


def known(r: Reference, scope: Scope) -> Amount:
    """The amount of a given or a constant."""
    if r.word in scope.givens:
        return scope.givens[r.word]
    return Amount(_CONSTANTS[r.word])


def free(node: Node, scope: Scope) -> list[Reference]:
    """The names that are neither givens nor constants."""
    return [r for r in references(node) if r.word not in scope.givens and r.word not in _CONSTANTS]


def is_control(r: Reference, scope: Scope) -> bool:
    """Whether a name is a voltage or current of this circuit."""
    if r.letter not in ("V", "I") or not r.subscripts:
        return False
    if r.word in scope.givens:
        if r.subscripts[0] in scope.parts or r.subscripts[0] in scope.nodes:
            raise Doubt(f"{r.word} is a given and a quantity of this circuit; call the given otherwise", r.span)
        return False
    return True


def steering(r: Reference, scope: Scope) -> Control:
    """What a voltage or current in a value stands for."""
    if r.qualifiers != NO_QUALIFIERS or r.prefix or len(r.subscripts) > 2:
        raise Doubt(f"{r.text}: a source is steered by a plain voltage or current", r.span)
    first, last = r.subscripts[0], r.subscripts[-1]
    several = first in scope.parts and not scope.parts[first][0]
    if r.letter == "I":
        if first not in scope.parts:
            raise _unknown(first, "part", scope.parts, r)
        if len(r.subscripts) == 2 and not several:
            raise Doubt(f"{first} has two terminals; write I_{first}", r.span)
        return Control(part=first)
    if len(r.subscripts) == 1 and several:
        raise Doubt(f"{first} has several terminals; write a voltage between two nodes", r.span)
    if len(r.subscripts) == 1 and first in scope.parts:
        return Control(*scope.parts[first])
    for node in (first, last):
        if node not in scope.nodes:
            raise _unknown(node, "node", scope.nodes, r)
    return Control(first, last if len(r.subscripts) == 2 else scope.reference)


def _unknown(name: str, what: str, known: Collection[str], r: Reference) -> UnknownName:
    near = nearest(name, known)
    hint = f"; is {near} meant?" if near else ""
    return UnknownName(f"{r.text}: this circuit has no {what} {name}{hint}", r.span)
