"""The right formula behind one that fails: held against sympy's own solution of the circuit's equations, and read back as a claim.

The witness writes Kirchhoff's laws and each part's law as equations and has ``sympy.linsolve`` solve them; the closed form is
compared as the text that the user sees.
"""

from __future__ import annotations

import re
import subprocess
import sys
import time

import pytest
import sympy
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from calccheck import check_text
from calccheck.solve.symbolic import MOST_WORK, Algebra, TooMuch
from calccheck.units import OHM

J_OMEGA = sympy.Symbol("s")


# --- the witness ----------------------------------------------------------------------------------------------------


def solved(parts, reference="com"):
    """Potentials by node and currents by part, by sympy, of parts (kind, name, plus, minus, value, control nodes)."""
    nodes = sorted({n for _, _, a, b, _, by in parts for n in (a, b, *by)} - {reference})
    volt = {n: sympy.Symbol(f"v_{n}") for n in nodes} | {reference: sympy.Integer(0)}
    ampere = {name: sympy.Symbol(f"i_{name}") for _, name, *_ in parts}
    laws = []
    for kind, name, a, b, value, by in parts:
        across, i = volt[a] - volt[b], ampere[name]
        steer = volt[by[0]] - volt[by[1]] if by else 0
        laws.append({"R": across - value * i, "L": across - J_OMEGA * value * i, "C": i - J_OMEGA * value * across,
                     "V": across - value, "I": i - value, "G": i - value * steer, "E": across - value * steer, "U": steer}[kind])  # fmt: skip
    sums = [sum(ampere[p[1]] * ((p[2] == n) - (p[3] == n)) for p in parts) for n in nodes]
    unknowns = [*(volt[n] for n in nodes), *ampere.values()]
    (found,) = sympy.linsolve([*laws, *sums], unknowns)
    return dict(zip([str(u) for u in unknowns], found, strict=True))


def as_sympy(text):
    """A formula of the sheet language as sympy reads it."""
    plain = text.removesuffix(" V").replace("×", "*").replace("−", "-")
    plain = re.sub("[⁰¹²³⁴⁵⁶⁷⁸⁹]+", lambda m: "**" + m[0].translate(str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹", "0123456789")), plain)
    plain = re.sub(r"\(([^()]*) ∥ ([^()]*)\)", r"((\1)*(\2)/((\1)+(\2)))", plain)
    names = {n: sympy.Symbol(n) for n in re.findall(r"[A-Za-z]\w*", plain)}
    return sympy.sympify(plain, locals={**names, "j": sympy.I, "ω": -sympy.I * J_OMEGA})


def block(parts, hertz=""):
    lines = []
    for kind, name, a, b, value, by in parts:
        if kind == "U":
            lines.append(f"{name}: op-amp, plus {by[0]}, minus {by[1]}, out {a}")
            continue
        text = str(value).replace("**", "^")
        steer = f" * V_{{{by[0]},{by[1]}}}" if by else ""
        unit = (
            ""
            if by and not isinstance(value, sympy.Symbol)
            else {"R": " Ω", "L": " H", "C": " F", "V": " V", "I": " A"}.get(kind, "")
        )
        lines.append(f"{name}: {text}{unit}{steer}, {a} to {b}{hertz if kind in 'VI' else ''}")
    return "\n".join(["```circuit", "reference com", *lines, "```", "", ""])


def closed(sheet, quantity, wrong="Zz × V1"):
    """The closed form that the message of a failing formula ends with, and what it says of ω."""
    j = check_text("s.md", sheet + f"`{quantity} = {wrong}`").claims[-1]
    assert j.verdict == "differs", j.message
    found = re.search(r"; " + re.escape(quantity) + r" is (.*?)( with ω = .*)?$", j.message)
    return (found[1], found[2] or "") if found else ("", "")


def same(a, b):
    return sympy.cancel(sympy.together(a - b)) == 0


SIMPLE = "```circuit\nreference com\nV1: Vin V, a to com\nR1: Ra Ω, a to b\nR2: Rb Ω, b to com\n```\n\n"


# --- hand-made circuits ---------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("lines", "quantity", "wrong", "expected"),
    [
        # the divider rule
        ("V1: Vin V, a to com\nR1: Ra Ω, a to b\nR2: Rb Ω, b to com", "V_b", "Vin × Ra/Rb", "Vin × Rb/(Ra + Rb)"),
        ("V1: Vin V, a to com\nR1: Ra Ω, a to b\nR2: Rb Ω, b to com", "R_{b,com}", "Ra + Rb", "Ra ∥ Rb"),
        ("V1: Vin V, a to com\nR1: Ra Ω, a to b\nR2: Rb Ω, b to com", "Isc_{b,com}", "Vin/Rb", "Vin/Ra"),
        ("V1: Vin V, a to com\nR1: Ra Ω, a to b\nR2: Rb Ω, b to com", "P_R2", "Vin^2/Rb", "Vin² × Rb/(Ra + Rb)²"),
        ("V1: Vin V, a to com\nR1: Ra Ω, a to b\nR2: Rb Ω, b to com", "V_b / V_a", "Ra/(Ra + Rb)", "Rb/(Ra + Rb)"),
        ("V1: Vin V, a to com\nR1: Ra Ω, a to b\nR2: Rb Ω, b to com", "V_b with R2 open", "Vin/2", "Vin"),
        # a summing network: node equation (Va − Vo)/R + (Vb − Vo)/(2R) = Vo/Rl
        ("V1: Va V, a to com\nV2: Vb V, b to com\nR1: R Ω, a to o\nR2: 2*R Ω, b to o\nR3: Rl Ω, o to com", "V_o",
         "Va + Vb", "Rl × (2 × Va + Vb)/(2 × R + 3 × Rl)"),
        ("V1: Va V, a to com\nV2: Vb V, b to com\nR1: R Ω, a to o\nR2: 2*R Ω, b to o\nR3: Rl Ω, o to com", "V_o due to V2",
         "Vb/3", "Vb × Rl/(2 × R + 3 × Rl)"),
        # difference amplifier with equal ratios, and in general (the textbook's formula, tests/evidence/SYM-04.md)
        ("V1: v1 V, a to com\nV2: v2 V, b to com\nR1: R1 Ω, a to n\nR2: R2 Ω, n to o\nR3: R1 Ω, b to p\nR4: R2 Ω, p to com\n"
         "U1: op-amp, plus p, minus n, out o", "V_o", "v2 − v1", "R2 × (v2 − v1)/R1"),
        ("V1: v1 V, a to com\nV2: v2 V, b to com\nR1: R1 Ω, a to n\nR2: R2 Ω, n to o\nR3: R3 Ω, b to p\nR4: R4 Ω, p to com\n"
         "U1: op-amp, plus p, minus n, out o", "V_o", "v2 − v1", "v2 × R4 × (R1 + R2)/(R1 × (R3 + R4)) − v1 × R2/R1"),
        # numbers among the symbols: as values, or by the parts' names where the formula uses these
        ("V1: Vin V, a to com\nR1: 1 kΩ, a to b\nR2: R Ω, b to com", "V_b", "Vin/2", "Vin × R/(R + 1 kΩ)"),
        ("V1: Vin V, a to com\nR1: 1 kΩ, a to b\nR2: R Ω, b to com", "V_b", "Vin × R1/R", "Vin × R/(R + R1)"),
        ("V1: Vin V, a to com\nR1: 1 kΩ, a to b\nR2: 2.2 kΩ, b to com", "V_b", "Vin/2", "0.6875 × Vin"),
        ("V1: Vin V, a to com\nR1: 3 kΩ, a to b\nR2: 6 kΩ, b to com", "V_b", "Vin/2", "2 × Vin/3"),
        ("V1: Vin V, a to com\nR1: Ra Ω, a to b\nD1: diode, b to k, drop 0.65 V\nR2: Rb Ω, k to com", "V_k", "Vin/2",
         "Rb × (Vin − 650 mV)/(Ra + Rb)"),
    ],
)  # fmt: skip
def test_as_an_engineer_writes_it(lines, quantity, wrong, expected):
    sheet = f"```circuit\nreference com\n{lines}\n```\n\n"
    assert closed(sheet, quantity, wrong) == (expected, "")
    (j,) = check_text("s.md", sheet + f"`{quantity} = {expected}`").claims  # and it is a right claim
    assert j.verdict == "agrees", j.message


@pytest.mark.parametrize(
    ("lines", "quantity", "expected"),
    [
        ("R1: R Ω, a to b\nC1: C F, b to com", "V_b", "Vin/(1 + j × ω × R × C)"),
        ("C1: C F, a to b\nR1: R Ω, b to com", "V_b", "Vin × j × ω × C × R/(1 + j × ω × C × R)"),
        ("R1: R Ω, a to b\nL1: L H, b to c\nC1: C F, c to com", "V_c", "Vin/(1 − ω² × L × C + j × ω × R × C)"),
        ("R1: R Ω, a to b\nL1: L H, b to com", "Z_{a,com} without V1", "R + j × ω × L"),
    ],
)
def test_at_one_frequency(lines, quantity, expected):
    sheet = (
        f"```circuit\nreference com\nV1: Vin V, a to com, 400 Hz\n{lines}\n```\n\n`given ω = 2513.2741228718 rad/s`\n\n"
    )
    text, omega = closed(sheet, quantity, "R + R" if quantity[0] == "Z" else "2 × Vin")
    assert (text, omega) == (expected, " with ω = 2π × 400 Hz")
    assert check_text("s.md", sheet + f"`{quantity} = {text}`").claims[-1].verdict == "agrees"


# --- random circuits against sympy ----------------------------------------------------------------------------------


@st.composite
def networks(draw, reactive=False):
    """A tree of parts on two to four nodes with links across it, one or two sources, now and then a controlled one or an op-amp."""
    nodes = ["com", *(f"n{k}" for k in range(1, draw(st.integers(2, 4))))]
    names = iter("abcdefgh")
    kinds = "RLC" if reactive else "R"

    def passive(a, b):
        k, kind = next(names), draw(st.sampled_from(kinds))
        factor = draw(st.sampled_from((1, 1, 2)))
        return kind, f"X{k}", a, b, factor * sympy.Symbol(f"{kind}{k}"), ()

    parts = [passive(n, nodes[draw(st.integers(0, k - 1))]) for k, n in enumerate(nodes) if k]
    parts += [passive(*draw(st.permutations(nodes))[:2]) for _ in range(draw(st.integers(0, 2)))]
    feed = draw(st.sampled_from(nodes[1:]))
    parts += [("V", "V1", "s", "com", sympy.Symbol("Va"), ()), passive("s", feed)]
    if draw(st.booleans()):
        parts.append(("I", "I1", "com", draw(st.sampled_from(nodes[1:])), sympy.Symbol("Ib"), ()))
    extra = draw(st.sampled_from(("", "", "E", "U")))
    if extra == "E":
        parts += [("E", "E1", "x", "com", sympy.Integer(3), (feed, "com")), passive("x", nodes[1])]
    if extra == "U":
        parts += [passive(feed, "m"), passive("m", "o"), ("U", "U1", "o", "com", sympy.Integer(0), ("com", "m"))]
    return parts, draw(st.sampled_from([n for n in {p[2] for p in parts} if n not in ("com", "s")]))


def held_against_sympy(net, hertz=""):
    parts, node = net
    text, _ = closed(block(parts, hertz), f"V_{node}", "3 × Va" if hertz else "3 × Va + Va")
    if text:
        assert same(as_sympy(text), solved(parts)[f"v_{node}"]), text
    return text


FEW = settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.too_slow])


@FEW
@given(networks())
def test_direct_current_against_sympy(net):
    held_against_sympy(net)


@FEW
@given(networks(reactive=True))
def test_alternating_current_against_sympy(net):
    held_against_sympy(net, ", 400 Hz")


def test_of_small_circuits_there_is_always_one():
    """The loop above says nothing where there is no closed form; a bridge and a ladder of two sections have theirs."""
    bridge = [("V", "V1", "a", "com", sympy.Symbol("Va"), ())]
    ends = (("a", "p"), ("a", "q"), ("p", "com"), ("q", "com"), ("p", "q"))
    bridge += [("R", f"R{k}", *e, sympy.Symbol(f"R{k}"), ()) for k, e in enumerate(ends)]
    assert held_against_sympy((bridge, "p"))


# --- bounds ---------------------------------------------------------------------------------------------------------


def ladder(sections):
    lines = ["V1: Vin V, n0 to com"]
    for k in range(sections):
        lines += [f"R{k}: Ra{k} Ω, n{k} to n{k + 1}", f"P{k}: Rb{k} Ω, n{k + 1} to com"]
    return "```circuit\nreference com\n" + "\n".join(lines) + "\n```\n\n"


def test_what_nobody_would_read_is_not_written():
    """The denominator of a ladder of four sections has F(9) = 34 terms (A. M. Morgan-Voyce, IRE Trans. CT-6, 1959)."""
    assert closed(ladder(2), "V_n2", "Vin/2")[0].count("+") == 4  # F(5) = 5 terms
    assert closed(ladder(4), "V_n4", "Vin/2") == ("", "")


@pytest.mark.undisturbed
def test_the_work_is_bounded():
    sheet = ladder(10) + "\n\n".join(f"`V_n{k} = Vin/{k + 1}`" for k in range(1, 11))
    check_text("s.md", sheet)
    start = time.process_time()
    report = check_text("s.md", sheet)
    assert time.process_time() - start < 4.0
    assert report.counts["differs"] == 10
    algebra = Algebra({f"R{k}": OHM for k in range(12)})
    total = sum(algebra.generators.values(), algebra.zero)
    power = total
    with pytest.raises(TooMuch):
        for _ in range(20):
            power = algebra.times(power, total)
    assert algebra.spent < MOST_WORK + len(power) * len(total) + 2


@pytest.mark.undisturbed
def test_a_sheet_with_many_wrong_formulas_gives_up_soon():
    """Of closed forms too long to read no more than a few are worked before the rest go without."""
    circuit = ladder(4)
    wrong = "\n\n".join(f"`V_n4 = Vin/{k}`" for k in range(2, 42))
    start = time.process_time()
    assert check_text("s.md", circuit + wrong).counts["differs"] == 40
    assert time.process_time() - start < 5.0


@pytest.mark.parametrize(
    ("claim", "verdict"),
    [
        ("`|V_b| = Vin`", "differs"),  # a magnitude is no ratio of polynomials
        ("`V_b = 3 V`", "unchecked"),
        ("`V_b = Vin × Rb/(Ra + Rb)`", "agrees"),
        ("`Vx = Ra + Rb = Ra`", "differs"),  # held against the sheet's own formula, not against a circuit
    ],
)
def test_silent_where_there_is_none(claim, verdict):
    (j,) = check_text("s.md", SIMPLE + claim).claims
    assert j.verdict == verdict
    assert not re.search(r" is (Vin|Ra|−Vin|Rb)\b", j.message)


def test_sympy_is_loaded_only_when_a_formula_fails():
    program = (
        "import sys\nfrom calccheck import check_text\n"
        f"text = {SIMPLE + '`V_b = Vin × Rb/(Ra + Rb)`'!r}\n"
        "assert check_text('s.md', text).clean\nassert 'sympy' not in sys.modules\n"
        "assert not check_text('s.md', text.replace('Rb/', 'Ra/')).clean\nassert 'sympy' in sys.modules\n"
    )
    done = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True)
    assert done.returncode == 0, done.stderr


# --- which symbols matter -------------------------------------------------------------------------------------------


def test_only_the_symbols_that_matter_are_named():
    sheet = SIMPLE.replace("```\n\n", "R3: Rx Ω, a to com\n```\n\n")
    claims = check_text(
        "s.md", sheet + "`V_b = 3 V` `I_R3 = 2 A` `Rp = Ra ∥ Rb = 3 Ω` `Vh = V_b × Rp / Rx = 1 V`"
    ).claims
    said = [re.search(r"free symbols? (.*?):", j.message)[1] for j in claims]
    assert said == ["Ra, Rb, Vin", "Rx, Vin", "Ra, Rb", "Ra, Rb, Rx, Vin"]
