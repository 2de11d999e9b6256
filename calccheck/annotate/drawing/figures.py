"""What a drawing says of a circuit: its nodes from top to bottom, their potentials, every part's words and currents."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass
from itertools import pairwise

from calccheck.annotate.drawing.svg import visible
from calccheck.arithmetic import Amount, Value, size
from calccheck.model import Circuit, Device, Element, Solution, State
from calccheck.printing import shown
from calccheck.solve import total
from calccheck.units import AMPERE, NONE, VOLT, Dimension

_VOLT_FIGURES, _AMPERE_FIGURES = 4, 3
_NOTHING = 1e-9  # of the circuit's scale: what floating point leaves of a zero
_LONGEST, _WIDEST, _MOST_LINES = 26, 13, 3  # characters of a name, of a line of a value; lines of a value


@dataclass(frozen=True, slots=True)
class Flow:
    """A current as drawn. ``sign``: 1 with the counting direction, into the part at this terminal, −1 against it, 0 none."""

    lines: tuple[str, ...]
    sign: int


@dataclass(frozen=True, slots=True)
class Pin:
    """Where a part meets a node: its lettering inside a box and the current into it, ``None`` where nothing is solved."""

    word: str
    node: str
    flow: Flow | None


@dataclass(frozen=True, slots=True)
class Drawn:
    """A part as it is to be drawn. ``upright``: with a symbol between two lines; else a labelled box with a lead for each pin."""

    element: Element
    name: str
    lines: tuple[str, ...]
    pins: tuple[Pin, ...]
    upright: bool


@dataclass(frozen=True, slots=True)
class Figures:
    """``nodes``: from top to bottom. ``names``, ``potentials``: their lettering; no potentials where nothing is solved."""

    nodes: tuple[str, ...]
    names: Mapping[str, str]
    potentials: Mapping[str, str]
    parts: tuple[Drawn, ...]


def figures(circuit: Circuit, solution: Solution | None, missing: Collection[str] = ()) -> Figures:
    """Everything that is lettered. ``missing``: characters that no font shows."""
    state = total(solution) if solution is not None else None
    nodes = _levels(circuit, solution, state)
    names = {n: _cut(visible(n, missing)) for n in nodes}
    names[circuit.reference] = f"{names.get(circuit.reference, '')} (reference)"
    potentials = {n: _amount(state.potentials[n], solution.volts, VOLT) for n in nodes} if state and solution else {}
    return Figures(nodes, names, potentials, tuple(_drawn(e, solution, state, missing) for e in circuit.elements))


# --- nodes ----------------------------------------------------------------------------------------------------------


def _levels(circuit: Circuit, solution: Solution | None, state: State | None) -> tuple[str, ...]:
    """Highest potential first (at AC largest magnitude); where these are equal or not known, farthest from the reference."""
    nodes = circuit.nodes()
    far = distances(circuit)
    order = {n: (-far[n], k) for k, n in enumerate(nodes)}
    if state is None or solution is None:
        return tuple(sorted(nodes, key=lambda n: order[n]))
    step = solution.volts * _NOTHING or 1.0

    def height(node: str) -> float:
        v = state.potentials[node]
        return round(float(abs(v) if isinstance(v, complex) else v) / step)

    return tuple(sorted(nodes, key=lambda n: (-height(n), order[n])))


def distances(circuit: Circuit) -> dict[str, int]:
    """How many parts lie between each node and the reference; one more than there are nodes where no way leads."""
    nodes = circuit.nodes()
    near: dict[str, set[str]] = {n: set() for n in nodes}
    for e in circuit.elements:
        ends = [n for n in (e.plus, e.minus, *(n for _, n in e.terminals)) if n]
        for a, b in pairwise([*ends, ends[0]] if ends else []):
            near[a].add(b)
            near[b].add(a)
    found = {circuit.reference: 0}
    reached = [circuit.reference]
    for node in reached:
        fresh = sorted(near.get(node, set()) - found.keys())
        found |= dict.fromkeys(fresh, found[node] + 1)
        reached += fresh
    return {n: found.get(n, len(nodes) + 1) for n in nodes}


# --- parts ----------------------------------------------------------------------------------------------------------

_PINS = {
    "base": "B", "collector": "C", "emitter": "E", "plus": "+", "minus": "−", "out": "out",
    "first+": "1+", "first-": "1−", "second+": "2+", "second-": "2−",
}  # fmt: skip


def _drawn(e: Element, solution: Solution | None, state: State | None, missing: Collection[str]) -> Drawn:
    name = _cut(visible(e.name, missing))
    lines = tuple(line for words in (e.written, *_model_words(e)) for line in _wrapped(visible(words, missing)))
    ends = e.terminals or (("plus", e.plus), ("minus", e.minus))

    def flow(k: int, word: str) -> Flow | None:
        if state is None or solution is None:
            return None
        if e.terminals:
            return _flow(state.currents[f"{e.name},{word}"], solution)
        return _flow(state.currents[e.name] * (1 if k == 0 else -1), solution)

    pins = tuple(Pin(_PINS.get(word, word), node, flow(k, word)) for k, (word, node) in enumerate(ends))
    return Drawn(e, name, lines, pins, not e.terminals and e.plus != e.minus)


def _flow(current: Value, solution: Solution) -> Flow:
    """A current into a pin. A phasor has no direction but the counting one: it is drawn as it counts."""
    if size(current) <= solution.amperes * _NOTHING:
        return Flow(("0 A",), 0)
    if isinstance(current, complex) or solution.frequency:
        magnitude, _, angle = _amount(complex(current), 0.0, AMPERE, _AMPERE_FIGURES).partition(" ∠ ")
        return Flow((magnitude, f"∠ {angle}") if angle else (magnitude,), 1)
    return Flow((_amount(size(current), 0.0, AMPERE, _AMPERE_FIGURES),), 1 if current > 0 else -1)


def _model_words(e: Element) -> tuple[str, ...]:
    """What the hand model of a part holds, beside its kind."""
    d = e.device or Device()
    values = ((d.drop, "drop ", VOLT), (d.v_be, "V_BE ", VOLT), (d.beta, "beta ", NONE), (d.v_ce, "V_CE ", VOLT))
    found = tuple(word + shown(Amount(x, dimension), "V") for x, word, dimension in values if x is not None)
    return (*((d.state,) if d.state in ("saturated", "blocking") else ()), *found)


# --- lettering ------------------------------------------------------------------------------------------------------


def _amount(value: Value, scale: float, dimension: Dimension, places: int = _VOLT_FIGURES) -> str:
    if size(value) <= scale * _NOTHING:
        return shown(Amount(0.0, dimension))
    return shown(Amount(value, dimension), figures=places)


def _cut(name: str) -> str:
    return name if len(name) <= _LONGEST else name[: _LONGEST - 1] + "…"


def _wrapped(words: str) -> list[str]:
    """A value in short lines, broken at blanks and else anywhere."""
    lines: list[str] = []
    for word in words.split():
        if lines and len(lines[-1]) + 1 + len(word) <= _WIDEST:
            lines[-1] += f" {word}"
        else:
            lines += [word[k : k + _WIDEST] for k in range(0, len(word), _WIDEST)]
    return (
        lines if len(lines) <= _MOST_LINES else [*lines[: _MOST_LINES - 1], lines[_MOST_LINES - 1][: _WIDEST - 1] + "…"]
    )
