"""The expression language: text to structure, value or doubt, with places; laws of the parser over random trees and any text."""

from __future__ import annotations

import time
from decimal import Decimal
from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calccheck.arithmetic import Amount, DimensionFault, Doubt, evaluate
from calccheck.formula import Binary, Call, Group, Node, Number, Range, Reference, Unary, walk
from calccheck.read.expression import parse, parse_chain, parse_qualifiers, parse_value
from calccheck.source import Span, whole
from calccheck.units import AMPERE, NONE, OHM, VOLT, WATT

# --- structure ------------------------------------------------------------------------------------------------------


def told(n: Node) -> str:
    """A node with brackets around every operation; numbers with their units in ⟨⟩, groups with units in ⟪⟫."""
    match n:
        case Number():
            return f"{n.digits}⟨{n.unit.text}⟩" if n.unit.text else str(n.digits)
        case Reference():
            return n.text
        case Unary():
            return f"({n.sign}{told(n.operand)})"
        case Binary():
            return f"({told(n.left)} {n.operator} {told(n.right)})"
        case Group():
            return f"⟪{told(n.inner)} {n.unit.text}⟫" if n.unit.text else told(n.inner)
        case Call():
            return f"{n.function}[{', '.join(map(told, n.arguments))}]"
        case Range():
            return f"{told(n.low)} {'±' if n.centred else '…'} {told(n.high)}"


STRUCTURES = [
    # a number and the unit behind it are one literal and bind tightest
    ("1/3 kΩ", "(1 ÷ 3⟨kΩ⟩)"), ("12.6 V", "12.6⟨V⟩"), ("12.6V", "12.6⟨V⟩"), ("2 mA²", "2⟨mA²⟩"), ("2 mA^2", "2⟨mA²⟩"),
    ("5 V/ms", "5⟨V/ms⟩"), ("5 V/2 ms", "(5⟨V⟩ ÷ 2⟨ms⟩)"), ("0.0175 Ω·mm²/m", "0.0175⟨Ω·mm²/m⟩"), ("3 J/(kg·K)", "3⟨J/kg/K⟩"),
    ("12 V/R1", "(12⟨V⟩ ÷ R1)"), ("12 V/(R1 + R2)", "(12⟨V⟩ ÷ (R1 + R2))"), ("(3/16) mA", "⟪(3 ÷ 16) mA⟫"),
    ("(a + b)/2 Ω", "((a + b) ÷ 2⟨Ω⟩)"), ("90°", "90⟨°⟩"), ("25 °C", "25⟨°C⟩"), ("5 °C/W", "5⟨°C/W⟩"), ("87 %", "87⟨%⟩"),
    # names that are units elsewhere
    ("C", "C"), ("2 × C", "(2 × C)"), ("R C", "(R · C)"), ("A/G", "(A ÷ G)"), ("m × L", "(m × L)"), ("C² × L", "((C ^ 2) × L)"),
    # then powers, juxtaposition, ∥, × and ÷, + and −
    ("2 R1²", "(2 · (R1 ^ 2))"), ("2(R1 + R2)", "(2 · (R1 + R2))"), ("R1 R2/(R1 + R2)", "((R1 · R2) ÷ (R1 + R2))"),
    ("R1 + R2 ∥ R3", "(R1 + (R2 ∥ R3))"), ("2 R1 ∥ R2", "((2 · R1) ∥ R2)"), ("R1 // R2", "(R1 ∥ R2)"),
    ("a − b − c", "((a - b) - c)"), ("a/b/c", "((a ÷ b) ÷ c)"), ("a/b × c", "((a ÷ b) × c)"), ("a^b^c", "(a ^ (b ^ c))"),
    ("a*b·c", "((a × b) × c)"), ("R1 ∥ R2 ∥ R3", "((R1 ∥ R2) ∥ R3)"), ("2π f", "((2 · π) · f)"),
    # signs
    ("−2²", "(-(2 ^ 2))"), ("−a + b", "((-a) + b)"), ("−R1 ∥ R2", "(-(R1 ∥ R2))"), ("a × −b", "(a × (-b))"), ("2^−3", "(2 ^ (-3))"),
    ("2^-3 R1", "((2 ^ (-3)) · R1)"), ("x^-2 ∥ y", "((x ^ (-2)) ∥ y)"), ("− 4.37 W", "(-4.37⟨W⟩)"), ("+3 V", "(+3⟨V⟩)"),
    # roots, functions, bars
    ("√2", "(√2)"), ("√(a + b)", "(√(a + b))"), ("√2 × a", "((√2) × a)"), ("√a²", "(√(a ^ 2))"), ("sqrt(2 a)", "sqrt[(2 · a)]"),
    ("|V_a|", "abs[V_a]"), ("max(a, b, 2 V)", "max[a, b, 2⟨V⟩]"), ("a |b|", None), ("e^(−t/τ)", "(e ^ ((-t) ÷ τ))"),
    # numbers
    ("1.6e-19 C", "1.6E-19⟨C⟩"), ("1.6E-19 C", "1.6E-19⟨C⟩"), ("1.6×10⁻¹⁹ C", "1.6E-19⟨C⟩"), ("1.6 × 10^-19 C", "1.6E-19⟨C⟩"),
    ("1.60e3 V", "1.60E+3⟨V⟩"), (".5 V", "0.5⟨V⟩"), ("10⁻³ V", "⟪(10 ^ (-3)) V⟫"), ("I^2*10^3", "((I ^ 2) × (10 ^ 3))"),
    ("2×10³ Ω", "2E+3⟨Ω⟩"), ("x² × 10³", "((x ^ 2) × (10 ^ 3))"), ("j40", "(j · 40)"), ("(30 + j40) Ω", "⟪(30 + (j · 40)) Ω⟫"),
    ("10 V ∠ 30°", "(10⟨V⟩ ∠ 30⟨°⟩)"), ("10 ∠ 30° V", "(10⟨V⟩ ∠ 30⟨°⟩)"), ("10 V ∠ −30°", "(10⟨V⟩ ∠ (-30⟨°⟩))"),
    # ranges; one unit at the end serves both
    ("3.21 … 3.45 V", "3.21⟨V⟩ … 3.45⟨V⟩"), ("3.21 V ... 3.45 V", "3.21⟨V⟩ … 3.45⟨V⟩"), ("−1 to 2 mA", "(-1⟨mA⟩) … 2⟨mA⟩"),
    ("3.33 V ± 0.12 V", "3.33⟨V⟩ ± 0.12⟨V⟩"),
    # quantities and their qualifiers
    ("V_bus due to Vb", "V_bus due to Vb"), ("V_a − V_b without RL", "(V_a - V_b without RL)"), ("V_{+5V} + 1 V", "(V_{+5V} + 1⟨V⟩)"),
    ("V_a+V_b", "(V_a + V_b)"), ("R′ + R″", "(R′ + R″)"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "structure"), [s for s in STRUCTURES if s[1]])
def test_structure(text: str, structure: str) -> None:
    shown = told(parse_value(whole(text)))
    assert shown.replace("(-3)", "-3") == structure.replace("(-3)", "-3")  # ⁻³ is one number, ^−3 a sign and a number


def test_qualifiers() -> None:
    q = parse_qualifiers(
        whole("due to Vb and Ia without R1 with R2 as 4k7 with R3 shorted with R4 open of bridge in case hot")
    )
    assert q.due_to == ("Vb", "Ia")
    assert [(c.part, c.what) for c in q.changes] == [("R1", "without"), ("R2", "as"), ("R3", "shorted"), ("R4", "open")]
    assert (q.circuit, q.case) == ("bridge", "hot")


# --- places ---------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "places"),
    [("12 V × R2/(R1 + R2)", {"12⟨V⟩": "12 V", "(R1 + R2)": "(R1 + R2)", "R1": "R1"}),
     ("4.7 kΩ² + 3 µA/ms × x", {"4.7⟨kΩ²⟩": "4.7 kΩ²", "3⟨µA/ms⟩": "3 µA/ms", "x": "x"}),
     ("−√(a²)", {"(-(√(a ^ 2)))": "−√(a²)", "(√(a ^ 2))": "√(a²)", "(a ^ 2)": "a²", "2": "²"}),
     ("V_bus due to Vb and Ia without RL + 1", {"V_bus due to Vb and Ia without RL": "V_bus due to Vb and Ia without RL"}),
     ("(3/16) mA + 0", {"⟪(3 ÷ 16) mA⟫": "(3/16) mA"})],
)  # fmt: skip
def test_every_node_stands_where_it_is_written(text: str, places: dict[str, str]) -> None:
    offset = 7
    found: dict[str, set[str]] = {}
    for node in walk(parse(whole(text, offset))):
        found.setdefault(told(node), set()).add(text[node.span.start - offset : node.span.end - offset])
    for shown, written in places.items():
        assert written in found[shown]


def test_members_of_a_chain_with_their_relations_and_places() -> None:
    text = "V_a = Vb × R2 ~= 8 V <= 9 V ≥ 1 V"
    members = parse_chain(whole(text))
    assert [m.relation for m in members] == ["", "=", "≈", "≤", "≥"]
    assert [text[m.span.start : m.span.end] for m in members] == ["V_a", "Vb × R2", "8 V", "9 V", "1 V"]
    assert [m.text for m in members] == ["V_a", "Vb × R2", "8 V", "9 V", "1 V"]


# --- doubts ---------------------------------------------------------------------------------------------------------

DOUBTS = [
    # text, column at which the doubt begins (from 1), fragments of the reason, what is to be written instead
    ("1/2 R1", 3, "two ways", ""), ("1/2πfC", 4, "part the factors", ""), ("a/3(b + c)", 3, "two ways", ""), ("√2 a", 4, "two ways", ""),
    ("2R1", 1, "value code or a product", ""), ("4k7", 1, "value code", ""), ("4.7kOhm", 4, "write 4.7 kΩ", ""),
    ("12,6 V", 1, "decimal comma", "12.6 V"), ("1,234,567 V", 1, "no number", ""), ("1.2.3 V", 1, "no number", ""), ("12 000 V", 4, "follows without an operator", ""),
    ("10^-3 A", 4, "unit behind an exponent", ""), ("3.2–3.4 V", 4, "a dash", ""), ("V_ {a,b}", 4, "a brace", ""), ("V_{a,} + 1", 1, "subscript is empty", ""),
    ("V_a ~ 8", 5, "write ≈", ""), ("5 § 2", 3, "§ means nothing", ""), ("5 \x07 2", 3, "U+0007", ""),
    ("(a + b", 1, "expected ) to close", ""), ("a + b)", 6, "expected an operator", ""), ("|a + b", 1, "expected | to close", ""),
    ("a +", 3, "expected a value", ""), ("", 1, "expected a value", ""), ("a + × b", 5, "expected a value, found ×", ""), ("5 V 3", 5, "follows without", ""),
    ("sin", 1, "word of the language", ""), ("to", 1, "word of the language", ""), ("yield (V_a)", 1, "yield needs a relation", ""),
    ("V_a due Vb", 9, "expected to behind due", ""), ("V_a due to", 10, "source's name", ""), ("V_a with RL", 11, "open, shorted or as", ""),
    ("V_a due to Va due to Vb", 15, "stands twice", ""), ("V_a at R1", 8, "expected a frequency", ""),
    ("1e400 V", 1, "out of range", ""), ("1e99999999999999999999 V", 1, "out of range", ""), ("3 m⁹⁹", 3, "small whole number", ""),
    ("x" + "⁹" * 5, 2, "does not fit", ""), ("(" * 200 + "1" + ")" * 200, 101, "nested deeper than 100", ""),
    ("+".join("1" * 300), None, "more than 200 operations", ""), ("1" * 10_001, 1, "longer than 10000", ""),
]  # fmt: skip


@pytest.mark.parametrize(("text", "column", "fragment", "suggestion"), DOUBTS, ids=lambda v: repr(v)[:40])
def test_what_cannot_be_read_is_a_doubt_with_its_place(
    text: str, column: int | None, fragment: str, suggestion: str
) -> None:
    with pytest.raises(Doubt) as caught:
        parse(whole(text))
    doubt = caught.value
    assert fragment in doubt.reason
    assert doubt.suggestion == suggestion
    assert doubt.span is not None
    assert 0 <= doubt.span.start <= doubt.span.end <= len(text)
    if column is not None:
        assert doubt.span.start == column - 1


def test_operations_within_one_another_have_a_limit_that_can_be_worked_out() -> None:
    """Brackets and sums by themselves within their limits, together beyond what recursion bears."""
    text = "(" * 48 + "1" + ("+1" * 49 + ")") * 48
    with pytest.raises(Doubt, match="within one another"):
        parse(whole(text))
    tall = "(" * 4 + "1" + ("+1" * 50 + ")") * 4
    assert evaluate(parse(whole(tall)), unknown).value == 201


def test_a_chain_has_a_limit() -> None:
    with pytest.raises(Doubt, match="200 members"):
        parse_chain(whole("1=" * 4000 + "1"))


# --- values and dimensions -------------------------------------------------------------------------------------------

NAMES = {
    "R1": Amount(Fraction(1000), OHM), "R2": Amount(Fraction(2000), OHM), "Vb": Amount(Fraction(12), VOLT),
    "I1": Amount(Fraction(3, 1000), AMPERE), "n": Amount(Fraction(3)),
}  # fmt: skip


def unknown(ref: Reference) -> Amount:
    if ref.word not in NAMES:
        raise Doubt(f"{ref.word} is no name")
    return NAMES[ref.word]


VALUES = [  # worked by hand
    ("Vb × R2/(R1 + R2)", "8", VOLT), ("R1 ∥ R2", "2000/3", OHM), ("−R1 ∥ R2", "-2000/3", OHM), ("R1 ∥ R1 ∥ R1", "1000/3", OHM), ("Vb²/R1", "0.144", WATT),
    ("I1² × R2", "0.018", WATT), ("2 I1 R1", "6", VOLT), ("√(Vb²)", "12", VOLT), ("sqrt(Vb × Vb)", "12", VOLT), ("|−Vb|", "12", VOLT),
    ("1/3 kΩ", "1/3000", (-1, 1, 0, 0, 0)), ("(1/3) kΩ", "1000/3", OHM), ("2 mA²", "2e-6", (0, 2, 0, 0, 0)), ("min(R1, R2)", "1000", OHM),
    ("2^10", "1024", NONE), ("2^-2", "0.25", NONE), ("−2²", "-4", NONE), ("2^3^2", "512", NONE), ("8/2/2", "2", NONE), ("10 − 4 − 3", "3", NONE),
    ("5 % × Vb", "0.6", VOLT), ("50 ppm × 2 V", "1e-4", VOLT), ("40 °C − 25 °C", "15", (0, 0, 0, 0, 1)), ("3 W × 5 °C/W", "15", (0, 0, 0, 0, 1)),
    ("2 Ah/4 h", "0.5", AMPERE), ("12 Wh/12 V", "3600", (0, 1, 1, 0, 0)), ("0.0175 Ω·mm²/m × 100 m/2.5 mm²", "0.7", OHM), ("1/(1/R1 + 1/R2)", "2000/3", OHM),
    ("3×10² Ω", "300", OHM), ("I1^2*10^3", "0.009", (0, 2, 0, 0, 0)), ("2 Vb/n", "8", VOLT), ("n^n", "27", NONE), ("0^2", "0", NONE),
]  # fmt: skip


@pytest.mark.parametrize(("text", "value", "dimension"), VALUES)
def test_value(text: str, value: str, dimension: tuple) -> None:
    amount = evaluate(parse(whole(text)), unknown)
    assert amount.dimension == dimension
    assert (
        amount.value == pytest.approx(Fraction(value), rel=1e-15)
        if "√" in text or "sqrt" in text
        else amount.value == Fraction(value)
    )


@pytest.mark.parametrize(
    ("text", "value"),
    [("e", 2.718281828459045), ("ln(e)", 1.0), ("log10(1000)", 3.0), ("sin(30°)", 0.5), ("cos(60°)", 0.5), ("tan(45°)", 1.0),
     ("atan(1)", 0.7853981633974483), ("asin(1)", 1.5707963267948966), ("acos(0)", 1.5707963267948966), ("exp(1)", 2.718281828459045),
     ("2π", 6.283185307179586), ("2^0.5", 1.4142135623730951), ("e^(−1)", 0.36787944117144233), ("25 °C", 298.15)],
)  # fmt: skip
def test_functions_and_constants(text: str, value: float) -> None:
    """Values of the elementary functions to sixteen figures, from memory."""
    constants = {"e": Amount(Fraction(2.718281828459045)), "π": Amount(Fraction(3.141592653589793))}
    assert float(evaluate(parse(whole(text)), lambda r: constants[r.word]).value) == pytest.approx(value, rel=1e-14)


FAULTS = [
    ("R1 + Vb", "added"), ("12 V + 5 %", "added"), ("Vb − I1", "taken from"), ("R1 ∥ Vb", "parallel"), ("2^Vb", "exponent"),
    ("sin(Vb)", "plain number"), ("max(R1, Vb)", "unlike"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "fragment"), FAULTS)
def test_dimensions_that_do_not_fit_are_a_fault(text: str, fragment: str) -> None:
    with pytest.raises(DimensionFault, match=fragment) as caught:
        evaluate(parse(whole(text)), unknown)
    assert 0 <= caught.value.span.start < caught.value.span.end <= len(text)


UNDECIDED = [
    ("2 × R1 ∥ R2", "brackets"), ("R1 ∥ R2 × n", "brackets"), ("R1 ∥ R2/n", "brackets"), ("1/R1 × R2 ∥ R1 × R2", None), ("1/0", "division by zero"),
    ("R1 ∥ (−R1)", "cancel"), ("9^9^9^9", "floating-point"), ("0^0", "zero"), ("√(−1)", "root of a negative"), ("ln(0)", "no value"), ("asin(2)", "no value"),
    ("exp(1000)", "no value"), ("25 °C + 30 °C", "two temperatures"), ("2 × 25 °C", "multiplied"), ("1/25 °C", "°C"), ("X9", "X9 is no name"),
    ("10^300 × 10^300", "floating-point"), ("Vb^0.123456789", "no simple fraction"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "fragment"), [u for u in UNDECIDED if u[1]])
def test_what_two_engineers_would_read_differently_and_what_has_no_value_is_a_doubt(text: str, fragment: str) -> None:
    with pytest.raises(Doubt, match=fragment):
        evaluate(parse(whole(text)), unknown)


def test_parallel_beside_a_product_is_no_doubt_where_only_one_reading_has_a_right_dimension() -> None:
    """``Vb × R1 ∥ R2`` could only be Vb × (R1 ∥ R2): a voltage is not parallel to a resistance."""
    assert evaluate(parse(whole("I1 × R1 ∥ R2")), unknown) == Amount(Fraction(2), VOLT)


# --- laws: random trees ----------------------------------------------------------------------------------------------

LEAVES = st.one_of(
    st.builds(lambda n, e: ("number", Decimal(n).scaleb(e)), st.integers(1, 9999), st.integers(-3, 2)),
    st.sampled_from([("name", "R1"), ("name", "Vb"), ("name", "n"), ("name", "x′")]),
)
VALUES_OF = {"R1": Fraction(47, 10), "Vb": Fraction(-63, 5), "n": Fraction(3), "x′": Fraction(1, 7)}


def grown(inner):
    return st.one_of(
        st.tuples(st.sampled_from("+-×÷∥·"), inner, inner),
        st.tuples(st.just("neg"), inner),
        st.tuples(st.just("^"), inner, st.integers(1, 3)),
        st.tuples(st.sampled_from(["abs", "max"]), inner),
    )


TREES = st.recursive(LEAVES, grown, max_leaves=14)


class Undefined(Exception):
    """A division by zero in a random tree."""


def worth(tree) -> Fraction:
    """The value of a tree by the arithmetic of rationals."""
    match tree:
        case ("number", digits):
            return Fraction(digits)
        case ("name", word):
            return VALUES_OF[word]
        case ("neg", a):
            return -worth(a)
        case ("abs" | "max", a):
            return abs(worth(a)) if tree[0] == "abs" else max(worth(a), Fraction(1))
        case ("^", a, n):
            return worth(a) ** n
        case (sign, a, b):
            x, y = worth(a), worth(b)
            if sign in "×·":
                return x * y
            if sign in "+-":
                return x + y if sign == "+" else x - y
            if sign == "∥" and x == y == 0:
                return x  # two shorts side by side
            if (sign == "÷" and y == 0) or (sign == "∥" and x + y == 0):
                raise Undefined
            return x / y if sign == "÷" else x * y / (x + y)


def in_full(tree) -> str:
    """A tree written with brackets around every operation."""
    match tree:
        case ("number", digits):
            return f"{digits:f}"
        case ("name", word):
            return word
        case ("neg", a):
            return f"(−{in_full(a)})"
        case ("abs", a):
            return f"abs({in_full(a)})"
        case ("max", a):
            return f"max({in_full(a)}, 1)"
        case ("^", a, n):
            return f"({in_full(a)}^{n})"
        case (sign, a, b):
            return f"({in_full(a)} {sign if sign != '·' else '×'} {in_full(b)})"


# How tightly each operation binds, from the language's own page: powers, juxtaposition, ∥, × and ÷, + and −.
TIGHT = {"+": 1, "-": 1, "×": 2, "÷": 2, "neg": 2, "∥": 3, "·": 4, "^": 5}


def sparingly(tree, above: int = 0) -> str:
    """A tree written with the brackets that it needs."""
    op, *parts = tree
    if op in ("number", "name", "abs", "max"):
        return in_full(tree) if op in ("number", "name") else in_full((op,)) if not parts else _call(op, parts[0])
    tight = TIGHT[op]
    if op == "^":
        text = f"{sparingly(parts[0], 6)}^{parts[1]}"
    elif op == "neg":
        text = f"−{sparingly(parts[0], 3)}"
    elif op == "·":
        text = f"{sparingly(parts[0], 4)} {sparingly(parts[1], 5)}"
        if parts[1][0] in ("number", "^", "neg"):  # a number behind a number needs its sign
            text = f"{sparingly(parts[0], 4)} ({sparingly(parts[1])})"
        if parts[0][0] in ("abs", "max", "^"):
            text = f"({sparingly(parts[0])}) ({sparingly(parts[1])})"
    elif op == "∥":
        text = f"{sparingly(parts[0], 3)} ∥ {sparingly(parts[1], 4)}"
    else:
        first = sparingly(parts[0], tight)
        second = sparingly(parts[1], tight + 1 if op in "÷-" or parts[1][0] in "÷-" else tight)
        if op in "×÷":  # ∥ beside × or ÷, juxtaposition behind ÷ and a sign behind either need their brackets
            first = f"({sparingly(parts[0])})" if parts[0][0] == "∥" else first
            second = f"({sparingly(parts[1])})" if parts[1][0] in ("∥", "·", "neg", "÷", "×") else second
        text = f"{first} {op} {second}"
    return f"({text})" if tight < above else text


def _call(op: str, inner) -> str:
    return f"abs({sparingly(inner)})" if op == "abs" else f"max({sparingly(inner)}, 1)"


def read(text: str) -> Fraction:
    return evaluate(parse(whole(text)), lambda r: Amount(VALUES_OF[r.word])).value


@settings(max_examples=150, deadline=None)
@given(TREES)
def test_a_tree_written_out_reads_back_to_its_value(tree) -> None:
    try:
        expected = worth(tree)
    except Undefined:
        with pytest.raises(Doubt):
            read(in_full(tree))
        return
    try:
        full, spare = read(in_full(tree)), read(sparingly(tree))
    except Doubt as d:
        assert "floating-point" in d.reason
        return
    if isinstance(full, Fraction):
        assert full == expected
    else:
        assert full == pytest.approx(float(expected), rel=1e-9)
    assert spare == full


# --- laws: any text --------------------------------------------------------------------------------------------------

ATOMS = [
    "V_bus", "V_{a,b}", "R1", "I_Rb", "x", "C", "12", "3.3", ".5", "1e-3", "4k7", " V", " kΩ", " mA²", "°C", "%", "π", "e", "j4", "+", "−", "×", "*", "/", "÷",
    "^", "²", "⁻¹", "∥", "//", "√", "(", ")", "[", "]", "|", ",", "=", "≈", "<=", "≥", "…", " to ", "±", "∠", "°", " due to ", " and ", " without ", " with ",
    " as ", " open", " of ", " at ", " dc", " in case ", "max ", "sin(", "max(", "\n", " ", "#", "‐", "–", "{", "}", "_", "′", "\u2009", "\u00a0", "\x00", "Ω",
]  # fmt: skip
SOUP = st.lists(st.sampled_from(ATOMS), max_size=25).map("".join)
ANY = st.one_of(SOUP, st.text(max_size=60), st.text("()+-^√|∥ 1R", max_size=300))


@settings(max_examples=400, deadline=None)
@given(ANY, st.integers(0, 50))
def test_any_text_gives_nodes_within_it_or_a_doubt_within_it(text: str, offset: int) -> None:
    piece, ends = whole(text, offset), (offset, offset + len(text))
    for reader in (parse, parse_value, parse_chain, parse_qualifiers):
        began = time.process_time()
        try:
            read_as = reader(piece)
        except Doubt as d:
            assert d.reason
            assert d.span is None or _within(d.span, ends)
            continue
        finally:
            assert time.process_time() - began < 5
        if reader is parse_chain:
            for m in read_as:
                assert _within(m.span, ends)
                assert text[m.span.start - offset : m.span.end - offset] == m.text
        for node in [read_as] if reader is not parse_chain else [m.node for m in read_as]:
            if isinstance(node, Node):
                _check_nodes(node, ends)


def _within(span: Span, ends: tuple[int, int]) -> bool:
    return ends[0] <= span.start <= span.end <= ends[1]


def _check_nodes(node: Node, ends: tuple[int, int]) -> None:
    for n in walk(node):
        assert _within(n.span, ends)
    try:
        evaluate(node, unknown)
    except (Doubt, DimensionFault) as e:
        assert e.reason
