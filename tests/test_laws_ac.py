"""Laws of judging over random AC circuits written out as sheets: a right phasor is never called wrong, a wrong one always.

The truth comes from the solver (held against published examples and general-purpose libraries by its own tests); the printed
figures are rounded and changed here by decimal arithmetic of the tests' own.
"""

from __future__ import annotations

import cmath
import math
from dataclasses import replace
from fractions import Fraction

import pytest
from hypothesis import assume, given, reject, settings
from hypothesis import strategies as st
from written import spelt, step, to_figures, working
from written_ac import ac_block, circuits, oblique, of_several_frequencies, polar, quantities, rectangular

from calccheck import check_text
from calccheck.solve import Unsolvable, frequencies, solve, total

few = settings(max_examples=30, deadline=None)
FIGURES, PLACES = st.integers(3, 5), st.integers(1, 3)
OFF = st.one_of(st.integers(2, 9), st.integers(-9, -2))
UNIT = {"V": "V", "I": "A"}
PEAK = "---\ncheck:\n  phasors: peak\n---\n\n"


def verdicts(sheet):
    return [j.verdict for j in check_text("sheet.md", sheet).claims]


def judged_alone(made, *claims):
    """The verdict of each claim on a sheet of its own, so that none explains another."""
    return [verdicts(ac_block(made) + f"`{claim}`\n") for claim in claims]


def one_frequency(made):
    (hertz,) = frequencies(made)
    return hertz


# --- values ---------------------------------------------------------------------------------------------------------


@few
@given(circuits(), st.data())
def test_a_right_phasor_agrees_however_it_is_printed(made, data):
    quantity, letter, z = data.draw(quantities(made, one_frequency(made)))
    unit, figures, places = UNIT[letter], data.draw(FIGURES), data.draw(PLACES)
    first, second = polar(z, figures, places), rectangular(z, figures)
    turned = replace(first, second=first.second + 360 * data.draw(st.sampled_from([1, -1, 2])))
    statements = [f"{quantity} = {p.text(unit)}" for p in (first, second, turned)]
    statements.append(f"|{quantity}| = {spelt(first.first, unit)}")
    statements.append(f"arg {quantity} = {turned.second:f}°")
    assert verdicts(ac_block(made) + working(*statements)) == ["agrees"] * 5, (statements, z)


@few
@given(circuits(), st.data(), OFF)
def test_a_phasor_off_by_more_than_a_unit_in_one_figure_differs(made, data, off):
    quantity, letter, z = data.draw(quantities(made, one_frequency(made)))
    unit, figures = UNIT[letter], data.draw(FIGURES)
    first, second = polar(z, figures, data.draw(PLACES)), rectangular(z, figures)
    wrong = [p.off(*by) for p in (first, second) for by in ((off, 0), (0, off), (off, -off))]
    claims = [f"{quantity} = {p.text(unit)}" for p in wrong]
    claims.append(f"|{quantity}| = {spelt(wrong[0].first, unit)}")
    claims.append(f"arg {quantity} = {wrong[1].second:f}°")
    assert judged_alone(made, *claims) == [["differs"]] * len(claims), (claims, z)


@few
@given(circuits(), st.data())
def test_a_turned_or_mirrored_phasor_differs(made, data):
    """Wrong sign, conjugate, a quarter turn off, degrees printed as radians."""
    quantity, letter, z = data.draw(quantities(made, one_frequency(made), oblique))
    unit = UNIT[letter]
    claims = [f"{quantity} = {form.text(unit)}" for w in (-z, z.conjugate(), z * 1j)
              for form in (polar(w, 4, 1), rectangular(w, 4))]  # fmt: skip
    right = polar(z, 4, 1)
    if abs(cmath.rect(1, float(right.second)) - z / abs(z)) > 0.2:  # else right by chance, whole turns apart
        claims.append(f"{quantity} = {spelt(right.first, unit)} ∠ {right.second:f} rad")
    assert judged_alone(made, *claims) == [["differs"]] * len(claims)


@few
@given(circuits(), st.data())
def test_a_real_value_for_a_phasor_is_unchecked(made, data):
    quantity, letter, z = data.draw(quantities(made, one_frequency(made), oblique))
    claims = [f"{quantity} = {spelt(to_figures(Fraction(x), 3), UNIT[letter])}" for x in (abs(z), z.real) if x]
    assert judged_alone(made, *claims) == [["unchecked"]] * len(claims)


@few
@given(circuits("RVILCZ"), st.data(), st.integers(-3, 3))
def test_conjugating_everything_changes_no_verdict(made, data, off):
    """Sources, impedances and the printed value conjugated; capacitors and inductors have no conjugate to write."""
    made = replace(made, elements=tuple(e for e in made.elements if e.kind not in ("capacitor", "inductor")))
    try:
        solve(made, one_frequency(made))
    except Unsolvable:
        reject()
    mirrored = tuple(e if e.phasor is None else replace(e, phasor=e.phasor.conjugate()) for e in made.elements)
    quantity, letter, z = data.draw(quantities(made, one_frequency(made)))
    figures, places = data.draw(FIGURES), data.draw(PLACES)
    forms = [lambda w: polar(w, figures, places).off(off, 0), lambda w: rectangular(w, figures).off(off, 0)]
    one, other = (
        judged_alone(c, *(f"{quantity} = {form(w).text(UNIT[letter])}" for form in forms))
        for c, w in ((made, z), (replace(made, elements=mirrored), z.conjugate()))
    )
    assert one == other
    assert off or one == [["agrees"]] * 2


# --- laws of parts --------------------------------------------------------------------------------------------------

LAWS = {
    "resistor": "{name}", "impedance": "{name}", "inductor": "j × 2 π × f × {name}", "capacitor": "1/(j × 2 π × f × {name})",
}  # fmt: skip


@few
@given(circuits("RVILCZ"), st.data())
def test_the_law_of_a_part_agrees_as_a_formula_and_its_slips_differ(made, data):
    hertz = one_frequency(made)
    at = total(solve(made, hertz))
    possible = [
        e for e in made.elements if e.kind in LAWS and abs(at.currents[e.name]) > 1e-6 * solve(made, hertz).amperes
    ]
    assume(possible)
    e = data.draw(st.sampled_from(possible))
    law = LAWS[e.kind].format(name=e.name)
    formulas = [f"({law}) × I_{e.name}", f"1.0001 × ({law}) × I_{e.name}", f"−({law}) × I_{e.name}",
                f"abs({law}) × I_{e.name}"]  # fmt: skip
    z = complex(at.potentials[e.plus] - at.potentials[e.minus])
    value = polar(z, 4, 2).text("V")
    sheet = ac_block(made) + working(f"given f = {hertz} Hz", *(f"V_{e.name} = {x} = {value}" for x in formulas))
    same = "agrees" if e.kind == "resistor" else "differs"
    assert verdicts(sheet) == ["given", "agrees", "differs", "differs", same]


@few
@given(circuits("RVILCZ"), st.data(), FIGURES)
def test_a_substitution_of_rightly_rounded_phasors_agrees_and_a_wrong_one_differs(made, data, figures):
    at = total(solve(made, one_frequency(made)))
    ohmic = [e for e in made.elements if e.kind in ("resistor", "impedance") and abs(at.currents[e.name]) > 1e-9]
    assume(ohmic)
    e = data.draw(st.sampled_from(ohmic))
    i = polar(at.currents[e.name], figures, 2)
    u = polar(complex(at.potentials[e.plus] - at.potentials[e.minus]), 3, 1)

    def chain(current):
        return f"V_{e.name} = {e.name} × I_{e.name} = {e.name} × ({current.text('A')}) = {u.text('V')}"

    right, wrong, turned = chain(i), chain(i.off(9, 0)), chain(i.off(0, 900))
    assert judged_alone(made, right, wrong, turned) == [["agrees"], ["differs"], ["differs"]]


# --- powers, peak and rms -------------------------------------------------------------------------------------------


def powers(made):
    """The average power of each part and the scale, by V·I* of every frequency."""
    found = dict.fromkeys((e.name for e in made.elements), 0.0)
    largest = 0.0
    for hertz in frequencies(made):
        solution = solve(made, hertz)
        at = total(solution)
        for e in made.elements:
            s = complex(at.potentials[e.plus] - at.potentials[e.minus]) * complex(at.currents[e.name]).conjugate()
            found[e.name] += s.real
        largest = max(largest, float(solution.watts))
    return found, largest


@few
@given(of_several_frequencies(), st.data(), OFF)
def test_average_powers_are_sums_over_the_frequencies_and_add_up_to_zero(made, data, off):
    found, largest = powers(made)
    name = data.draw(st.sampled_from([n for n in found if abs(found[n]) > 1e-6 * largest] or reject()))
    right = to_figures(Fraction(found[name]), data.draw(FIGURES))
    claims = [f"P_{name} = {spelt(d, 'W')}" for d in (right, right + off * step(right), -right)]
    assert judged_alone(made, *claims) == [["agrees"], ["differs"], ["differs"]]
    zero = " + ".join(f"P_{e}" for e in found)
    assert verdicts(ac_block(made) + f"`{zero} = 0 W`\n") == ["agrees"]


@few
@given(circuits("RVILCZ"), st.data(), OFF)
def test_complex_power_is_voltage_times_conjugate_current(made, data, off):
    hertz = one_frequency(made)
    solution = solve(made, hertz)
    at = total(solution)
    taken = {e.name: complex(at.potentials[e.plus] - at.potentials[e.minus]) * complex(at.currents[e.name]).conjugate()
             for e in made.elements}  # fmt: skip
    possible = [(name, s) for name, s in taken.items() if oblique(s) and abs(s) > 1e-4 * solution.watts]
    assume(possible)
    name, s = data.draw(st.sampled_from(possible))
    figures = data.draw(FIGURES)
    q = to_figures(Fraction(s.imag), figures)
    claims = [f"S_{name} = {polar(s, figures, 1).text('VA')}", f"S_{name} = {rectangular(s, figures).text('VA')}",
              f"Q_{name} = {spelt(q, 'var')}", f"|S_{name}| = {spelt(to_figures(Fraction(abs(s)), figures), 'VA')}"]  # fmt: skip
    wrong = [f"S_{name} = {polar(s.conjugate(), figures, 1).text('VA')}", f"Q_{name} = {spelt(-q, 'var')}",
             f"Q_{name} = {spelt(q + off * step(q), 'var')}"]  # fmt: skip
    assert judged_alone(made, *claims, *wrong) == [["agrees"]] * 4 + [["differs"]] * 3


@few
@given(circuits(), st.data())
def test_peak_phasors_halve_powers_and_leave_phasors_alone(made, data):
    quantity, letter, z = data.draw(quantities(made, one_frequency(made)))
    found, largest = powers(made)
    name = max(found, key=lambda n: abs(found[n]))
    assume(abs(found[name]) > 1e-6 * largest)
    claims = [
        f"{quantity} = {polar(z, 4, 1).text(UNIT[letter])}",
        f"rms {quantity} = {spelt(to_figures(Fraction(abs(z) / math.sqrt(2)), 4), UNIT[letter])}",
        f"P_{name} = {spelt(to_figures(Fraction(found[name] / 2), 4), 'W')}",
    ]
    sheet = ac_block(made) + working(*claims)
    assert verdicts(PEAK + sheet) == ["agrees"] * 3
    assert verdicts(sheet) == ["agrees", "differs", "differs"]


# --- several frequencies --------------------------------------------------------------------------------------------


def told(hertz):
    return "at dc" if hertz == 0 else f"at {hertz} Hz"


def printed(z, hertz, unit):
    return spelt(to_figures(Fraction(z.real), 4), unit) if hertz == 0 else polar(z, 4, 1).text(unit)


@few
@given(of_several_frequencies(), st.data())
def test_each_frequency_is_judged_by_itself_and_by_its_sources(made, data):
    acting = frequencies(made)
    hertz = data.draw(st.sampled_from(acting))
    quantity, letter, z = data.draw(quantities(made, hertz))
    value = printed(z, hertz, UNIT[letter])
    named = " and ".join(e.name for e in made.sources() if (e.frequency or 0) == hertz)
    claims = [f"{quantity} {told(hertz)} = {value}", f"{quantity} due to {named} = {value}", f"{quantity} = {value}"]
    assert judged_alone(made, *claims) == [["agrees"], ["agrees"], ["unchecked"]]
    parts = [f"{quantity} due to {e.name} {told(hertz)}" for e in made.sources()]
    assert verdicts(ac_block(made) + f"`{quantity} {told(hertz)} = {' + '.join(parts)}`\n") == ["agrees"]


@few
@given(of_several_frequencies(), st.data(), OFF)
def test_rms_is_the_root_of_the_sum_of_squares_and_phasors_of_two_frequencies_are_not_added(made, data, off):
    acting = frequencies(made)
    quantity, letter, _ = data.draw(quantities(made, acting[-1]))
    parts = [_at(made, quantity, hertz) for hertz in acting]
    rms = to_figures(Fraction(math.sqrt(sum(abs(z) ** 2 for z in parts))), data.draw(FIGURES))
    unit = UNIT[letter]
    claims = [f"rms {quantity} = {spelt(d, unit)}" for d in (rms, rms + off * step(rms))]
    assert judged_alone(made, *claims) == [["agrees"], ["differs"]]
    squares = " + ".join(f"|{quantity} {told(hertz)}|^2" for hertz in acting)
    assert judged_alone(made, f"rms {quantity} = √({squares})") == [["agrees"]]
    added = " + ".join(f"{quantity} {told(hertz)}" for hertz in acting[-2:])
    assert judged_alone(made, f"{quantity} = {added} = {spelt(rms, unit)}") == [["unchecked"]]


def _at(made, quantity, hertz):
    """A quantity as ``quantities`` writes it, read from the solution of one frequency."""
    at = total(solve(made, hertz))
    if quantity.startswith("I_"):
        return complex(at.currents[quantity[2:]])
    a, b = quantity[3:-1].split(",")
    return complex(at.potentials[a] - at.potentials[b])


# --- zeros ----------------------------------------------------------------------------------------------------------

NEARLY_REAL = "```circuit\nV1: (10 + j0.002) V, a to gnd\nR1: 2 Ω, a to gnd\n```\n"  # 10.0000002 V ∠ 0.011459°


@pytest.mark.parametrize(
    ("claim", "verdict"),
    [
        ("V_a = 10.0 V ∠ 0.0°", "agrees"),
        ("V_a = 10.0 V ∠ 0.00°", "differs"),
        ("V_a = 10.0 V ∠ 0°", "agrees"),
        ("V_a = 10.0 V ∠ 1°", "differs"),
        ("V_a = (10.0 + j0.0) V", "agrees"),
        ("V_a = (10 + j0) V", "agrees"),
        ("V_a = (10.000 + j0.000) V", "differs"),
        ("arg V_a = 0°", "agrees"),
        ("im V_a = 0 V", "differs"),
        ("V_a = R1 × I_R1 = 2 Ω × (5.00 A ∠ 0.0°) = 10.0 V ∠ 0.0°", "agrees"),
        ("V_a = R1 × I_R1 = 2 Ω × (5.00 A ∠ 0.1°) = 10.0 V ∠ 0.0°", "differs"),
        ("V_a = R1 × I_R1 = 2 Ω × (5.000 + j0.000) A = 10.0 V ∠ 0.0°", "differs"),
        ("V_a = R1 × I_R1 = 2 Ω × (5.000 + j0.001) A = 10.0 V ∠ 0.0°", "agrees"),
    ],
)
def test_a_zero_beside_another_figure_is_judged_by_its_place(claim, verdict):
    assert verdicts(NEARLY_REAL + f"`{claim}`\n") == [verdict]


# --- impedances -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("gone", ["without V1", "with V1 open", "with V1 shorted without R2"])
def test_an_impedance_keeps_the_frequency_of_a_source_that_is_taken_out(gone):
    """R and L in series: Z = R + jωL, by the law of both parts."""
    sheet = "```circuit\nV1: 9 V, a to gnd, 50 Hz\nR1: 3 Ω, a to b\nL1: 10 mH, b to c\nR2: 1 Ω, c to gnd\n```\n"
    z = complex(3, 2 * math.pi * 50 * 0.010)
    assert verdicts(sheet + f"`Z_{{a,c}} {gone} = {rectangular(z, 4).text('Ω')}`\n") == ["agrees"]
    assert verdicts(sheet + f"`Z_{{a,c}} {gone} = {rectangular(z.real + 0j, 4).text('Ω')}`\n") == ["differs"]


def test_an_impedance_of_no_frequency_is_unchecked_until_one_is_said():
    sheet = "```circuit\nV1: 9 V, a to gnd\nR1: 3 Ω, a to b\nL1: 10 mH, b to gnd\n```\n"
    value = rectangular(complex(3, 2 * math.pi * 50 * 0.010), 4).text("Ω")
    claims = (f"`Z_{{a,gnd}} without V1{said} = {value}`\n" for said in ("", " at 50 Hz"))
    assert [verdicts(sheet + claim) for claim in claims] == [["unchecked"], ["agrees"]]
