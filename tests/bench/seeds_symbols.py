"""Claims by formula: small circuits in free symbols, their formulas by sympy from the bench's own equations, and slips in them.

A wrong formula is what sympy gets for the circuit, or the sum, with the slip in it; written out, factored or over one
denominator, as comes.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import lru_cache

import sympy
from hand import Part, zeroed

UNITS = {"R": "Ω", "V": "V", "I": "A"}
FORMS = (sympy.factor, sympy.together, lambda x: x)


@dataclass(frozen=True)
class Formula:
    """``quantity``: as claimed; ``value``: the formula that is written behind it; ``truth``: the right one."""

    quantity: str
    value: sympy.Expr
    truth: sympy.Expr
    written: str
    earlier: tuple[Part, ...] = ()

    def claim(self):
        return f"{self.quantity} = {self.written}"


@lru_cache(maxsize=4000)
def solved(parts):
    """Potentials and currents by their names, or nothing without a single solution."""
    nodes = sorted({n for p in parts for n in (p.plus, p.minus, *p.by) if n} - {"com"})
    volt = {n: sympy.Symbol(f"v {n}") for n in nodes} | {"com": sympy.Integer(0)}
    ampere = {p.name: sympy.Symbol(f"i {p.name}") for p in parts}
    laws = []
    for p in parts:
        across, i, steer = (
            volt[p.plus] - volt[p.minus],
            ampere[p.name],
            (volt[p.by[0]] - volt[p.by[1]]) if p.by[0] else 0,
        )
        laws.append({"R": across - p.value * i, "V": across - p.value, "I": i - p.value, "G": i - p.value * steer,
                     "U": steer, "=": across, "-": i}[p.kind])  # fmt: skip
    sums = [sum(ampere[p.name] * ((p.plus == n) - (p.minus == n)) for p in parts) for n in nodes]
    found = sympy.linsolve([*laws, *sums], [*(volt[n] for n in nodes), *ampere.values()])
    if not isinstance(found, sympy.FiniteSet) or len(found) != 1:
        return None
    (values,) = found
    if any(v.free_symbols & {*volt.values(), *ampere.values()} for v in values):
        return None
    return {str(u): v for u, v in zip([*(volt[n] for n in nodes), *ampere.values()], values, strict=True)}


class SymbolBench:
    """One circuit to draw formulas from."""

    def __init__(self, parts, rng):
        self.parts, self.rng = tuple(parts), rng

    def put(self, name, **change):
        return tuple(replace(p, **change) if p.name == name else p for p in self.parts)

    def worth(self, q, parts=None):
        """The formula of a quantity (letter, name, the one source that acts or nothing)."""
        letter, name, due = q
        parts = self.parts if parts is None else parts
        if due:
            parts = tuple(zeroed(p) if p.kind in "VI" and p.name != due else p for p in parts)
        found = solved(parts)
        if found is None:
            return None
        part = next((p for p in parts if p.name == name), None)
        if letter == "I":
            return found.get(f"i {name}")
        at = {**found, "v com": sympy.Integer(0)}
        return at.get(f"v {name}") if part is None else at[f"v {part.plus}"] - at[f"v {part.minus}"]

    def pick(self, due=True, letters="VVI"):
        nodes = sorted({n for p in self.parts for n in (p.plus, p.minus)} - {"com"})
        names = [p.name for p in self.parts if p.kind in "RVI"]
        for _ in range(20):
            letter = self.rng.choice(letters)
            name = self.rng.choice([*nodes, *names] if letter == "V" else names)
            only = self.rng.choice(self.sources) if due and self.rng.random() < 0.3 else ""
            q = (letter, name, only)
            value = self.worth(q)
            if value is not None and len(sympy.cancel(value).free_symbols) > 1:
                return q, value
        return None, None

    @property
    def sources(self):
        return [p.name for p in self.parts if p.kind in "VI"]

    @property
    def resistors(self):
        return [p for p in self.parts if p.kind == "R"]

    def seed(self, q, value, truth, **more):
        if q is None or value is None or sympy.cancel(value) == 0:
            return None
        letter, name, due = q
        form = self.rng.choice(FORMS)
        return Formula(
            f"{letter}_{name}" + (f" due to {due}" if due else ""),
            value,
            truth,
            text(form(sympy.cancel(value))),
            **more,
        )


def text(expression):
    """An expression as the sheet language writes it."""
    return str(expression).replace("**", "^")


def circuit_block(parts):
    lines = []
    for p in parts:
        if p.kind == "U":
            lines.append(f"{p.name}: op-amp, plus {p.by[0]}, minus {p.by[1]}, out {p.plus}")
        elif p.kind == "G":
            lines.append(f"{p.name}: {text(p.value)} * V_{{{p.by[0]},{p.by[1]}}}, {p.plus} to {p.minus}")
        else:
            lines.append(f"{p.name}: {text(p.value)} {UNITS[p.kind]}, {p.plus} to {p.minus}")
    return "\n".join(["```circuit", "reference com", *lines, "```"])


def random_parts(rng, controlled=False):
    """Two or three inner nodes, each value a symbol or twice one, one or two sources."""
    nodes = ["com", *(f"n{k}" for k in range(1, rng.randint(3, 4)))]
    ends = [(n, rng.choice(nodes[:k])) for k, n in enumerate(nodes) if k]
    ends += [tuple(rng.sample(nodes, 2)) for _ in range(rng.randint(0, 2))]
    parts = [Part("R", f"R{k}", *e, rng.choice((1, 1, 2)) * sympy.Symbol(f"Ra{k}")) for k, e in enumerate(ends, 1)]
    feed = rng.choice(nodes[1:])
    parts += [Part("V", "V1", "s", "com", sympy.Symbol("Va")), Part("R", "Rs", "s", feed, sympy.Symbol("Rz"))]
    if rng.random() < 0.7:
        parts.append(Part("I", "I2", "com", rng.choice(nodes[1:]), sympy.Symbol("Ib")))
    if controlled:
        parts.append(Part("R", "Rx", feed, "com", sympy.Symbol("Rg")))  # which tells that Rg is a resistance
        parts.append(Part("G", "Gx", *rng.sample(nodes, 2), 1 / sympy.Symbol("Rg"), (feed, "com")))
    return parts if solved(tuple(parts)) is not None else random_parts(rng, controlled)


def stage_parts(rng):
    start, plus = ("a", "com") if rng.random() < 0.5 else ("com", "a")
    r = [sympy.Symbol(f"Rq{k}") for k in range(4)]
    parts = [Part("V", "V1", "a", "com", sympy.Symbol("Va")), Part("R", "R1", start, "m", r[0]), Part("R", "R2", "m", "o", r[1]),
             Part("R", "R3", "o", "b", r[2]), Part("R", "R4", "b", "com", r[3])]  # fmt: skip
    return [*parts, Part("U", "U1", "o", "com", by=(plus, "m"))]


# --- seeds ----------------------------------------------------------------------------------------------------------


def right(b):
    q, t = b.pick()
    return b.seed(q, t, t)


def unexplained(b):
    """One coefficient of the formula, over one denominator, worth three to seven times what it should be."""
    q, t = b.pick()
    if q is None:
        return None
    over, under = sympy.fraction(sympy.cancel(sympy.together(t)))
    side = b.rng.choice((over, under))
    terms = sympy.Add.make_args(sympy.expand(side))
    odd = b.rng.choice(terms)
    changed = side + odd * b.rng.choice((2, 3, 4, 6))
    return b.seed(q, changed / under if side is over else over / changed, t) if len(terms) > 1 else None


def sign(b):
    q, t = b.pick()
    return b.seed(q, -t, t) if q else None


def factor_two(b):
    q, t = b.pick()
    return b.seed(q, t * b.rng.choice((2, sympy.Rational(1, 2))), t) if q else None


def _sum(b, weight):
    q, t = b.pick(due=False)
    if q is None or len(b.sources) < 2:
        return None
    odd = b.rng.choice(b.sources)
    share = b.worth((q[0], q[1], odd))
    return b.seed(q, t + (weight - 1) * share, t) if sympy.cancel(share) != 0 and sympy.cancel(share - t) != 0 else None


def source_missing(b):
    return _sum(b, 0)


def source_reversed(b):
    return _sum(b, -1)


def source_twice(b):
    return _sum(b, 2)


def _in(b, parts, **more):
    q, t = b.pick()
    return b.seed(q, b.worth(q, parts), t, **more) if q else None


def source_zeroed_wrongly(b):
    if len(b.sources) < 2:
        return None
    own, other = b.rng.sample(b.sources, 2)
    kind = next(p.kind for p in b.parts if p.name == other)
    q, _ = b.pick(due=False)
    if q is None:
        return None
    q = (q[0], q[1], own)
    return b.seed(q, b.worth(q, b.put(other, kind="-" if kind == "V" else "=", value=0.0)), b.worth(q))


def controlled_source_zeroed(b):
    steered = [p for p in b.parts if p.kind == "G"]
    return _in(b, b.put(steered[0].name, kind="-", value=0.0, by=("", ""))) if steered else None


def swapped_values(b):
    x, y = b.rng.sample(b.resistors, 2)
    return _in(b, tuple(replace(p, value={x.name: y.value, y.name: x.value}.get(p.name, p.value)) for p in b.parts))


def element_absent(b):
    return _in(b, b.put(b.rng.choice(b.resistors).name, kind="-", value=0.0))


def element_shorted(b):
    return _in(b, b.put(b.rng.choice(b.resistors).name, kind="=", value=0.0))


def series_parallel(b):
    x, y = b.rng.sample(b.resistors, 2)
    side, row = x.value * y.value / (x.value + y.value), x.value + y.value
    if {x.plus, x.minus} == {y.plus, y.minus}:
        return _in(
            b,
            tuple(
                replace(p, value=row) if p is x else replace(p, kind="-", value=0.0) if p is y else p for p in b.parts
            ),
        )
    joint = {x.plus, x.minus} & {y.plus, y.minus} - {"com"}
    if not joint or len([p for p in b.parts if joint & {p.plus, p.minus, *p.by}]) != 2:
        return None
    odd = tuple(replace(p, value=side) if p is x else replace(p, kind="=", value=0.0) if p is y else p for p in b.parts)
    q, t = b.pick()
    return b.seed(q, b.worth(q, odd), t) if q and q[1] not in joint else None


def divider_complement(b):
    tap = (
        next(p.minus for p in b.parts if p.plus == "s" and p.name != "V1")
        if any(p.name == "Rs" for p in b.parts)
        else ""
    )
    t = b.worth(("V", tap, "")) if tap and tap != "com" else None
    return b.seed(("V", tap, ""), sympy.Symbol("Va") - t, t) if t is not None else None


def other_quantity(b):
    q, t = b.pick()
    o, _ = b.pick(due=False, letters=q[0]) if q else (None, None)
    if o is None or o[1] == q[1]:
        return None
    value = b.worth((o[0], o[1], q[2]))
    return b.seed(q, value, t) if sympy.cancel(value + t) != 0 else None


def stage_kind(b):
    amps = [p for p in b.parts if p.kind == "U"]
    if not amps:
        return None
    first = next(p for p in b.parts if p.name == "R1")
    odd = tuple(
        replace(p, plus=amps[0].by[0]) if p is first else replace(p, by=(first.plus, "m")) if p.kind == "U" else p
        for p in b.parts
    )
    q, t = b.pick(due=False)
    value = b.worth(q, odd) if q else None
    return (
        b.seed(q, value, t) if value is not None and sympy.cancel(value + t) != 0 else None
    )  # turned round it is a sign
