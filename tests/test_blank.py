"""Empty tables for the author: they claim nothing, hold no value, and once filled in every cell is held against the circuit."""

from __future__ import annotations

import io
import re
import sys
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calccheck import check_text
from calccheck.annotate.to_blank import blank_page
from calccheck.cli import main
from calccheck.model import Settings
from calccheck.read.sheet import read_sheet
from calccheck.source import Sheet

# By hand, each source alone: 12 V over 2 Ω + (3 Ω ∥ 6 Ω = 2 Ω): 6 V at b; 3 A into 2 Ω ∥ 3 Ω ∥ 6 Ω = 1 Ω: 3 V at b.
CIRCUIT = "reference g\nVs: 12 V, a to g\nR1: 2 Ω, a to b\nR2: 3 Ω, b to g\nR3: 6 Ω, b to g\nIs: 3 A, g to b\n"
BY_HAND = {
    "V_a": (12, 0, 12), "V_b": (6, 3, 9), "I_Vs": (-3, 1.5, -1.5), "I_R1": (3, -1.5, 1.5), "I_R2": (2, 1, 3),
    "I_R3": (1, 0.5, 1.5), "I_Is": (0, 3, 3),
}  # fmt: skip
TOTALS = {
    "V_Vs": 12, "P_Vs": -18, "V_R1": 3, "P_R1": 4.5, "V_R2": 9, "P_R2": 27, "V_R3": 9, "P_R3": 13.5, "V_Is": -9, "P_Is": -27,
}  # fmt: skip


def sheet(*circuits: str, names: tuple[str, ...] = ("",)) -> str:
    return "".join(f"```circuit {n}\n{c}```\n\n" for n, c in zip(names, circuits, strict=True))


def blank(text: str) -> str:
    return blank_page(read_sheet(Sheet("a.md", text), Settings()))


def rows(page: str) -> dict[str, list[str]]:
    """The cells of the tables by their quantity."""
    found = [
        line.strip().removeprefix("|").removesuffix("|").split("|")
        for line in page.split("\n")
        if line.startswith("| `")
    ]
    return {cells[0].strip(" `"): [c.strip() for c in cells[1:]] for cells in found}


def filled(page: str, values: dict[str, tuple[str, ...]]) -> str:
    """The page with values written into its cells, as the author would."""
    lines = []
    for line in page.split("\n"):
        quantity = line.partition("`")[2].partition("`")[0]
        if line.startswith("| `"):
            cells = line.split("|")
            cells[2 : 2 + len(values[quantity])] = [f" {v} " for v in values[quantity]]
            line = "|".join(cells)
        lines.append(line)
    return "\n".join(lines)


def with_unit(quantity: str, value: float) -> str:
    unit = {"V": "V", "I": "A", "P": "W"}[quantity[0]]
    return f"{value} {unit}" if value else f"0.0 {unit}"


def test_one_row_a_node_voltage_and_part_current_one_column_a_source():
    page = blank(sheet(CIRCUIT))
    assert list(rows(page)) == [*BY_HAND, *TOTALS]
    assert "| due to `Vs` | due to `Is` | total" in page
    assert all(cells == [""] * 3 for q, cells in rows(page).items() if q in BY_HAND)
    assert all(cells == [""] for q, cells in rows(page).items() if q in TOTALS)


def test_it_claims_nothing_and_holds_no_value():
    page = blank(sheet(CIRCUIT))
    report = check_text("a.md", sheet(CIRCUIT) + page)
    assert report.claims == () and report.clean
    assert not re.search(r"\d", re.sub(r"`[^`]*`", "", page))


def test_once_filled_in_by_hand_every_cell_is_checked():
    values = {q: tuple(with_unit(q, v) for v in every) for q, every in BY_HAND.items()}
    values |= {q: (with_unit(q, v),) for q, v in TOTALS.items()}
    report = check_text("a.md", sheet(CIRCUIT) + filled(blank(sheet(CIRCUIT)), values))
    assert len(report.claims) == 3 * len(BY_HAND) + len(TOTALS)
    assert report.counts["agrees"] == len(report.claims) and {j.basis for j in report.claims} == {"circuit"}


@given(st.sampled_from([(q, k) for q in BY_HAND for k in range(3)] + [(q, 0) for q in TOTALS]))
@settings(max_examples=31, deadline=None)
def test_a_wrong_number_in_any_cell_is_found(cell):
    values = {q: [with_unit(q, v) for v in every] for q, every in BY_HAND.items()}
    values |= {q: [with_unit(q, v)] for q, v in TOTALS.items()}
    quantity, k = cell
    values[quantity][k] = f"77.0{values[quantity][k][-2:]}"
    page = filled(blank(sheet(CIRCUIT)), {q: tuple(v) for q, v in values.items()})
    report = check_text("a.md", sheet(CIRCUIT) + page)
    assert [j.quantity.split()[0] for j in report.claims if j.verdict == "differs"] == [quantity]


def test_names_that_need_braces_and_several_circuits():
    text = sheet("Vs: 5 V, +5V to gnd\nR1: 1 kΩ, +5V to gnd\n", CIRCUIT, names=("feed", "bridge"))
    page = blank(text)
    assert "`V_{+5V} of feed`" in page and "`I_R2 of bridge`" in page
    five = dict.fromkeys(rows(page), ())
    five |= {
        "V_{+5V} of feed": ("5 V", "5.0 V"),
        "P_R1 of feed": ("25 mW",),
        "V_b of bridge": ("6.0 V", "3.0 V", "9.0 V"),
    }
    report = check_text("a.md", text + filled(page, five))
    assert [j.verdict for j in report.claims] == ["agrees"] * 6


def test_circuits_without_a_name_say_where_the_table_belongs():
    page = blank(sheet(CIRCUIT, CIRCUIT, names=("", "")))
    assert "Belongs below the circuit of line 2, above the next." in page
    assert "Belongs below the circuit of line 11, above the next." in page


def test_sources_of_several_frequencies_have_no_total():
    page = blank(sheet("reference g\nV1: 10 V, a to g\nV2: 5 V, b to a, 400 Hz\nR1: 1 kΩ, b to g\n"))
    assert "| due to `V1` | due to `V2` |\n" in page and "no common total" in page


def test_parts_with_several_terminals_by_their_nodes():
    page = blank(sheet("V1: 1 V, p to gnd\nU1: op-amp, plus p, minus o, out o\nRL: 1 kΩ, o to gnd\n"))
    assert "`I_{U1,o}`" in page and "V_U1" not in page and "P_U1" not in page


# --- the command ----------------------------------------------------------------------------------------------------


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    return tmp_path


def run(capsys, *arguments: str) -> tuple[int, str, str]:
    status = main(arguments)
    shown = capsys.readouterr()
    return status, shown.out, shown.err


def test_the_command_prints_and_writes_nothing(folder, capsys):
    text = sheet(CIRCUIT)
    Path("a.md").write_text(text)
    assert run(capsys, "blank", "a.md") == (0, blank(text), "")
    assert [p.name for p in folder.iterdir()] == ["a.md"] and Path("a.md").read_text() == text


def test_standard_input(folder, capsys, monkeypatch):
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(sheet(CIRCUIT).encode())))
    assert run(capsys, "blank", "-") == (0, blank(sheet(CIRCUIT)), "")


def test_a_circuit_that_cannot_be_read_is_told_in_place_of_tables(folder, capsys):
    Path("a.md").write_text(sheet(CIRCUIT.replace("R1: 2 Ω", "R1 2 Ω")))
    status, out, _ = run(capsys, "blank", "a.md")
    assert status == 1 and out.startswith("a.md:4:1: error: ") and "|" not in out


def test_a_sheet_without_a_circuit(folder, capsys):
    Path("a.md").write_text("# Nothing\n")
    status, out, err = run(capsys, "blank", "a.md")
    assert (status, out) == (2, "") and "no circuit stands in this sheet" in err
