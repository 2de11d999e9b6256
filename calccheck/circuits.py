"""Circuits as read and as solved: parts, their models, a circuit, its states and solutions. Frozen records, no rules."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from typing import Literal

from calccheck.arithmetic import Amount, Value
from calccheck.formula import Change, Node
from calccheck.rules import Finding
from calccheck.source import Span
from calccheck.units import Dimension

Kind = Literal[
    "resistor", "voltage source", "current source", "controlled voltage source", "controlled current source",
    "short", "open", "capacitor", "inductor", "impedance", "op-amp", "transformer", "transistor", "diode",
]  # fmt: skip


UNSTATED = Fraction(-1)


@dataclass(frozen=True, slots=True)
class Control:
    """What steers a controlled source: the voltage from node ``plus`` to node ``minus``, or the current of ``part``."""

    plus: str = ""
    minus: str = ""
    part: str = ""


@dataclass(frozen=True, slots=True)
class Tolerance:
    """``±5 %`` (relative fractions), ``±0.1 V`` (absolute, SI), ``+10/−5 %``, ``±50 ppm/K`` (relative, per kelvin)."""

    plus: Fraction
    minus: Fraction
    relative: bool
    per_kelvin: bool
    text: str
    span: Span


@dataclass(frozen=True, slots=True)
class Rating:
    """``max 0.25 W``: the most that a part stands, in SI."""

    value: Fraction
    dimension: Dimension
    text: str
    span: Span


@dataclass(frozen=True, slots=True)
class Device:
    """What the model of a part that is more than a resistance needs, in SI; of each kind only what belongs to it.

    Transistor: ``polarity``, ``state`` active or saturated, ``beta``, ``v_be``, and ``v_ce`` of a saturated one. The drops are
    positive for npn and pnp alike; a pnp's run from emitter to base and from emitter to collector. Diode: ``state`` conducting
    or blocking, and ``drop`` from ``plus``, the anode. Transformer: ``ratio`` of the first pair's turns to the second's.
    Op-amp: the least and most that its output reaches against the reference, ``None`` where not stated. ``tolerances``: by the
    word that they stand behind: ``beta``, ``V_BE``, ``V_CE``, ``drop``.
    """

    state: Literal["", "active", "saturated", "conducting", "blocking"] = ""
    polarity: Literal["", "npn", "pnp"] = ""
    beta: Fraction | None = None
    v_be: Fraction | None = None
    v_ce: Fraction | None = None
    drop: Fraction | None = None
    ratio: Fraction | None = None
    swing_low: Fraction | None = None
    swing_high: Fraction | None = None
    tolerances: tuple[tuple[str, Tolerance], ...] = ()


@dataclass(frozen=True, slots=True)
class Element:
    """A part between two nodes. Current counts from ``plus`` through the part to ``minus`` (IEC 60375).

    ``value``: ohms of a resistor (whether written as a resistance or a conductance), volts or amperes of a source, the gain
    of a controlled source in SI, farads, henries; ``None`` for short, open, parts with a ``device``, ``phasor`` or ``formula``.
    ``stated``: the value as written, with the dimension it was written in, for claims that restate it.
    ``terminals``: of a part with more than two, word and node: base, collector, emitter; plus, minus, out; first+, first-,
    second+, second-. ``phasor``: of an AC source in volts or amperes, of an impedance in ohms, a complex gain; ``value`` is then
    ``None``. ``frequency``: of an AC source in hertz, ``UNSTATED`` where the sheet needs and names none, ``None`` for DC.
    ``formula``: of a value with free symbols, the only names in it; with an amount for each it comes to what ``stated`` would
    be, or, of a controlled source, to its volts or amperes by 1 V or 1 A of what steers it. ``worked``: of a value worked from
    assumptions, the formula with their names in it, which comes to the same. ``drift``: a second tolerance, where one of the
    two is by the kelvin.
    """

    name: str
    kind: Kind
    plus: str
    minus: str
    span: Span
    value: Fraction | None = None
    stated: Amount | None = None
    written: str = ""
    control: Control | None = None
    tolerance: Tolerance | None = None
    ratings: tuple[Rating, ...] = ()
    terminals: tuple[tuple[str, str], ...] = ()
    phasor: complex | None = None
    formula: Node | None = None
    frequency: Fraction | None = None
    device: Device | None = None
    worked: Node | None = None
    drift: Tolerance | None = None

    @property
    def is_source(self) -> bool:
        """Whether it is an independent source, a hand model's drop among them."""
        if self.kind == "diode":
            return self.device is None or self.device.state != "blocking"
        return self.kind in ("voltage source", "current source", "transistor")


@dataclass(frozen=True, slots=True)
class Case:
    """``case hot: Rt = 3.3 kΩ; Q1 beta 80``: a circuit's named case. The changes' values name nothing but free symbols."""

    name: str
    changes: tuple[Change, ...]
    span: Span


@dataclass(frozen=True)
class Circuit:
    """One circuit block as read.

    ``problems``: findings that make every claim on this circuit unchecked (a line that does not parse, say). ``span``: the
    fence's content. ``symbols``: the free symbols of its values with their dimensions, in the order of the block.
    """

    name: str
    elements: tuple[Element, ...]
    reference: str
    span: Span
    problems: tuple[Finding, ...] = ()
    symbols: tuple[tuple[str, Dimension], ...] = ()
    cases: tuple[Case, ...] = ()

    def __hash__(self) -> int:
        """The hash of the fields, worked out once: a circuit is looked up hundreds of times in one sheet."""
        return self._hash

    @cached_property
    def _hash(self) -> int:
        return hash((self.name, self.elements, self.reference, self.span, self.problems))

    @cached_property
    def _by_name(self) -> dict[str, Element]:
        return {e.name: e for e in reversed(self.elements)}

    def element(self, name: str) -> Element | None:
        """The part of that name."""
        return self._by_name.get(name)

    def nodes(self) -> tuple[str, ...]:
        """All nodes, in the order in which the block names them, the reference wherever it stands."""
        return self._nodes

    @cached_property
    def _nodes(self) -> tuple[str, ...]:
        names: dict[str, None] = {}
        for e in self.elements:
            for node in (e.plus, e.minus, *(n for _, n in e.terminals)):
                if node:
                    names.setdefault(node)
        return tuple(names)

    def sources(self) -> tuple[Element, ...]:
        """The independent sources of every frequency, parts with a drop of their hand model among them."""
        return self._sources

    @cached_property
    def _sources(self) -> tuple[Element, ...]:
        return tuple(e for e in self.elements if e.is_source)

    @cached_property
    def frequencies(self) -> tuple[Fraction, ...]:
        """The frequencies of the independent sources, 0 for DC, rising; DC alone where there is no source."""
        return tuple(sorted({s.frequency or Fraction(0) for s in self._sources})) or (Fraction(0),)


@dataclass(frozen=True, slots=True)
class State:
    """Potentials by node (reference 0) in volts and currents by part in amperes, from ``plus`` to ``minus``; complex at AC.

    Of a part with named terminals a current for each, under ``Q1,collector``: the current into that terminal.
    """

    potentials: Mapping[str, Value]
    currents: Mapping[str, Value]


@dataclass(frozen=True, slots=True)
class Solution:
    """A circuit solved twice, at one frequency.

    ``nodal``: the whole circuit in floating point. ``parts``: each independent source of that frequency alone, by name;
    rationals where ``exact``. ``gap``: largest difference of the two routes relative to the circuit's scale; ``residual``:
    largest sum of currents at a node relative to the largest current; ``balance``: sum of all powers relative to the largest.
    ``frequency``: in hertz, ``None`` for DC.
    """

    nodal: State
    parts: Mapping[str, State]
    exact: bool
    gap: float
    residual: float
    balance: float
    volts: float
    amperes: float
    watts: float
    frequency: Fraction | None = None
