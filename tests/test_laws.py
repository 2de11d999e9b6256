"""Laws of judging over random circuits written out as sheets: a right number is never called wrong, a wrong one always.

The truth comes from the solver (held against published examples and general-purpose libraries by its own tests); the printed
figures are rounded, cut and changed here by decimal arithmetic of the tests' own.
"""

from __future__ import annotations

from dataclasses import replace
from decimal import Decimal
from fractions import Fraction

import pytest
from circuits import circuits as circuits_with_loops
from hypothesis import assume, given, reject, settings
from hypothesis import strategies as st
from written import PREFIXES, UNIT, block, exactly, spelt, step, to_figures, working

from calccheck import check_text
from calccheck.solve import solve, total

few = settings(max_examples=40, deadline=None)
FIGURES = st.integers(2, 6)
FORMS = st.sampled_from(["plain", "exponent", "power"])
PASSIVE = "RVISOCL0"


@st.composite
def circuits(draw, kinds="RVIEFSOCL0"):
    """A random circuit without parts whose ends lie at one node, which a circuit block refuses."""
    made = draw(circuits_with_loops(kinds, most_nodes=6, most_extra=6))
    kept = tuple(e for e in made.elements if e.plus != e.minus)
    lost = {e.name for e in made.elements} - {e.name for e in kept}
    if any(e.control is not None and e.control.part in lost for e in kept) or not any(e.is_source for e in kept):
        reject()
    return replace(made, elements=kept)


@st.composite
def quantities(draw, made):
    """A quantity of a circuit as written, its letter, and its exact value."""
    solution = solve(made)
    sources = [e.name for e in made.sources()]
    due = draw(st.one_of(st.none(), st.lists(st.sampled_from(sources), min_size=1, max_size=2, unique=True)))
    at = total(solution) if due is None else _sum([solution.parts[name] for name in due])
    letter = draw(st.sampled_from("VVIP" if due is None else "VI"))
    if letter == "V":
        a, b = draw(st.tuples(st.sampled_from(made.nodes()), st.sampled_from(made.nodes())))
        whole = draw(st.booleans())
        text = f"V_{a}" if whole else f"V_{{{a},{b}}}"
        value = at[0][a] - (0 if whole else at[0][b]) if due else at.potentials[a] - (0 if whole else at.potentials[b])
    else:
        e = draw(st.sampled_from(made.elements))
        potentials, currents = at if due else (at.potentials, at.currents)
        current, voltage = currents[e.name], potentials[e.plus] - potentials[e.minus]
        text, value = (f"I_{e.name}", current) if letter == "I" else (f"P_{e.name}", current * voltage)
    if due is not None:
        text += " due to " + " and ".join(due)
    return text, letter, Fraction(value)


def _sum(states):
    return tuple({name: sum(getattr(s, kind)[name] for s in states) for name in getattr(states[0], kind)}
                 for kind in ("potentials", "currents"))  # fmt: skip


def claimed(sheet: str) -> list[str]:
    """The verdicts of a sheet's claims."""
    return [j.verdict for j in check_text("sheet.md", sheet).claims]


# --- values ---------------------------------------------------------------------------------------------------------


@few
@given(circuits(), st.data())
def test_a_right_value_agrees_however_it_is_printed(made, data):
    quantity, letter, truth = data.draw(quantities(made))
    assume(truth != 0)
    statements = []
    for half_up in (True, False):
        digits = to_figures(truth, data.draw(FIGURES), half_up)
        prefix, form = data.draw(st.sampled_from(sorted(PREFIXES))), data.draw(FORMS)
        statements.append(f"{quantity} = {spelt(digits, UNIT[letter], prefix, form)}")
    assert claimed(block(made) + working(*statements)) == ["agrees", "agrees"], (statements, float(truth))


@few
@given(circuits(), st.data())
def test_a_value_off_by_more_than_a_unit_of_its_last_place_differs(made, data):
    """With no working beside it and nothing printed before it: each claim stands on a sheet of its own."""
    quantity, letter, truth = data.draw(quantities(made))
    assume(truth != 0)
    right = to_figures(truth, data.draw(FIGURES))
    wrong = right + step(right) * data.draw(st.one_of(st.integers(2, 9), st.integers(-9, -2)))
    assume(wrong != 0)
    value = spelt(wrong, UNIT[letter], data.draw(st.sampled_from(sorted(PREFIXES))), data.draw(FORMS))
    assert claimed(block(made) + f"`{quantity} = {value}`\n") == ["differs"], (value, float(truth))


@few
@given(circuits(), st.data())
def test_a_wrong_sign_and_a_wrong_prefix_differ(made, data):
    quantity, letter, truth = data.draw(quantities(made))
    assume(truth != 0)
    right = to_figures(truth, data.draw(FIGURES))
    for wrong in (-right, right.scaleb(3), right.scaleb(-3)):
        assert claimed(block(made) + f"`{quantity} = {spelt(wrong, UNIT[letter])}`\n") == ["differs"]


@few
@given(circuits(), st.data())
def test_zero_is_zero(made, data):
    quantity, letter, truth = data.draw(quantities(made))
    same = [e for e in made.nodes() if e == made.reference]
    verdicts = claimed(
        block(made) + f"`V_{same[0]} = 0 V`, `V_{{{same[0]},{same[0]}}} = 0.00 V` and `{quantity} = 0 {UNIT[letter]}`\n"
    )
    scale = max(abs(v) for v in total(solve(made)).potentials.values())
    assert verdicts[:2] == ["agrees", "agrees"]
    if truth == 0:
        assert verdicts[2] == "agrees"
    elif letter == "V" and "due" not in quantity and abs(truth) > scale / 1000:
        assert verdicts[2] == "differs"


@few
@given(circuits(), st.data(), st.integers(-9, 9))
def test_one_claim_has_one_verdict_in_code_in_a_table_and_in_a_working_fence(made, data, off):
    quantity, letter, truth = data.draw(quantities(made))
    assume(truth != 0)
    right = to_figures(truth, data.draw(FIGURES))
    value = spelt(right + step(right) * off, UNIT[letter])
    subject, _, due = quantity.partition(" due to ")
    cell = f"| | {'due to ' + due if due else 'total'} |\n|---|---|\n| `{subject}` | {value} |\n"
    column = f"| | `{subject}` |\n|---|---|\n| {'due to ' + due if due else 'total'} | {value} |\n"
    places = (
        f"`{quantity} = {value}`\n",
        cell,
        column,
        working(f"{quantity} = {value}"),
        f"- > `{quantity} = {value}`\n",
    )
    verdicts = [claimed(block(made) + place) for place in places]
    assert verdicts == [verdicts[0]] * len(places)
    assert len(verdicts[0]) == 1


# --- what changes nothing --------------------------------------------------------------------------------------------


@few
@given(circuits(), st.data(), st.integers(-3, 3))
def test_the_order_of_lines_names_of_nodes_and_the_place_in_the_sheet_change_nothing(made, data, off):
    quantity, letter, truth = data.draw(quantities(made))
    assume(truth != 0 and letter != "V")  # whose quantity does not name nodes
    right = to_figures(truth, data.draw(FIGURES))
    claim = f"`{quantity} = {spelt(right + step(right) * off, UNIT[letter])}`\n\n"
    fresh = data.draw(st.permutations([f"n{k}" for k in range(len(made.nodes()))]))
    names = dict(zip(made.nodes(), fresh, strict=True))
    order = data.draw(st.permutations(range(len(made.elements))))
    sheets = [
        block(made) + claim,
        claim + block(made),
        block(made, names) + claim,
        block(made, order=order) + claim,
        (block(made, names, order) + claim).replace("\n", "\r\n"),
        "---\nsheet: X-1\n---\n\n# Title\n\n" + block(made) + "Some words and `code`.\n\n1. one\n2. two\n   - " + claim,
    ]
    found = [check_text("sheet.md", s).claims for s in sheets]
    assert [len(f) for f in found] == [1] * len(sheets)
    assert len({f[0].verdict for f in found}) == 1
    assert len({f[0].computed.value for f in found}) == 1


# --- chains ---------------------------------------------------------------------------------------------------------


def chains(made, figures):
    """Chains by the laws of resistors, ``(quantity, formula, numbers and units, how they are put together, truth)``."""
    at = total(solve(made))
    for e in made.elements:
        if e.kind != "resistor" or not e.value:
            continue
        v, i = at.potentials[e.plus] - at.potentials[e.minus], at.currents[e.name]
        if v == 0:
            continue
        ends = (at.potentials[e.plus], at.potentials[e.minus])
        r = f"{exactly(e.value)} Ω"
        yield f"V_{e.name}", f"{e.name} × I_{e.name}", [(i, "A")], lambda x, r=r: f"{r} × {x[0]}", v
        yield f"P_{e.name}", f"I_{e.name}² × {e.name}", [(i, "A")], lambda x, r=r: f"({x[0]})² × {r}", v * i
        yield f"P_{e.name}", f"V_{e.name} × I_{e.name}", [(v, "V"), (i, "A")], lambda x: f"{x[0]} × {x[1]}", v * i
        if all(ends):
            formula = f"(V_{e.plus} − V_{e.minus})/{e.name}"
            yield f"I_{e.name}", formula, [(u, "V") for u in ends], lambda x, r=r: f"({x[0]} − ({x[1]}))/{r}", i


@few
@given(circuits(PASSIVE), st.data(), st.integers(3, 6))
def test_a_chain_of_rightly_rounded_numbers_agrees_and_one_wrong_number_in_it_differs(made, data, figures):
    possible = list(chains(made, figures))
    assume(possible)
    quantity, formula, numbers, put, truth = data.draw(st.sampled_from(possible))
    rounded = [to_figures(x, figures) for x, _ in numbers]
    units = [u for _, u in numbers]
    unit = UNIT[quantity[0]]
    value = spelt(to_figures(truth, figures), unit)

    def chain(digits):
        shown = [spelt(d, u) for d, u in zip(digits, units, strict=True)]
        return block(made) + working(f"{quantity} = {formula}", f"  = {put(shown)}", f"  = {value}")

    report = check_text("sheet.md", chain(rounded))
    assert [(j.verdict, j.message) for j in report.claims] == [("agrees", "")]
    assert not report.claims[0].cautions or "coarse" in report.claims[0].cautions[0]
    k = data.draw(st.integers(0, len(rounded) - 1))
    room = max(sum(step(d) for d in rounded), abs(rounded[k]) * sum(step(d) / abs(d) for d in rounded))
    off = (2 * room * data.draw(st.sampled_from([2, 5, -2, -5]))).quantize(step(rounded[k]))
    wrong = [d + (off if j == k else 0) for j, d in enumerate(rounded)]
    assume(all(wrong) and abs(abs(wrong[k]) - abs(rounded[k])) > 3 * step(rounded[k]))  # a square has no sign
    judged = check_text("sheet.md", chain(wrong)).claims[0]
    assert judged.verdict == "differs"
    assert [s.verdict for s in judged.steps] == ["agrees", "differs", "agrees"], (
        "the first = that fails is the substitution"
    )


@few
@given(circuits(PASSIVE), st.data(), st.integers(3, 6), st.integers(2, 9))
def test_a_wrong_result_behind_a_right_working_differs(made, data, figures, off):
    possible = list(chains(made, figures))
    assume(possible)
    quantity, formula, numbers, put, truth = data.draw(st.sampled_from(possible))
    shown = [spelt(to_figures(x, 9), u) for x, u in numbers]  # so exact that no carried rounding explains the result
    right = to_figures(truth, figures)
    value = spelt(right + off * step(right), UNIT[quantity[0]])
    judged = check_text("sheet.md", block(made) + working(f"{quantity} = {formula} = {put(shown)} = {value}")).claims[0]
    assert [s.verdict for s in judged.steps] == ["agrees", "agrees", "differs"]


@few
@given(circuits(PASSIVE), st.data(), st.integers(3, 6))
def test_a_formula_that_is_not_the_quantity_differs_at_once(made, data, figures):
    possible = list(chains(made, figures))
    assume(possible)
    quantity, formula, _, _, truth = data.draw(st.sampled_from(possible))
    value = spelt(to_figures(truth, figures), UNIT[quantity[0]])
    for wrong in (f"2 × {formula}", f"−({formula})", f"1.0001 × {formula}"):
        judged = check_text("sheet.md", block(made) + f"`{quantity} = {wrong} = {value}`\n").claims[0]
        assert [s.verdict for s in judged.steps] == ["differs", "agrees"]
    assert claimed(block(made) + f"`{quantity} = 1 × {formula} = {value}`\n") == ["agrees"]


# --- bounds ---------------------------------------------------------------------------------------------------------


@few
@given(circuits(), st.data())
def test_a_bound_holds_to_the_exact_limit(made, data):
    quantity, letter, truth = data.draw(quantities(made))
    limit = to_figures(truth, 4) if truth else Decimal(0)
    above, below = (spelt(limit + k * step(limit), UNIT[letter]) for k in (1, -1))
    assume(truth and abs(limit) > 20 * step(limit))
    verdicts = claimed(
        block(made)
        + working(
            f"{quantity} ≤ {above}", f"{quantity} ≤ {below}", f"{quantity} ≥ {below}", f"{quantity} ≥ {above}",
            f"{below} ≤ {quantity} ≤ {above}", f"{above} < {quantity} < {above}",
        )
    )  # fmt: skip
    assert verdicts == ["agrees", "differs", "agrees", "differs", "agrees", "differs"]


@few
@given(circuits(), st.data())
def test_a_limit_on_the_other_side_of_zero_says_nothing(made, data):
    quantity, letter, truth = data.draw(quantities(made))
    assume(truth)
    unit, sign = UNIT[letter], "−" if truth > 0 else ""
    relation = "≥" if truth > 0 else "≤"
    size = spelt(to_figures(abs(truth) * 2, 3), unit)
    verdicts = claimed(
        block(made)
        + f"`{quantity} {relation} {sign}{size}` `|{quantity}| ≤ {size}` `{'' if truth > 0 else '−'}{quantity} ≤ {size}`\n"
    )
    assert verdicts == ["unchecked", "agrees", "agrees"]


# --- working without a circuit ----------------------------------------------------------------------------------------


@few
@given(
    st.lists(st.tuples(st.integers(1, 9999), st.integers(-2, 2)), min_size=3, max_size=3),
    st.sampled_from(["a × b − c", "a/b + c", "(a + b)/c", "a²/(b c)", "a ∥ b + c", "−a/(b + c)", "a b + b c"]),
    FIGURES, st.integers(2, 9), FORMS,
)  # fmt: skip
def test_arithmetic_of_givens(values, formula, figures, off, form):
    a, b, c = (Fraction(n) * Fraction(10) ** e for n, e in values)
    by_hand = {"a × b − c": a * b - c, "a/b + c": a / b + c, "(a + b)/c": (a + b) / c, "a²/(b c)": a * a / (b * c),
               "a ∥ b + c": a * b / (a + b) + c, "−a/(b + c)": -a / (b + c), "a b + b c": a * b + b * c}  # fmt: skip
    truth = by_hand[formula]
    assume(truth != 0)
    right = to_figures(truth, figures)
    wrong = right + off * step(right)
    givens = [f"given {name} = {exactly(x)}" for name, x in zip("abc", (a, b, c), strict=True)]
    chains = [f"{name} = {formula} = {spelt(d, '', '', form).strip()}" for name, d in (("x", right), ("y", wrong))]
    assert claimed(working(*givens, *chains)) == ["given"] * 3 + ["agrees", "differs"]


# --- carried rounding ------------------------------------------------------------------------------------------------

CARRY = Fraction(5, 1000)  # the setting's default


@few
@given(circuits(PASSIVE), st.data(), st.integers(3, 5))
def test_what_follows_from_printed_values_by_a_part_s_own_law_passes(made, data, figures):
    """V = R·I, I = V/R, P = V·I, V²/R, I²·R with values printed above, within the carry of the truth."""
    at = total(solve(made))
    parts = [e for e in made.elements if e.kind == "resistor" and e.value and at.currents[e.name]]
    assume(parts)
    e = data.draw(st.sampled_from(parts))
    v, i = Fraction(at.potentials[e.plus] - at.potentials[e.minus]), Fraction(at.currents[e.name])
    shown_v, shown_i = to_figures(v, figures), to_figures(i, figures)
    pv, pi = Fraction(shown_v), Fraction(shown_i)
    letter, follows, truth = data.draw(
        st.sampled_from([("I", pv / e.value, i), ("P", pv * pv / e.value, v * i)])
        | st.sampled_from([("V", pi * e.value, v), ("P", pi * pi * e.value, v * i), ("P", pv * pi, v * i)])
    )
    above = [f"V_{e.name} = {spelt(shown_v, 'V')}"] if letter != "V" else []
    above += [f"I_{e.name} = {spelt(shown_i, 'A')}"] if letter != "I" else []
    claim = f"{letter}_{e.name} = {spelt(to_figures(follows, figures), UNIT[letter])}"
    verdicts = claimed(block(made) + working(*above, claim))
    assert verdicts[:-1] == ["agrees"] * len(above)
    if abs(Fraction(to_figures(follows, figures)) - truth) <= CARRY * abs(truth):
        assert verdicts[-1] in ("agrees", "rounded")


@few
@given(circuits("RVVVIII"), st.data(), st.integers(3, 5))
def test_a_total_that_is_the_sum_of_its_printed_parts_passes(made, data, figures):
    solution = solve(made)
    node = data.draw(st.sampled_from([n for n in made.nodes() if n != made.reference]))
    parts = {name: Fraction(at.potentials[node]) for name, at in solution.parts.items()}
    truth = sum(parts.values())
    assume(truth)
    shown = {name: to_figures(x, figures) for name, x in parts.items() if x}
    place = max(step(d) for d in shown.values())
    whole = sum(shown.values()).quantize(place)
    header = " | ".join(f"due to {name}" for name in parts)
    cells = " | ".join(spelt(shown[name], "V") if name in shown else "0 V" for name in parts)
    row = f"| | {header} | total |\n|---|{'---|' * len(parts)}---|\n| `V_{node}` | {cells} | {spelt(whole, 'V')} |\n"
    *each, verdict = claimed(block(made) + row)
    assert each == ["agrees"] * len(parts)
    off = abs(Fraction(whole) - truth)
    if len(parts) <= 6 and whole and off <= CARRY * abs(truth):
        assert verdict in ("agrees", "rounded")
    elif off > max(place, CARRY * abs(truth)):
        assert verdict == "differs"


@pytest.mark.parametrize(("small", "verdict"), [("0.0 V", "agrees"), ("0.2 V", "differs"), ("0 V", "differs")])
def test_a_piece_that_rounds_to_zero_stands_for_it(small, verdict):
    """5.24 V and 0.04 V to one place."""
    sheet = "```circuit\nV1: 5.24 V, a to gnd\nV2: 0.04 V, b to a\nR1: 1 Ω, b to gnd\n```\n"
    assert claimed(sheet + f"`V_b = V_a + V_{{b,a}} = 5.2 V + {small} = 5.3 V`\n") == [verdict]


# --- superposition as it is worked by hand ---------------------------------------------------------------------------

OHMS = st.builds(lambda n, e: Fraction(n, 10) * Fraction(10) ** e, st.integers(10, 99), st.integers(0, 4))
VOLTS = st.builds(Fraction, st.integers(10, 400), st.just(10))


@few
@given(st.lists(st.tuples(VOLTS, OHMS), min_size=2, max_size=3), OHMS, st.integers(3, 5), st.booleans(), st.data())
def test_each_source_alone_over_the_others_side_by_side(feeds, load, figures, named, data):
    """``V_n due to V1 = V1 × (R2 ∥ RL)/(R1 + R2 ∥ RL)`` with the parallel part rounded, then the sum."""
    lines = [f"V{k}: {exactly(v)} V, a{k} to com\nR{k}: {exactly(r)} Ω, a{k} to n" for k, (v, r) in enumerate(feeds)]
    sheet = "\n".join(["```circuit", "reference com", *lines, f"RL: {exactly(load)} Ω, n to com", "```", "", ""])
    statements, shown, verdicts = [], [], []
    wrong = data.draw(st.integers(0, len(feeds) - 1))
    for k, (v, r) in enumerate(feeds):
        others = [(f"R{j}", x) for j, (_, x) in enumerate(feeds) if j != k] + [("RL", load)]
        beside = 1 / sum(1 / x for _, x in others)
        part = to_figures(beside, figures)
        formula, name = " ∥ ".join(n for n, _ in others), f"Rp{k}"
        if named:
            statements.append(f"{name} = {formula} = {spelt(part, 'Ω')}")
            verdicts.append("agrees")
        truth = v * beside / (r + beside)
        shown.append(to_figures(truth, figures))
        used = part + 9 * step(part) if k == wrong and part.adjusted() - figures + 1 == step(part).adjusted() else part
        symbols = f"V{k} × {name}/(R{k} + {name})" if named else f"V{k} × ({formula})/(R{k} + {formula})"
        p = spelt(used, "Ω")
        statements.append(
            f"V_n due to V{k} = {symbols} = {exactly(v)} V × {p}/({exactly(r)} Ω + {p}) = {spelt(shown[-1], 'V')}"
        )
        off = abs(v * Fraction(used) / (r + Fraction(used)) - truth)
        room = abs(v * r / (r + beside) ** 2) * Fraction(step(part))
        verdicts.append("differs" if off > 2 * room else "agrees" if used == part else "?")
    found = claimed(sheet + working(*statements))
    assert all(a == b or b == "?" for a, b in zip(found, verdicts, strict=True)), (found, verdicts, statements)
