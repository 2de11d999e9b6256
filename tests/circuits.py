"""Circuits for tests, built without the reading stage, and hypothesis strategies for random ones that can be solved."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

from hypothesis import reject
from hypothesis import strategies as st

from calccheck.model import Circuit, Control, Device, Element
from calccheck.solve import Unsolvable, frequencies, solve
from calccheck.source import Span

KINDS = {
    "R": "resistor", "V": "voltage source", "I": "current source", "E": "controlled voltage source",
    "F": "controlled current source", "S": "short", "O": "open", "C": "capacitor", "L": "inductor",
}  # fmt: skip


def part(kind, name, plus, minus, value=None, by=None):
    """One part, ``kind`` a letter of ``KINDS``. ``by``: the name of the controlling part, or the pair of controlling nodes."""
    control = None if by is None else Control(part=by) if isinstance(by, str) else Control(plus=by[0], minus=by[1])
    number = None if value is None else Fraction(value)
    return Element(name, KINDS[kind], plus, minus, Span(0, 0), value=number, control=control)


def ac(kind, name, plus, minus, phasor, hertz=None):
    """An AC source, or with kind ``Z`` an impedance."""
    frequency = None if hertz is None else Fraction(hertz)
    kind = "impedance" if kind == "Z" else KINDS[kind]
    return Element(name, kind, plus, minus, Span(0, 0), phasor=complex(phasor), frequency=frequency)


def op_amp(name, plus, minus, out, low=None, high=None):
    """An ideal op-amp, its swing where it has one."""
    swing = [None if x is None else Fraction(x) for x in (low, high)]
    return _device(name, "op-amp", {"plus": plus, "minus": minus, "out": out}, swing_low=swing[0], swing_high=swing[1])


def transformer(name, ratio, a, b, c, d):
    """An ideal transformer, first pair a to b, second pair c to d."""
    words = {"first+": a, "first-": b, "second+": c, "second-": d}
    return _device(name, "transformer", words, ratio=Fraction(ratio))


def transistor(name, base, collector, emitter, beta, v_be="0.7", v_ce=None, polarity="npn"):
    """A transistor by the hand model; saturated where V_CE is given."""
    words = {"base": base, "collector": collector, "emitter": emitter}
    state = "active" if v_ce is None else "saturated"
    return _device(name, "transistor", words, state=state, polarity=polarity, beta=Fraction(beta), v_be=Fraction(v_be),
                   v_ce=None if v_ce is None else Fraction(v_ce))  # fmt: skip


def diode(name, anode, cathode, drop="0.6", state="conducting"):
    """A diode by the hand model."""
    made = _device(name, "diode", {}, state=state, drop=Fraction(drop))
    return replace(made, plus=anode, minus=cathode)


def _device(name, kind, terminals, **model):
    return Element(name, kind, "", "", Span(0, 0), terminals=tuple(terminals.items()), device=Device(**model))


def circuit(*parts, reference="com", name=""):
    """A circuit of such parts, each on a line of its own (10 code points a line)."""
    placed = tuple(replace(e, span=Span(10 * k, 10 * k + 9)) for k, e in enumerate(parts))
    return Circuit(name, placed, reference, Span(0, 10 * len(parts)))


def scales(made, solution):
    """Volts and amperes to measure rounding by: those of the solution, or where it has none what the other would cause."""
    ohms = [abs(float(e.value)) for e in made.elements if e.kind == "resistor" and e.value] or [1.0]
    return solution.volts or solution.amperes * max(ohms), solution.amperes or solution.volts / min(ohms)


# --- random circuits ------------------------------------------------------------------------------------------------


def decimals(low=-1, high=4):
    """Values as engineers write them: three figures and a power of ten."""
    return st.builds(lambda n, e: Fraction(n, 100) * Fraction(10) ** e, st.integers(100, 999), st.integers(low, high))


def signed(strategy):
    """Values of either sign."""
    return st.builds(lambda x, sign: x * sign, strategy, st.sampled_from([1, -1]))


VALUES = {"R": decimals(), "V": signed(decimals(0, 1)), "I": signed(decimals(-4, -1))}


@st.composite
def circuits(draw, kinds="RVIEFSOCL0", most_nodes=7, most_extra=8):
    """A random circuit that has a single solution and an independent source.

    ``kinds``: letters of ``KINDS`` and ``0`` for a resistance of zero. Voltages and links stand only on a tree that spans the
    nodes, currents and gaps only off it, so that only controlled sources can spoil the solution; such draws are dropped.
    """
    names = ["com", *"abcdefghijklmnopqrstuvw"][: draw(st.integers(2, most_nodes))]
    on_tree = ["R", "R", "R", *(k for k in kinds if k in "VSLE0")]
    off_tree = ["R", "R", *(k for k in kinds if k in "IOCF")]
    ends = [(draw(st.sampled_from(["V"] if k == 1 and "I" not in kinds else on_tree)), n, draw(st.sampled_from(names[:k])))
            for k, n in enumerate(names) if k]  # fmt: skip
    ends += [(draw(st.sampled_from(off_tree)), draw(st.sampled_from(names)), draw(st.sampled_from(names)))
             for _ in range(draw(st.integers(0, most_extra)))]  # fmt: skip
    if "I" in kinds:
        ends.append(("I", *draw(st.permutations(names))[:2]))
    flipped = [(k, b, a) if draw(st.booleans()) else (k, a, b) for k, a, b in ends]
    labels = [f"{'R' if kind == '0' else kind}{n}" for n, (kind, *_) in enumerate(flipped)]
    made = circuit(*(_drawn(draw, kind, label, a, b, names, labels)
                     for label, (kind, a, b) in zip(labels, flipped, strict=True)))  # fmt: skip
    try:
        solve(made)
    except Unsolvable:
        if not any(e.control for e in made.elements):
            raise
        reject()
    return made


def _drawn(draw, kind, label, a, b, names, labels):
    if kind == "0":
        return part("R", label, a, b, 0)
    if kind not in "EF":
        return part(kind, label, a, b, draw(VALUES[kind]) if kind in VALUES else None)
    by = draw(st.one_of(st.sampled_from(labels), st.tuples(st.sampled_from(names), st.sampled_from(names))))
    exponents = {("E", True): (1, 3), ("E", False): (-1, 1), ("F", True): (-1, 1), ("F", False): (-4, -2)}
    return part(kind, label, a, b, draw(signed(decimals(*exponents[kind, isinstance(by, str)]))), by)


REACTIVE = {"L": decimals(-5, -1), "C": decimals(-10, -4)}


@st.composite
def ac_circuits(draw, kinds="RVIEFSOLC", most_nodes=6, most_extra=7, mixed=False):
    """A random circuit with an AC source that has a single solution at its highest frequency.

    ``kinds``: as in ``circuits``, with ``Z`` for an impedance. ``mixed``: sources of several frequencies, DC among them.
    """
    names = ["com", *"abcdefgh"][: draw(st.integers(2, most_nodes))]
    on_tree = ["R", "R", *(k for k in kinds if k in "LCZVSE")]
    off_tree = ["R", *(k for k in kinds if k in "LCZIOF")]
    ends = [(draw(st.sampled_from(["V"] if k == 1 else on_tree)), n, draw(st.sampled_from(names[:k])))
            for k, n in enumerate(names) if k]  # fmt: skip
    ends += [(draw(st.sampled_from(off_tree)), draw(st.sampled_from(names)), draw(st.sampled_from(names)))
             for _ in range(draw(st.integers(0, most_extra)))]  # fmt: skip
    labels = [f"{kind}{k}" for k, (kind, *_) in enumerate(ends)]
    hertz = draw(st.sampled_from([Fraction(50), Fraction(400), Fraction(10**5, 3)]))
    present = [hertz, hertz / 2, None] if mixed else [hertz]
    made = circuit(*(_drawn_at(draw, kind, label, a, b, names, labels, present if k else [hertz])
                     for k, (label, (kind, a, b)) in enumerate(zip(labels, ends, strict=True))))  # fmt: skip
    try:
        solve(made, hertz)
    except Unsolvable:
        if not any(e.control for e in made.elements):
            raise
        reject()
    return made


def _drawn_at(draw, kind, label, a, b, names, labels, frequencies):
    if kind in "VI":
        hertz = draw(st.sampled_from(frequencies))
        phasor = complex(draw(VALUES[kind]), draw(VALUES[kind]))
        return part(kind, label, a, b, draw(VALUES[kind])) if hertz is None else ac(kind, label, a, b, phasor, hertz)
    if kind == "Z":
        return ac("Z", label, a, b, complex(draw(decimals(0, 3)), draw(signed(decimals(0, 3)))))
    if kind in "LC":
        return part(kind, label, a, b, draw(REACTIVE[kind]))
    return _drawn(draw, kind, label, a, b, names, labels)


@st.composite
def stages(draw, made):
    """The circuit with one to three stages around op-amps, transformers, diodes and transistors, each with resistors about it.

    Only what steers or is fed back can spoil the solution; such draws are dropped.
    """
    added = []
    for k in range(draw(st.integers(1, 3))):
        near, far = draw(st.sampled_from(made.nodes())), draw(st.sampled_from(made.nodes()))
        device, ends = _stage(draw, draw(st.sampled_from("UTDQ")), k, near, far)
        added += [device, *(part("R", f"r{j}_{k}", *pair, draw(decimals(1, 4))) for j, pair in enumerate(ends))]
    whole = circuit(*made.elements, *added, reference=made.reference)
    try:
        solve(whole, max(frequencies(whole)))
    except Unsolvable:
        if not any(e.control or e.kind in ("op-amp", "transistor") for e in whole.elements):
            raise
        reject()
    return whole


def _stage(draw, kind, k, near, far):
    """A part and the pairs of nodes between which its resistors lie."""
    p, q, r = f"p{k}", f"q{k}", f"r{k}"
    if kind == "U":
        return op_amp(f"U{k}", near, p, q), [(q, p), (p, far), (q, near)]
    if kind == "T":
        return transformer(f"T{k}", draw(signed(decimals(-1, 1))), p, far, q, "com"), [(near, p), (q, "com")]
    if kind == "D":
        state = draw(st.sampled_from(["conducting", "blocking"]))
        return diode(f"D{k}", p, q, state=state), [(near, p), (q, far), (p, far)]
    model = {"v_ce": draw(st.sampled_from([None, "0.2"])), "polarity": draw(st.sampled_from(["npn", "pnp"]))}
    return transistor(f"Q{k}", p, q, r, draw(decimals(1, 2)), **model), [(near, p), (q, far), (r, "com")]
