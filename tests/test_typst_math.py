"""Formulas set as mathematics: nothing of a formula is lost or moved, and typst sets what is made.

The expected forms are typst's own (reference, chapter Math): ``frac(a, b)``, ``attach(base, t: above, b: below)``, ``sqrt``.
"""

from __future__ import annotations

import re

import pytest
import typst
from annotate_fixture import example
from hypothesis import given, settings
from hypothesis import strategies as st

from calccheck.annotate.record import entries
from calccheck.annotate.to_pdf import typst_source
from calccheck.annotate.typst_math import mathematics
from calccheck.read.expression import parse_value
from calccheck.read.maths import parse_maths
from calccheck.source import whole


def made(text: str) -> str:
    return mathematics(parse_value(whole(text)), text)


@pytest.mark.parametrize(
    ("written", "source"),
    [
        ("9.190 V", '#upright("9.190 V")'),
        ("−0.5 mA", '#negative;#upright("0.5 mA")'),
        ("1.20e3 V", '#upright("1.20 × 10³ V")'),
        ("3×10⁻¹⁹ C", '#upright("3 × 10⁻¹⁹ C")'),
        ("30°", '#upright("30°")'),
        ("Rb", '#leaning("Rb")'),
        ("V_bus", 'attach(#slanted("V"), b: #upright("bus"))'),
        ("V_{a,b}²", 'attach(#slanted("V"), b: #upright("a,b"), t: #upright("2"))'),
        ("V_bus due to Vb", 'attach(#slanted("V"), b: #upright("bus")) thin #upright("due to Vb")'),
        ("max V_o", '#upright("max") thin attach(#slanted("V"), b: #upright("o"))'),
        ("a/b", 'frac(#leaning("a"), #leaning("b"))'),
        ("(a + b)/(c − d)", 'frac(#leaning("a") + #leaning("b"), #leaning("c") minus #leaning("d"))'),
        ("a/(b/(c/d))", 'frac(#leaning("a"), frac(#leaning("b"), #leaning("c") slash #leaning("d")))'),
        ("(a + b) × c", '(#leaning("a") + #leaning("b")) times #leaning("c")'),
        ("R1 ∥ R2", '#leaning("R1") parallel #leaning("R2")'),
        ("2 R1", '#upright("2") thin #leaning("R1")'),
        ("(2 A)²", 'attach((#upright("2 A")), t: #upright("2"))'),
        ("(3/16) mA", '(frac(#upright("3"), #upright("16"))) thin #upright("mA")'),
        ("sqrt(a/b)", 'sqrt(frac(#leaning("a"), #leaning("b")))'),
        ("√(a + b)", 'sqrt(#leaning("a") + #leaning("b"))'),
        ("|x|", 'abs(#leaning("x"))'),
        ("max(a, b)", 'op("max") (#leaning("a") comma #leaning("b"))'),
        ("3.2 V … 3.4 V", '#upright("3.2 V") dots.h #upright("3.4 V")'),
        ("3.3 V ± 0.1 V", '#upright("3.3 V") plus.minus #upright("0.1 V")'),
    ],
)
def test_each_form(written, source):
    assert made(written) == source


@pytest.mark.parametrize(
    ("written", "source"),
    [
        (r"V_\mathrm{b} = 2\,\mathrm{V}", 'attach(#slanted("V"), b: #upright("b"))'),
        (r"V_b \text{ due to S1} = 1", 'attach(#slanted("V"), b: #upright("b")) thin #upright("due to S1")'),
        (r"\frac{a}{b} = 1", 'frac(#leaning("a"), #leaning("b"))'),  # the bar groups: no brackets of its own
        (r"\left( a + b \right) c = 1", '(#leaning("a") + #leaning("b")) thin #leaning("c")'),
        (r"\min ( V_a - V_b ) = 1",
         '#upright("min") thin (attach(#slanted("V"), b: #upright("a")) minus attach(#slanted("V"), b: #upright("b")))'),
    ],
)  # fmt: skip
def test_each_form_of_dollar_maths(written, source):
    assert mathematics(parse_maths(whole(written))[0].node, written) == source


ATOMS = st.sampled_from(["R1", "Rb", "x′", "4.70 kΩ", "12 V", "0.010", "V_bus", "I_{R1,a}", "3.0e-3 A", "π"])


def grown(inner: st.SearchStrategy[str]) -> st.SearchStrategy[str]:
    sums = st.tuples(inner, st.sampled_from([" + ", " − ", " × ", " / ", " ∥ "]), inner)
    return st.one_of(
        sums.map(lambda t: f"({''.join(t)})"),
        inner.map(lambda t: f"({t})²"),
        inner.map(lambda t: f"sqrt({t})"),
        inner.map(lambda t: f"(−{t})"),
    )


FORMULAS = st.recursive(ATOMS, grown, max_leaves=12)


def literals(source: str) -> str:
    """The words in a source's string literals, one behind the other."""
    return "".join(re.findall(r'"((?:[^"\\]|\\.)*)"', source)).replace(" ", "")


@given(FORMULAS)
def test_names_and_numbers_stand_in_the_order_written(written):
    plain = re.sub(r"[()+−×/∥{}\s]|sqrt", "", written.replace("3.0e-3", "3.0 10⁻³")).replace("²", "2").replace("_", "")
    assert literals(made(written)).replace("×", "") == plain


@settings(max_examples=3, deadline=None)
@given(st.lists(FORMULAS, min_size=25, max_size=25))
def test_typst_sets_them_all(written):
    report = example()
    head = typst_source(report, entries(report), "", frozenset()).partition("#show: paper.with")[0]
    lines = "\n\n".join(f'#formula("alt", ${made(w)}$)' for w in written)
    document = '#set document(title: "x", date: datetime(year: 2026, month: 1, day: 1))\n#set text(lang: "en")\n'
    made_pdf = typst.Compiler((head + document + lines).encode(), ignore_system_fonts=True).compile(
        format="pdf", pdf_standards=["a-3a", "ua-1"]
    )
    assert made_pdf.startswith(b"%PDF")
