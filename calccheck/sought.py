"""Expressions of a circuit's quantities to be written in its own symbols, as judging hands them to solving, and what comes back."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Literal, Protocol

from calccheck.formula import Node, Reference
from calccheck.model import Circuit, Element
from calccheck.units import Dimension


@dataclass(frozen=True, slots=True)
class Sought:
    """A voltage from node to node (``V``) or the current under a name (``I``) in a circuit prepared for it, at a frequency in hertz.

    ``circuit``: an instance in numbers, whose parts keep the formulas of their values.
    """

    circuit: Circuit
    frequency: Fraction
    letter: Literal["V", "I"]
    where: tuple[str, ...]


Meaning = Sought | Element | Node


@dataclass(frozen=True, slots=True)
class ClosedForm:
    """An expression in symbols and names of parts, and as text; the frequency in hertz of its ω, 0 where it has none."""

    node: Node
    text: str
    frequency: Fraction


class Close(Protocol):
    """Writes an expression in symbols alone."""

    def __call__(
        self, node: Node, meanings: Mapping[Reference, Meaning], symbols: Mapping[str, Dimension], dimension: Dimension
    ) -> ClosedForm | None:
        """The closed form; ``None`` where it would take too much or be too long to be read.

        ``meanings``: of every reference in ``node`` that is no symbol, and in these. ``symbols``: those of the circuits, and the
        parts that are to be called by their names, in the order in which they are to stand. ``dimension``: of the whole.
        """
