"""AC circuits and phasors written out as the text of calc sheets, and strategies for random ones."""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass, replace
from decimal import Decimal
from fractions import Fraction

from circuits import ac, ac_circuits, part
from hypothesis import assume, reject
from hypothesis import strategies as st
from written import exactly, spelt, step, to_figures, what

from calccheck.model import Circuit, Element
from calccheck.solve import Unsolvable, frequencies, solve, total

UNITS = {"capacitor": "F", "inductor": "H", "impedance": "Ω", "voltage source": "V", "current source": "A"}


def number(x: float) -> str:
    """A floating-point number in all its digits."""
    return exactly(Fraction(x)) if x == int(x) else repr(x).replace("e-0", "e-")


def complex_text(z: complex) -> str:
    """A complex number in all its digits."""
    return f"({number(z.real)} {'−' if z.imag < 0 else '+'} j{number(abs(z.imag))})"


def line(e: Element) -> str:
    """The line of a part: as in ``written``, with phasors, frequencies, impedances, capacitances and inductances."""
    if e.phasor is not None:
        value = f"{complex_text(e.phasor)} {UNITS[e.kind]}"
    elif e.kind in ("capacitor", "inductor"):
        value = f"{exactly(e.value)} {UNITS[e.kind]}"
    else:
        value = what(e, {})
    hertz = f", {exactly(e.frequency)} Hz" if e.frequency else ""
    return f"{e.name}: {value}, {e.plus} to {e.minus}{hertz}"


def ac_block(made: Circuit) -> str:
    """A circuit as a fence."""
    return "\n".join(["```circuit", f"reference {made.reference}", *map(line, made.elements), "```", "", ""])


def with_plain_frequencies(made: Circuit) -> Circuit:
    """The circuit with whole hertz in place of thirds, which a sheet cannot write out."""
    elements = tuple(
        e if e.frequency is None else replace(e, frequency=Fraction(round(e.frequency))) for e in made.elements
    )
    return replace(made, elements=elements)


@dataclass(frozen=True)
class Phasor:
    """A complex value as printed: two rounded figures, magnitude and degrees or the two parts."""

    first: Decimal
    second: Decimal
    polar: bool

    def text(self, unit: str) -> str:
        """As a sheet prints it."""
        if self.polar:
            return f"{spelt(self.first, unit)} ∠ {self.second:f}°".replace("-", "−")
        sign = "−" if self.second < 0 else "+"
        return f"({_plain(self.first)} {sign} j{_plain(abs(self.second))}) {unit}"

    def off(self, first: int, second: int) -> Phasor:
        """Off by so many units of each last place."""
        return replace(
            self, first=self.first + first * step(self.first), second=self.second + second * step(self.second)
        )


def _plain(digits: Decimal) -> str:
    return spelt(digits, "").strip() if digits else f"{digits:e}"


def polar(z: complex, figures: int, places: int) -> Phasor:
    """Magnitude to so many figures, degrees to so many decimals."""
    return Phasor(
        to_figures(Fraction(abs(z)), figures), _to(Decimal(1).scaleb(-places), math.degrees(cmath.phase(z))), True
    )


def rectangular(z: complex, figures: int) -> Phasor:
    """Both parts to the last place that the larger one has with so many figures."""
    place = step(to_figures(Fraction(max(abs(z.real), abs(z.imag))), figures))
    return Phasor(_to(place, z.real), _to(place, z.imag), False)


def _to(place: Decimal, x: float) -> Decimal:
    """Rounded to a place, zero without a sign."""
    digits = Decimal(x).quantize(place)
    return digits if digits else digits.copy_abs()


# --- random circuits ---------------------------------------------------------------------------------------------------


@st.composite
def circuits(draw, kinds="RVIEFSOLC"):
    """A random circuit of one frequency that can be written out: no part has both ends at one node."""
    made = with_plain_frequencies(draw(ac_circuits(kinds, most_nodes=5, most_extra=5)))
    kept = tuple(e for e in made.elements if e.plus != e.minus)
    lost = {e.name for e in made.elements} - {e.name for e in kept}
    if any(e.control is not None and e.control.part in lost for e in kept) or not any(e.is_source for e in kept):
        reject()
    made = replace(made, elements=kept)
    if not solvable(made):
        reject()
    return made


@st.composite
def of_several_frequencies(draw):
    """A random circuit with current sources of a second frequency and, where it can be solved there, of DC."""
    made = draw(circuits("RVIEFLC"))
    hertz = frequencies(made)[0]
    for name, second in (("I98", hertz * 2), ("I99", None)):
        a, b = draw(st.permutations(made.nodes()))[:2]
        source = part("I", name, a, b, "0.02") if second is None else ac("I", name, a, b, 0.03 - 0.04j, second)
        more = replace(made, elements=(*made.elements, source))
        made = more if solvable(more) else made
    if len(frequencies(made)) == 1:
        reject()
    return made


def solvable(made):
    try:
        return all(solve(made, hertz) for hertz in frequencies(made))
    except Unsolvable:
        return False


def possible_quantities(made, hertz):
    """The voltages and currents at a frequency as written, letter, and value; none that is lost beside the others."""
    at = total(solve(made, hertz))
    pairs = [(a, b) for a in made.nodes() for b in made.nodes() if a != b]
    volts = [(f"V_{{{a},{b}}}", "V", complex(at.potentials[a] - at.potentials[b])) for a, b in pairs]
    amperes = [(f"I_{e.name}", "I", complex(at.currents[e.name])) for e in made.elements]
    for found in (volts, amperes):
        largest = max((abs(z) for _, _, z in found), default=0)
        yield from (q for q in found if abs(q[2]) > 1e-6 * largest)


def oblique(z):
    """Whether neither part is lost beside the other."""
    return abs(z.imag) > 0.01 * abs(z) and abs(z.real) > 0.01 * abs(z)


@st.composite
def quantities(draw, made, hertz, wanted=bool):
    """One of them."""
    possible = [q for q in possible_quantities(made, hertz) if wanted(q[2])]
    assume(possible)
    return draw(st.sampled_from(possible))
