"""The expression language as frozen nodes; each keeps its place in the sheet.

``read.expression`` makes them from text, ``arithmetic`` works them out, the outputs set them as mathematics.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from decimal import Decimal
from fractions import Fraction
from functools import cached_property
from typing import Literal

from calccheck.amounts import ICE, Amount
from calccheck.source import Span
from calccheck.units import PLAIN, Unit

ChangeKind = Literal["without", "open", "shorted", "as", "beta", "V_BE", "V_CE", "drop"]
Operator = Literal["+", "-", "×", "÷", "^", "∥", "·", "∠"]
Prefix = Literal["", "min", "max", "worst", "rss", "mag", "arg", "re", "im", "rms", "sigma", "yield"]
OVER_TOLERANCES: tuple[Prefix, ...] = ("min", "max", "worst", "rss", "sigma", "yield")


@dataclass(frozen=True)
class Number:
    """A number as printed, with the unit behind it (``PLAIN`` where none stands).

    ``digits`` keeps the printed places: ``Decimal('9.195')``, ``Decimal('1.20E+3')``. ``unit_words``: each word of the unit,
    because a word that is also a name of the sheet makes the literal doubtful. ``scientific``: written with an exponent, so that
    the zeros at its end are figures.
    """

    digits: Decimal
    span: Span
    unit: Unit = PLAIN
    unit_words: tuple[str, ...] = ()
    scientific: bool = False

    @cached_property
    def amount(self) -> Amount:
        """What is printed, in SI; worked out once, because a claim's judgement asks for it many times."""
        unit, (over, under) = self.unit, self.digits.as_integer_ratio()
        value = Fraction(over * unit.factor.numerator, under * unit.factor.denominator)
        if unit.celsius:
            return Amount(value + ICE, unit.dimension, point=True)
        return Amount(value, unit.dimension, level=unit.text == "dB")

    @cached_property
    def place(self) -> Fraction:
        """The unit of the last printed place, in SI."""
        exponent, factor = int(self.digits.as_tuple().exponent), self.unit.factor
        return Fraction(factor.numerator, factor.denominator * 10**-exponent) if exponent < 0 else factor * 10**exponent


@dataclass(frozen=True, slots=True)
class Change:
    """One change of a circuit: a part taken out, opened, shorted, given another value, or one of its model's values."""

    part: str
    what: ChangeKind
    span: Span
    value: Node | None = None


@dataclass(frozen=True, slots=True)
class Qualifiers:
    """What stands behind a quantity: ``due to Vb and Ia``, ``without RL``, ``in case hot``, ``at 50 Hz``, ``of bridge``.

    ``frequency``: in hertz, 0 for ``at dc``.
    """

    due_to: tuple[str, ...] = ()
    changes: tuple[Change, ...] = ()
    case: str = ""
    frequency: Fraction | None = None
    circuit: str = ""


NO_QUALIFIERS = Qualifiers()


@dataclass(frozen=True, slots=True)
class Reference:
    """A name or a quantity: ``Rb``, ``Rp2``, ``V_bus due to Vb``, ``R_{a,b} without RL``.

    ``letter`` and ``subscripts`` are the parts of a name with a subscript (``V`` and ``('bus',)``), else ``word`` and ``()``.
    ``braced``: the subscript stood in braces. ``maths``: it stands in dollar maths, where ``R_1`` may mean the part R1. What the name means is decided where circuits and definitions are known.
    ``bracket``: of a prefix with a bracket behind it, such as ``max (V_adc / Vref)`` or ``yield (V_out ≤ 3.4 V)``, its members
    with the relation before each; ``word`` is then the whole as written.
    """

    word: str
    span: Span
    letter: str = ""
    subscripts: tuple[str, ...] = ()
    braced: bool = False
    qualifiers: Qualifiers = NO_QUALIFIERS
    prefix: Prefix = ""
    text: str = ""
    maths: bool = False
    bracket: tuple[tuple[str, Node], ...] = ()

    def __hash__(self) -> int:
        """Word and place tell references apart well enough; hashing all fields costs more than looking one up."""
        return hash((self.word, self.span.start))


@dataclass(frozen=True, slots=True)
class Unary:
    """``−x``, ``+x``, or ``√x``."""

    sign: Literal["-", "+", "√"]
    operand: Node
    span: Span


@dataclass(frozen=True, slots=True)
class Binary:
    """Two operands: ``+ − × ÷ ^ ∥``; ``·`` stands for juxtaposition (``2 R1``), ``∠`` for a phasor by magnitude and angle."""

    operator: Operator
    left: Node
    right: Node
    span: Span


@dataclass(frozen=True, slots=True)
class Group:
    """A bracketed expression, with the unit that multiplies it where one stands behind: ``(3/16) mA``."""

    inner: Node
    span: Span
    unit: Unit = PLAIN
    unit_words: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Call:
    """A function of one or more arguments; ``abs`` also for ``|x|``."""

    function: str
    arguments: tuple[Node, ...]
    span: Span


@dataclass(frozen=True, slots=True)
class Range:
    """``a … b`` or ``x ± d``; never part of a larger expression."""

    low: Node
    high: Node
    span: Span
    centred: bool = False
    text: str = field(default="", compare=False)


Node = Number | Reference | Unary | Binary | Group | Call | Range


def children(node: Node) -> tuple[Node, ...]:
    """The nodes directly under one."""
    if isinstance(node, (Number, Reference)):  # most nodes
        return ()
    match node:
        case Unary(operand=inner) | Group(inner=inner):
            return (inner,)
        case Binary(left=left, right=right):
            return (left, right)
        case Range(low=left, high=right):
            return (left, right)
        case Call(arguments=arguments):
            return arguments
    return ()


def walk(node: Node) -> Iterator[Node]:
    """The node and all below it, outer first, in reading order."""
    left = [node]
    while left:
        node = left.pop()
        yield node
        left += reversed(children(node))


def numbers(node: Node) -> list[Number]:
    """The printed numbers in an expression."""
    return [n for n in walk(node) if isinstance(n, Number)]


def references(node: Node) -> list[Reference]:
    """The names and quantities in an expression (not those inside qualifiers)."""
    return [n for n in walk(node) if isinstance(n, Reference)]
