"""What the names in a part's value stand for: givens, constants, free symbols, the voltages and currents that steer a source."""

from __future__ import annotations

import math
import re
from collections.abc import Collection, Mapping
from dataclasses import dataclass, field

from calccheck.arithmetic import Amount, Doubt
from calccheck.formula import NO_QUALIFIERS, Binary, Node, Number, Reference, references, walk
from calccheck.model import Control
from calccheck.read.names import listed, nearest, reads_as_quantity
from calccheck.read.part_lines import PartLine
from calccheck.units import Dimension

_CONSTANTS = {"e": Amount(math.e), "π": Amount(math.pi), "j": Amount(1j)}
_RUN_TOGETHER = re.compile(r"(?P<first>jω?(?=[^\Wa-z\d_])|π(?=[^\W\d_])|ω(?=[A-Z]))(?P<rest>\w+)")
# Currents by which a part with several terminals may steer a source; the others follow from these.
_STEERING = {
    "transistor": ("base", "collector"), "op-amp": ("out",), "transformer": ("first+", "second+"),
}  # fmt: skip


class UnknownName(Doubt):
    """A name that no part or node of the circuit has; it may stand on a line that could not be read."""


@dataclass(frozen=True, slots=True)
class Scope:
    """What the names in a value may stand for.

    ``parts``: by name, each as its line was split. ``symbols``: dimensions of the free symbols, once all lines are read.
    """

    parts: Mapping[str, PartLine]
    nodes: Collection[str]
    reference: str
    givens: Mapping[str, Amount]
    symbols: Mapping[str, Dimension] = field(default_factory=dict)


def known(r: Reference, scope: Scope) -> Amount:
    """The amount of a given or a constant."""
    if r.word in scope.givens:
        return scope.givens[r.word]
    return _CONSTANTS[r.word]


def free(node: Node, scope: Scope) -> list[Reference]:
    """The names that are neither givens nor constants."""
    return [r for r in references(node) if r.word not in scope.givens and r.word not in _CONSTANTS]


# --- free symbols ---------------------------------------------------------------------------------------------------


def check_symbols(node: Node, name: str, scope: Scope) -> tuple[str, ...]:
    """The free symbols in the value of a part called ``name``, each once. Raises ``Doubt`` for a name that may be none."""
    found = [r for r in free(node, scope) if not is_control(r, scope)]
    for r in found:
        fault = _fault(r, node, name, scope)
        if fault:
            raise Doubt(fault, r.span)
    for n in walk(node) if found else ():
        if isinstance(n, Binary) and n.operator == "·" and isinstance(n.left, Number) and n.left.unit.text:
            words = [r for r in references(n.right) if r in found]
            if words:
                reason = f"{words[0].word} stands behind a value and has none itself; a product is written with ×"
                raise Doubt(f"{reason}, a remark behind #", words[0].span)
    return tuple(dict.fromkeys(r.word for r in found))


def _fault(r: Reference, node: Node, name: str, scope: Scope) -> str:
    """Why a name may not be a free symbol; empty when it may."""
    if r.qualifiers != NO_QUALIFIERS or r.prefix or r.braced:
        return f"{r.text} is no name of a value; a value is worked from givens and free symbols"
    if reads_as_quantity(r.word):
        return f"{r.word} reads as a quantity; a free symbol is called otherwise"
    together = _RUN_TOGETHER.fullmatch(r.word)
    if together:
        return f"{r.word} reads as one name; part the factors: {together['first']} × {together['rest']}"
    if r.word in scope.nodes:
        return f"{r.word} is a node; a free symbol is called otherwise"
    if r.word == name and r is not node:
        return f"{r.word} is the part itself; only the symbol alone may be called like its part: {r.word} Ω"
    if r.word != name and r.word in scope.parts and not names_itself(scope.parts[r.word]):
        return f"{r.word} is a part; a value is worked from givens"
    return ""


def names_itself(part: PartLine) -> bool:
    """Whether a part's value is the free symbol of its own name: ``R: R Ω``."""
    words = part.what.text.split()
    return len(words) == 2 and words[0] == part.name


# --- controls -------------------------------------------------------------------------------------------------------


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
    if r.letter == "I":
        return Control(part=_carrier(r, scope))
    first, last = r.subscripts[0], r.subscripts[-1]
    part = scope.parts.get(first) if len(r.subscripts) == 1 else None
    if part is not None and not part.ends[0]:
        raise Doubt(f"{first} has several terminals; write a voltage between two nodes", r.span)
    if part is not None:
        return Control(*part.ends)
    for node in (first, last):
        if node not in scope.nodes:
            raise _unknown(node, "node", scope.nodes, r)
    return Control(first, last if len(r.subscripts) == 2 else scope.reference)


def _carrier(r: Reference, scope: Scope) -> str:
    """The part, or the terminal of a part, whose current steers."""
    part = scope.parts.get(r.subscripts[0])
    if part is None:
        raise _unknown(r.subscripts[0], "part", scope.parts, r)
    if part.ends[0]:
        if len(r.subscripts) == 2:
            raise Doubt(f"{part.name} has two terminals; write I_{part.name}", r.span)
        return part.name
    own = _STEERING.get(part.shape.kind or "", ())
    example = f"I_{{{part.name},{own[0]}}}" if own else ""
    if len(r.subscripts) == 1:
        raise Doubt(f"{part.name} has several terminals; write the current into one, as in {example}", r.span)
    at = r.subscripts[1]
    words = {word for word, node in part.terminals if at in (word, node)}
    if len(words) > 1:
        raise Doubt(f"{r.text} may mean {listed(sorted(words), 'or')}; write the terminal's word: {example}", r.span)
    if not words:
        raise _unknown(at, f"terminal of {part.name} at", [n for _, n in part.terminals], r)
    (word,) = words
    if word not in own:
        raise Doubt(f"a source is steered by the current into {listed(own, 'or')} of {part.name}, not {word}", r.span)
    return f"{part.name},{word}"


def _unknown(name: str, what: str, known: Collection[str], r: Reference) -> UnknownName:
    near = nearest(name, known)
    hint = f"; is {near} meant?" if near else ""
    return UnknownName(f"{r.text}: this circuit has no {what} {name}{hint}", r.span)
