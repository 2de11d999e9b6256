"""Values with tolerances: how far each may lie from its nominal value, and which of a circuit's parts it moves."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field, replace
from decimal import Decimal
from fractions import Fraction

from calccheck.arithmetic import Amount, Doubt, Value
from calccheck.formula import Binary, Group, Node, Number, Reference, Unary, references
from calccheck.judge.scope import Defined, Ledger, given
from calccheck.model import Circuit, Element, Settings, Tolerance
from calccheck.source import Span
from calccheck.toleranced import Effect, Varied
from calccheck.units import NONE, SIEMENS, VOLT

REFERENCE_TEMPERATURE = Fraction(25)  # °C, at which the values themselves hold (common practice)
_DEVICE = {"beta": ("beta", NONE), "V_BE": ("v_be", VOLT), "V_CE": ("v_ce", VOLT), "drop": ("drop", VOLT)}


def within(nominal: Fraction, tolerances: Iterable[Tolerance], settings: Settings) -> tuple[Fraction, Fraction]:
    """The ends between which a value lies, its tolerances added up. Raises ``Doubt`` for one by the kelvin without a range."""
    above = below = Fraction(0)
    for t in tolerances:
        plus, minus = t.plus, t.minus
        if t.per_kelvin:
            if settings.temperature is None:
                raise Doubt(
                    f"{t.text} is by the kelvin: state the range in check:, temperature: −20 °C to 60 °C", t.span
                )
            kelvins = max(abs(end - REFERENCE_TEMPERATURE) for end in settings.temperature)
            plus, minus = plus * kelvins, minus * kelvins
        if t.relative:
            plus, minus = (plus * nominal, minus * nominal) if nominal > 0 else (-minus * nominal, -plus * nominal)
        above, below = above + plus, below + minus
    return nominal - below, nominal + above


def tolerances_of(e: Element) -> tuple[Tolerance, ...]:
    """The tolerances of a part's own value."""
    return tuple(t for t in (e.tolerance, e.drift) if t is not None)


@dataclass(slots=True)
class Values:
    """The varied values and the constants of one formula, gathered as they are met.

    ``every``: values without a tolerance are counted as varied too, from their nominal value to itself.
    """

    ledger: Ledger
    every: bool = False
    varied: dict[str, Varied] = field(default_factory=dict)
    constants: dict[str, Value] = field(default_factory=dict)

    def constant(self, value: Value, span: Span) -> Node:
        """A name for a value that does not vary; the same for the same value, whatever the formula."""
        key = f"constant {value!r}"
        self.constants[key] = value
        return Reference(key, span)

    def given(self, d: Defined, span: Span) -> Node:
        """An assumption: varied where it has a tolerance."""
        if d.tolerance is None or isinstance(d.exact.value, complex):
            return self.constant(d.exact.value, span)
        return self._varied(f"given {d.name}", d.name, Fraction(d.exact.value), (d.tolerance,), d.exact, span)

    def own(self, e: Element, circuit: int, span: Span) -> Node:
        """A part's own value as the sheet states it: a resistance or a conductance, a source's size, a gain."""
        nominal = e.stated.value if e.stated is not None else e.value if e.value is not None else e.phasor
        if nominal is None:
            raise Doubt(f"{e.name} is {e.kind} and has no value of its own", span)
        stated = e.stated or Amount(nominal)
        found = tolerances_of(e)
        key = f"{circuit} {e.name}"
        if e.worked is not None and any(self._is_varied(n) for n in _names(e.worked)):
            formula = Group(self._with_givens(e.worked), span)
            if not found:
                return formula
            if found[0].relative:
                return Binary("×", formula, self._varied(key, e.name, Fraction(1), found, Amount(1), span), span)
            return Binary("+", formula, self._varied(key, e.name, Fraction(0), found, stated, span), span)
        if isinstance(nominal, complex):
            angle = Amount(nominal / abs(nominal)) if nominal else Amount(1)
            turned = self.constant(angle.value, span)
            return Binary("×", self._varied(key, e.name, Fraction(abs(nominal)), found, stated, span), turned, span)
        return self._varied(key, e.name, Fraction(nominal), found, stated, span)

    def _varied(
        self, key: str, label: str, nominal: Fraction, tolerances: tuple[Tolerance, ...], like: Amount, span: Span
    ) -> Node:
        low, high = within(nominal, tolerances, self.ledger.settings)
        if low == high and not self.every:
            return self.constant(nominal, span)
        self.varied[key] = Varied(key, label, nominal, low, high, like.dimension)
        return Reference(key, span)

    def _is_varied(self, name: str) -> bool:
        d = given(name, self.ledger)
        return d is not None and d.tolerance is not None

    def _with_givens(self, node: Node) -> Node:
        """The formula of a part's value with its givens put in."""
        match node:
            case Reference():
                d = given(node.word, self.ledger)
                if d is None:
                    raise Doubt(f"{node.word} has no value above", node.span)
                return self.given(d, node.span)
            case Unary():
                return replace(node, operand=self._with_givens(node.operand))
            case Group():
                return replace(node, inner=self._with_givens(node.inner))
            case Binary():
                return replace(node, left=self._with_givens(node.left), right=self._with_givens(node.right))
        if _names(node):
            raise Doubt("this value is not worked over tolerances", node.span)
        return node

    # --- what they move ---------------------------------------------------------------------------------------------

    def effects(self, circuit: Circuit, index: int) -> tuple[Effect, ...]:
        """What varies in the parts of a circuit; zeroed sources and changed values have no tolerance."""
        return tuple(effect for e in circuit.elements for effect in self._effects(e, index))

    def _effects(self, e: Element, index: int) -> list[Effect]:
        found = []
        stated = dict(e.device.tolerances) if e.device is not None else {}
        for word, (name, dimension) in _DEVICE.items():
            nominal = getattr(e.device, name) if e.device is not None else None
            if nominal is None or not (word in stated or (self.every and nominal)):
                continue
            key, label = f"{index} {e.name} {word}", f"{word} of {e.name}"
            own = (stated[word],) if word in stated else ()
            node = self._varied(key, label, nominal, own, Amount(nominal, dimension), e.span)
            found.append(Effect(e.name, name, node))
        if e.value is None and e.phasor is None:
            return self._moving(found)
        if tolerances_of(e) or e.worked is not None or self.every:
            node = self.own(e, index, e.span)
            if e.kind == "resistor" and e.stated is not None and e.stated.dimension == SIEMENS:
                node = Binary("÷", Number(Decimal(1), e.span), node, e.span)
            found.append(Effect(e.name, "value" if e.phasor is None else "phasor", node))
        return self._moving(found)

    def _moving(self, effects: list[Effect]) -> list[Effect]:
        return [e for e in effects if any(name in self.varied for name in _names(e.node))]


def _names(node: Node) -> list[str]:
    return [r.word for r in references(node)]
