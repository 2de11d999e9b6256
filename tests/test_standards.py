"""Value codes, preferred values and prefixes, held against the standards that define them.

The tables are from memory of IEC 60062:2016 (codes), IEC 60063:2015 (series) and the SI Brochure, 9th edition, table 7
(prefixes); six values of E96 were read second hand (spot checks below). All arithmetic here is decimal and the test's own.
"""

from __future__ import annotations

from decimal import Decimal

import pytest

from calccheck import check_text

E3 = [10, 22, 47]
E6 = [10, 15, 22, 33, 47, 68]
E12 = [10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82]
E24 = [10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91]
EXCEPTION = {919: 920}  # E192 holds 9.20, where the formula gives 9.19


def by_formula(size: int) -> list[int]:
    """E48, E96, E192: the powers of ten in equal steps, rounded to three figures."""
    values = [int((100 * Decimal(10) ** (Decimal(i) / size)).quantize(Decimal(1))) for i in range(size)]
    return [EXCEPTION.get(value, value) for value in values]


# code letter in place of the point, and the power of ten that it stands for (k beside K and u beside µ: common practice)
RESISTOR_LETTERS = {"R": 0, "K": 3, "k": 3, "M": 6, "G": 9, "T": 12}
CAPACITOR_LETTERS = {"p": -12, "n": -9, "µ": -6, "u": -6, "m": -3, "F": 0}
PRINTED = {-15: "f", -12: "p", -9: "n", -6: "µ", -3: "m", 0: "", 3: "k", 6: "M", 9: "G", 12: "T"}


def codes(figures: str, letter: str, power: int) -> dict[str, Decimal]:
    """All codes of one value by one letter: ``4R7``, ``47R``, of two figures ``470R``; ``R47``, ``n47``, but no ``k47``."""
    made = {}
    for place in range(letter in RESISTOR_LETTERS and letter != "R", len(figures) + 1):
        made[figures[:place] + letter + figures[place:]] = Decimal(figures).scaleb(power + place - len(figures))
    if len(figures) == 2:
        made[figures + "0" + letter] = Decimal(figures).scaleb(power + 1)
    return made


def restated(values: dict[str, Decimal], unit: str) -> str:
    """A sheet in which every code is a part and the part's value is stated in plain figures."""
    parts = [f"X{i}: {code}, a to com" for i, code in enumerate(values)]
    claims = [f"X{i} = {plain(value)} {unit}" for i, value in enumerate(values.values())]
    return "\n".join(
        ["```circuit", "reference com", "Rx: 1 Ω, a to com", *parts, "```", "", "```working", *claims, "```", ""]
    )


def plain(value: Decimal) -> str:
    return f"{value:f}"


def differing(text: str) -> list[str]:
    report = check_text("codes.md", text)
    errors = [f.message for f in report.findings if f.severity == "error"]
    return errors + [f"{j.claim.text}: {j.verdict}: {j.message}" for j in report.claims if j.verdict != "agrees"]


def claims(text: str) -> int:
    return len(check_text("codes.md", text).claims)


@pytest.mark.parametrize("letter", RESISTOR_LETTERS)
@pytest.mark.parametrize("series", [E24, by_formula(96)], ids=["E24", "E96"])
def test_resistor_codes(series: list[int], letter: str) -> None:
    values = {code: value for v in series for code, value in codes(str(v), letter, RESISTOR_LETTERS[letter]).items()}
    text = restated(values, "Ω")
    assert claims(text) == len(values)
    assert differing(text) == []


@pytest.mark.parametrize("letter", CAPACITOR_LETTERS)
def test_capacitor_codes(letter: str) -> None:
    values = {code: value for v in E24 for code, value in codes(str(v), letter, CAPACITOR_LETTERS[letter]).items()}
    text = restated(values, "F")
    assert claims(text) == len(values)
    assert differing(text) == []


# examples of the standard's tables, from memory, to hold the test's own code maker
@pytest.mark.parametrize(
    ("code", "value", "unit"),
    [("R10", "0.1", "Ω"), ("R332", "0.332", "Ω"), ("3R32", "3.32", "Ω"), ("59R04", "59.04", "Ω"), ("590R4", "590.4", "Ω"),
     ("1K0", "1000", "Ω"), ("5K904", "5904", "Ω"), ("10M", "10000000", "Ω"), ("33G2", "33200000000", "Ω"),
     ("p10", "0.0000000000001", "F"), ("3p32", "0.00000000000332", "F"), ("1n0", "0.000000001", "F"),
     ("33µ2", "0.0000332", "F"), ("590µ", "0.00059", "F")],
)  # fmt: skip
def test_examples_of_the_code(code: str, value: str, unit: str) -> None:
    text = restated({code: Decimal(value)}, unit)
    assert claims(text) == 1
    assert differing(text) == []


def test_a_wrong_reading_of_a_code_is_told() -> None:
    text = restated({"4k7": Decimal(47000)}, "Ω")
    assert [j.verdict for j in check_text("codes.md", text).claims] == ["differs"]


def test_series() -> None:
    """The tables above against each other and against the spot checks of E96, so that the codes are made of right values."""
    assert (E24[::2], E24[::4], E24[::8]) == (E12, E6, E3)
    e96 = by_formula(96)
    assert [e96[i] for i in (0, 1, 10, 50, 77, 95)] == [100, 102, 127, 332, 634, 976]
    assert by_formula(48) == e96[::2]
    assert e96 == by_formula(192)[::2]


@pytest.mark.parametrize("power", PRINTED)
@pytest.mark.parametrize("unit", ["V", "A", "Ω", "S", "F", "H"])
def test_prefixes(power: int, unit: str) -> None:
    """One unit with a prefix restates as a power of ten of the plain unit, and the other way round."""
    value = f"1{PRINTED[power]}{unit}"
    text = (
        f"```circuit\nreference com\nRx: 1 Ω, a to com\nX1: {value}, a to com\n```\n\n"
        f"`X1 = 1e{power} {unit}`, `X1 = {plain(Decimal(10) ** power)} {unit}` and `X1 = 1 {PRINTED[power]}{unit}`.\n"
    )
    assert claims(text) == 3
    assert differing(text) == []
