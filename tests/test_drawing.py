"""Drawings of circuits and bars by source: geometry of random circuits, laws of physics, published superposition tables.

That nothing collides is checked on the layout's records, with boxes worked out here; that the lettering is as wide as these
records say is checked against a PDF reader's own measure.
"""

from __future__ import annotations

import os
import re
import subprocess
import sys
import time
from fractions import Fraction
from itertools import combinations, pairwise
from pathlib import Path
from xml.etree import ElementTree

import pymupdf
import pytest
import typst
from circuit_lines import reading
from circuits import ac, ac_circuits, circuit, circuits, diode, op_amp, part, stages, transformer, transistor
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from pdf_reading import flat, read, text_of

from calccheck import check_file, check_text
from calccheck.annotate import bars, pictures, typst_pictures
from calccheck.annotate.drawing import drawing, picture
from calccheck.annotate.drawing.columns import Track, ordered
from calccheck.annotate.drawing.figures import figures
from calccheck.annotate.drawing.layout import layout
from calccheck.annotate.drawing.svg import SIZE, width
from calccheck.annotate.drawing.symbols import SYMBOL
from calccheck.annotate.to_html import to_html
from calccheck.annotate.to_pdf import to_pdf
from calccheck.arithmetic import Amount
from calccheck.solve import Unsolvable, frequencies, solve, total
from calccheck.units import AMPERE, VOLT

SVG = "{http://www.w3.org/2000/svg}"
SHEETS = sorted(Path(__file__).parents[1].joinpath("sheets").glob("TS-*.md"))
QUICK = settings(
    max_examples=40, deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.filter_too_much]
)
LONG = "a_name_far_longer_than_anyone_would_letter_in_a_drawing"

random_circuits = st.one_of(
    circuits(most_nodes=9, most_extra=10),
    ac_circuits("RVIEFSOLCZ", most_nodes=7),
    circuits("RVI", most_nodes=6, most_extra=4).flatmap(stages),
)


def solved(made):
    """The circuit's solution at its highest frequency, as any one that a drawing may show."""
    return solve(made, max(frequencies(made), default=Fraction(0)))


def twenty():
    """Twenty parts and ten nodes, an invented network with bridges."""
    _, result = reading("""reference com
V1: 24 V, in to com
V2: 5 V, ref to com
I1: 3 mA, com to b
R1: 1 kΩ, in to a
R2: 2.2 kΩ, a to b
R3: 4.7 kΩ, a to com
R4: 3.3 kΩ, b to com
R5: 10 kΩ, in to b
R6: 680 Ω, b to out
R7: 2.2 kΩ, a to ref
R8: 15 kΩ, out to com
R9: 1.5 kΩ, out to d
R10: 12 kΩ, d to com
R11: 820 Ω, d to h
R12: 5.6 kΩ, h to com
R13: 27 kΩ, in to h
R14: 330 Ω, ref to f
R15: 1.8 kΩ, f to com
R16: 3.9 kΩ, f to d
E1: 2 * V_{a,b}, k to h""")
    return result.circuit


# --- geometry -------------------------------------------------------------------------------------------------------


def overlap(a, b):
    return a[0] < b[2] and b[0] < a[2] and a[1] < b[3] and b[1] < a[3]


def area(s):
    """What a symbol fills; sources with their signs or counting arrow to the left."""
    left, right = {"voltage source": (12, 11), "current source": (18, 11), "capacitor": (10, 10), "diode": (8, 8)}.get(
        s.part.element.kind.removeprefix("controlled "), (6, 6)
    )
    return s.x - left, s.y, s.x + right, s.y + SYMBOL


def bodies(made):
    """The areas that symbols and boxes fill."""
    return [area(s) for s in made.symbols] + [(b.x1, b.y1, b.x2, b.y2) for b in made.boxes]


def check_nothing_collides(made):
    labels = [label.box for label in made.labels]
    for a, b in combinations(labels, 2):
        assert not overlap(a, b)
    strokes = [(lead.x, lead.y1, lead.x, lead.y2) for lead in made.leads]
    strokes += [(line.x1, line.y, line.x2, line.y) for line in made.lines]
    for box in labels:
        assert not any(overlap(box, (x1 - 0.5, y1 - 0.5, x2 + 0.5, y2 + 0.5)) for x1, y1, x2, y2 in strokes)
        assert box[0] >= 0 and box[1] >= 0 and box[2] <= made.width and box[3] <= made.height
    for a, b in combinations(bodies(made), 2):
        assert not overlap(a, b)
    assert all(x1 >= 0 and y1 >= 0 and x2 <= made.width and y2 <= made.height for x1, y1, x2, y2 in bodies(made))
    for s in made.symbols:
        assert not any(overlap(area(s), box) for box in labels)
        assert not any(overlap(area(s), stroke) for stroke in strokes if stroke[0] != s.x)
    for b in made.boxes:
        inner = [box for box in labels if overlap(box, (b.x1, b.y1, b.x2, b.y2))]
        assert all(b.x1 <= x1 and b.y1 <= y1 and x2 <= b.x2 and y2 <= b.y2 for x1, y1, x2, y2 in inner)


def check_parts_meet_their_own_nodes(circuit_drawn, made):
    lines = {line.node: line for line in made.lines}
    ends = {e.name: sorted([n for _, n in e.terminals] or [e.plus, e.minus]) for e in circuit_drawn.elements}
    assert set(lines) == set(circuit_drawn.nodes())
    assert len({line.y for line in made.lines}) == len(made.lines)
    for name, nodes in ends.items():
        dots = [d for d in made.dots if d.part == name]
        assert sorted(d.node for d in dots) == nodes
        for d in dots:
            line = lines[d.node]
            assert d.y == line.y and line.x1 <= d.x <= line.x2
            assert any(lead.part == name and lead.x == d.x and d.y in (lead.y1, lead.y2) for lead in made.leads)
    for lead in made.leads:
        crossed = {line.y for line in made.lines if lead.y1 < line.y < lead.y2 and line.x1 < lead.x < line.x2}
        assert set(lead.passed) == crossed
        assert not any(d.x == lead.x and d.y in crossed and d.part == lead.part for d in made.dots)


@QUICK
@given(random_circuits)
def test_nothing_collides_and_every_part_meets_its_own_nodes_alone(made):
    placed = layout(figures(made, solved(made)))
    check_nothing_collides(placed)
    check_parts_meet_their_own_nodes(made, placed)


@QUICK
@given(random_circuits)
def test_the_same_holds_without_a_solution(made):
    placed = layout(figures(made, None))
    check_nothing_collides(placed)
    check_parts_meet_their_own_nodes(made, placed)
    assert not placed.arrows


def test_names_and_values_of_any_length_stay_in_their_columns():
    _, result = reading(f"""reference {LONG}_com
{LONG}: 12.6 V, {LONG}_a to {LONG}_com
R1: (1 kΩ * 2 + 3 kΩ * 4 + 5 kΩ * 6 + 7 kΩ * 8 + 9 kΩ), {LONG}_a to b
R2: 4.7 kΩ, b to {LONG}_com""")
    made = result.circuit
    check_nothing_collides(layout(figures(made, solve(made))))
    words = picture(made, None).words
    assert f"{LONG}_a" in words and "9 kΩ" in words  # cut in the drawing, whole in its text alternative


def test_boxes_are_as_wide_as_their_names():
    names = [f"{LONG}{k}" for k in range(3)]
    made = circuit(part("V", "V1", "n0", "com", 5),
                   *(op_amp(name, f"n{k}", f"n{k + 1}", f"n{k + 1}") for k, name in enumerate(names)))  # fmt: skip
    check_nothing_collides(layout(figures(made, solve(made))))


def test_lettering_is_as_wide_as_the_layout_takes_it_to_be():
    drawn = picture(twenty(), solve(twenty()))
    pdf = compiled(drawn.svg, drawn.width)
    page = pymupdf.open(stream=pdf)[0]
    spans = [s for b in page.get_text("dict")["blocks"] for line in b.get("lines", []) for s in line["spans"]]
    lettered = {s["text"].strip(): s for s in spans}
    assert {"R16", "3.9 kΩ", "com (reference)"} <= set(lettered)
    for text, s in lettered.items():
        assert s["font"].startswith("DejaVu") or "DejaVuSansMono" in s["font"]
        assert s["size"] == pytest.approx(SIZE, rel=0.01)
        assert s["bbox"][2] - s["bbox"][0] <= width(text) * 1.01 + 0.1


def compiled(svg, wide):
    """The image alone on a page of its size, one point for a unit, set by typst with its own fonts."""
    source = f'#set page(width: auto, height: auto, margin: 0pt)\n#image("a.svg", width: {wide}pt)'.encode()
    return typst.compile({"main.typ": source, "a.svg": svg.encode()}, ignore_system_fonts=True, format="pdf")


def test_parts_of_a_bridge_are_drawn_without_a_column_in_common_and_wide_circuits_share_columns():
    bridge = circuit(
        part("V", "Vb", "t", "com", 24), part("R", "R1", "t", "a", 1), part("R", "R2", "a", "com", 2),
        part("R", "R3", "t", "b", 3), part("R", "R4", "b", "com", 4), part("R", "R5", "a", "b", 5),
    )  # fmt: skip
    placed = layout(figures(bridge, solve(bridge)))
    assert len({s.x for s in placed.symbols}) == 6
    placed = layout(figures(twenty(), solve(twenty())))
    assert len({s.x for s in placed.symbols}) < 20


# --- what is drawn --------------------------------------------------------------------------------------------------


@QUICK
@given(circuits(most_nodes=7))
def test_levels_fall_with_the_potential_and_current_through_resistors_with_them(made):
    """Ohm's law: through a resistance above zero current runs from the higher potential to the lower, so down the page."""
    solution = solve(made)
    potentials = total(solution).potentials
    placed = layout(figures(made, solution))
    fine = 2e-9 * float(solution.volts)
    lines = sorted(placed.lines, key=lambda line: line.y)
    for upper, lower in pairwise(lines):
        assert float(potentials[upper.node]) >= float(potentials[lower.node]) - fine
    resistors = {e.name for e in made.elements if e.kind == "resistor" and e.value and e.plus != e.minus}
    assert all(a.down for a in placed.arrows if a.part in resistors)


def test_a_source_that_delivers_carries_its_current_up():
    """Passive sign convention, IEC 60375: the battery of a lamp drives its current out of its positive pole."""
    lamp = circuit(part("V", "Vb", "p", "com", 12), part("R", "Rl", "p", "com", 4))
    placed = layout(figures(lamp, solve(lamp)))
    assert {a.part: a.down for a in placed.arrows} == {"Vb": False, "Rl": True}
    labels = [label.text for label in placed.labels]
    assert labels.count("3 A") == 2 and "12 V" in labels  # 12 V over 4 Ω


def test_no_arrow_where_no_current_flows():
    made = circuit(part("V", "Vb", "p", "com", 9), part("R", "R1", "p", "a", 4), part("O", "K1", "a", "com"))
    placed = layout(figures(made, solve(made)))
    assert not placed.arrows
    assert [label.text for label in placed.labels].count("0 A") == 3


def test_phasors_are_ordered_by_magnitude_and_say_their_angle():
    """Series resonance (IEC 60050-131, resonance): the inductor's 100 Ω and the capacitor's cancel, 10 V over 10 Ω is 1 A, and
    the node between coil and capacitor stands at 1 A times −j100 Ω."""
    made = circuit(
        ac("V", "Vs", "in", "com", 10, 50), part("R", "R1", "in", "a", 10),
        ac("Z", "Zl", "a", "c", 100j), ac("Z", "Zc", "c", "com", -100j),
    )  # fmt: skip
    f = figures(made, solve(made, Fraction(50)))
    assert f.nodes[0] == "c" and f.nodes[-1] == "com"
    assert f.potentials["c"] == "100 V ∠ −90°" and f.potentials["in"] == "10 V ∠ 0°"
    flows = {p.name: p.pins[0].flow.lines for p in f.parts}
    assert flows["R1"] == ("1 A", "∠ 0°")


def test_without_a_solution_nodes_stand_by_their_distance_from_the_reference():
    made = circuit(
        part("R", "R1", "a", "com", 1),
        part("R", "R2", "b", "a", 1),
        part("R", "R3", "c", "b", 1),
        part("R", "R4", "x", "y", 1),
    )
    assert figures(made, None).nodes == ("x", "y", "c", "b", "a", "com")
    assert figures(made, None).potentials == {}


def kinds_of_every_sort():
    return circuit(
        part("V", "V1", "a", "com", 12), part("I", "I1", "com", "b", "0.003"), part("R", "R1", "a", "b", 1000),
        part("S", "S1", "b", "c"), part("O", "O1", "c", "com"), part("C", "C1", "c", "com", "1e-6"),
        part("L", "L1", "c", "d", "1e-3"), part("R", "R2", "d", "com", 500), part("E", "E1", "f", "com", 2, ("a", "b")),
        part("R", "R3", "f", "d", 900), part("F", "F1", "f", "com", "0.001", ("a", "b")), part("R", "R0", "f", "com", 50),
        op_amp("U1", "d", "g", "g"), part("R", "R4", "g", "com", 300), diode("D1", "g", "k"), part("R", "R5", "k", "com", 800),
        transformer("T1", 10, "g", "com", "s", "com"), part("R", "R6", "s", "com", 8),
        transistor("Q1", "m", "n", "o", 100), part("R", "R7", "a", "m", "1e5"), part("R", "R8", "a", "n", 100),
        part("R", "R9", "o", "com", 400),
    )  # fmt: skip


def test_every_part_and_node_is_named_in_the_drawing_and_in_its_text_alternative():
    many = kinds_of_every_sort()
    alternating = circuit(ac("V", "Vs", "in", "com", 10, 50), ac("Z", "Zl", "in", "com", 100j))
    for made, solution in ((many, solve(many)), (many, None), (alternating, solve(alternating, Fraction(50)))):
        root = ElementTree.fromstring(drawing(made, solution))
        lettered = {t.text for t in root.iter(f"{SVG}text")}
        words = root.find(f"{SVG}desc").text
        names = {e.name for e in made.elements}
        assert names <= lettered
        assert set(made.nodes()) - {"com"} <= lettered and "com (reference)" in lettered
        assert all(re.search(rf"\b{name}: ", words) for name in names)
    words = picture(many, solve(many)).words
    assert "V1: voltage source, from a (+) to com (−)" in words
    assert "Q1: transistor, base at m, collector at n, emitter at o" in words


def test_a_part_with_both_ends_on_one_node_is_still_drawn():
    made = circuit(part("V", "Vb", "p", "com", 9), part("R", "R1", "p", "com", 4), part("R", "R2", "p", "p", 4))
    placed = layout(figures(made, solve(made)))
    check_nothing_collides(placed)
    check_parts_meet_their_own_nodes(made, placed)
    lone = circuit(part("R", "R1", "com", "com", 4))
    placed = layout(figures(lone, None))
    check_nothing_collides(placed)
    check_parts_meet_their_own_nodes(lone, placed)


def test_what_has_no_glyph_or_no_look_of_its_own_is_lettered_as_a_code_point():
    made = circuit(part("R", "漢", "a\u202e", "com", 4))
    svg = picture(made, None, missing={"漢"}).svg
    assert "[U+6F22]" in svg and "[U+202E]" in svg and "\u202e" not in svg


def test_hostile_names_are_text_and_nothing_else():
    nasty = '"><script>alert(1)</script>&\x00\ud800]]>'
    made = circuit(part("V", nasty, f"{nasty}n", "com", 4), part("R", f"{nasty}2", f"{nasty}n", "com", 4))
    svg = drawing(made, solve(made))
    root = ElementTree.fromstring(svg.encode("utf-8"))
    assert not list(root.iter(f"{SVG}script")) and "<script" not in svg
    assert {e.tag.removeprefix(SVG) for e in root.iter()} <= {"svg", "title", "desc", "path", "circle", "rect", "text"}
    assert not any("id" in e.attrib or "style" in e.attrib for e in root.iter())


def test_the_same_circuit_gives_the_same_drawing_in_any_process():
    sheet = SHEETS[4]
    script = (
        "import sys, hashlib, calccheck\nfrom calccheck.annotate.drawing import drawing\n"
        "r = calccheck.check_file(sys.argv[1])\n"
        "print(hashlib.sha256(drawing(r.reading.circuits[0], r.solutions[0]).encode()).hexdigest())\n"
    )
    runs = [
        subprocess.run([sys.executable, "-c", script, str(sheet)], env={**os.environ, "PYTHONHASHSEED": seed},
                       capture_output=True, text=True, check=True).stdout
        for seed in ("1", "2")
    ]  # fmt: skip
    assert len(runs[0]) == 65 and runs[0] == runs[1]


# --- order of columns -----------------------------------------------------------------------------------------------


def crossings(placed):
    return sum(len(lead.passed) for lead in placed.leads)


def ladder(rungs):
    parts = [part("V", "V0", "n0", "com", 100)]
    for k in range(rungs):
        parts += [part("R", f"Rs{k}", f"n{k}", f"n{k + 1}", 100), part("R", f"Rp{k}", f"n{k + 1}", "com", 470)]
    return circuit(*parts[::2], *parts[1::2])  # as written out of order


@pytest.mark.parametrize("rungs", [2, 4, 6, 9])
def test_a_ladder_is_drawn_without_a_crossing(rungs):
    """It is planar, and its potentials fall along it: it can be drawn so."""
    made = ladder(rungs)
    assert crossings(layout(figures(made, solve(made)))) == 0


def test_a_balanced_bridge_needs_no_crossing_and_sources_stand_left():
    made = circuit(
        part("R", "R1", "t", "a", 1), part("R", "R2", "a", "com", 2), part("R", "R3", "t", "b", 3),
        part("R", "R4", "b", "com", 4), part("R", "R5", "a", "b", 5), part("V", "Vb", "t", "com", 24),
    )  # fmt: skip
    placed = layout(figures(made, solve(made)))
    assert crossings(placed) == 0
    xs = {s.part.name: s.x for s in placed.symbols}
    assert xs["Vb"] < sorted(xs.values())[len(xs) // 2]


@pytest.mark.undisturbed
def test_the_search_ends_for_circuits_of_any_size():
    """The work allowed bounds it: twenty parts in 50 ms on a free machine, four hundred in little more."""
    made = twenty()
    solution = solve(made)
    seconds = min(timed(lambda: drawing(made, solution)) for _ in range(3))
    assert seconds < 0.1
    grid = tuple((Track((k % 37, k % 37 + 3), (k % 37 + 1, k % 37 + 2)),) for k in range(400))
    started = time.process_time()
    assert sorted(ordered(grid, 40)) == list(range(400))
    assert time.process_time() - started < 1.0


def timed(what):
    started = time.process_time()
    what()
    return time.process_time() - started


# --- bars -----------------------------------------------------------------------------------------------------------

PUBLISHED = """# Two batteries, three resistors

```circuit
reference g
B1: 28 V, a to g
R1: 4 Ω, a to m
R2: 2 Ω, m to g
R3: 1 Ω, m to b
B2: 7 V, b to g
```

|        | due to `B1` | due to `B2` | total |
|--------|-------------|-------------|-------|
| `V_R1` | 24 V        | −4 V        | 20 V  |
| `I_R3` | 4 A         | −3 A        | 1 A   |

Twice: `I_R3 = 1 A`. A power has no parts by source: `P_R2 = 32 W`. Nor has one source: `V_m due to B1 = 4 V`.
"""


def test_parts_by_source_are_those_of_a_published_table():
    """Kuphaldt, Lessons in Electric Circuits, vol. I, ch. 10, Superposition Theorem, tables 10192 and 10193."""
    report = check_text("sheet.md", PUBLISHED)
    assert report.clean and len(report.claims) == 9
    found = {j.quantity: [(name, a.value, a.dimension) for name, a in j.parts] for j in report.claims if j.parts}
    assert found == {
        "V_R1": [("B1", 24, VOLT), ("B2", -4, VOLT)],
        "I_R3": [("B1", 4, AMPERE), ("B2", -3, AMPERE)],
    }
    charts = pictures.totals(report)
    assert [c.claims for c in charts] == [("c3",), ("c6", "c7")]
    assert charts[0].picture.words == "V_R1: due to B1 +24 V, due to B2 −4 V; total 20 V"


@pytest.mark.parametrize("sheet", SHEETS, ids=lambda path: path.stem[:6])
def test_parts_add_up_to_the_truth_in_every_sheet(sheet):
    for j in check_file(sheet).claims:
        if j.parts:
            total = sum(a.value for _, a in j.parts)
            near = isinstance(total, complex) and abs(total - j.computed.value) <= 1e-12 * abs(total)
            assert total == j.computed.value or near


values = st.lists(st.fractions(-100, 100, max_denominator=1000), min_size=2, max_size=9)


@given(values)
def test_each_bar_begins_where_the_one_before_ends_and_the_total_at_zero(parts):
    found = bars.rows([(f"S{k}", Amount(v, VOLT)) for k, v in enumerate(parts)])
    *each, whole = found
    assert each[0].start == whole.start
    assert all(a.end == b.start for a, b in pairwise(each))
    assert each[-1].end == whole.end
    assert all(0 <= x <= 1 for bar in found for x in (bar.start, bar.end))
    scale = max(0, *partial(parts)) - min(0, *partial(parts)) or 1
    for bar, value in zip(each, parts, strict=True):
        assert bar.end - bar.start == pytest.approx(float(value / scale), abs=1e-9)
        assert bar.value.startswith("+") == (value > 0) and bar.value.startswith("−") == (value < 0)


def partial(parts):
    sums, s = [], Fraction(0)
    for p in parts:
        s += p
        sums.append(s)
    return sums


def test_signs_are_hatched_each_their_own_way():
    svg = bars.bars("V_x", [("Va", Amount(Fraction(5), VOLT)), ("Vb", Amount(Fraction(-3), VOLT))])
    hatched = [p.get("d") for p in ElementTree.fromstring(svg).iter(f"{SVG}path") if p.get("stroke-width") == "0.5"]
    slopes = []
    for d in hatched:
        pieces = re.findall(r"M([\d.]+) ([\d.]+)L([\d.]+) ([\d.]+)", d)
        slopes.append({(float(y2) - float(y1) > 0) for x1, y1, x2, y2 in pieces if float(x2) - float(x1) > 2})
    assert slopes == [{False}, {True}]  # y runs down: the first rises to the right, the second falls


def test_phasors_are_listed_with_magnitude_and_angle_and_have_no_bars():
    parts = [("Va", Amount(complex(3, 4), VOLT)), ("Vb", Amount(complex(0, -4), VOLT))]
    assert all(bar.start is None for bar in bars.rows(parts))
    root = ElementTree.fromstring(bars.bars("V_x", parts))
    lettered = [t.text for t in root.iter(f"{SVG}text")]
    assert "5 V ∠ 53.13°" in lettered and "4 V ∠ −90°" in lettered  # the 3-4-5 triangle
    assert not list(root.iter(f"{SVG}rect"))


# --- where they stand -----------------------------------------------------------------------------------------------


def test_on_the_page_the_drawing_stands_behind_its_block_and_bars_behind_the_table_and_in_the_record():
    page = to_html(check_text("sheet.md", PUBLISHED))
    block, drawn, table, behind, record = (
        page.index(s) for s in ("R3: 1", "Circuit as read", "due to <code>B1", "V_R1 by source", 'id="record"')
    )
    assert block < drawn < table < behind < record
    assert page.count("V_R1 by source") == 2 and page.count("<svg") == 5
    assert 'Claims <a href="#r-c6">6</a>, <a href="#r-c7">7</a>' in page[record:]
    for svg in re.findall(r"<svg.*?</svg>", page, re.DOTALL):
        ElementTree.fromstring(svg)


def test_in_the_pdf_they_have_text_and_alternative_text():
    report = check_text("sheet.md", PUBLISHED)
    reader = read(report)
    text = flat(text_of(reader))
    assert "B128V7A" not in text  # stands as lettering, not run together
    assert "g(reference)" in text and text.count("+24V") == 2
    alternatives = alternative_texts(reader)
    assert sum(a.startswith("V_R1 by source. V_R1: due to B1 +24 V") for a in alternatives) == 2
    assert sum(a.startswith("Circuit as read, with potentials and currents. Nodes from top") for a in alternatives) == 1
    assert to_pdf(report) == to_pdf(check_text("sheet.md", PUBLISHED))


def alternative_texts(reader):
    found, todo = [], [reader.root_object["/StructTreeRoot"]]
    while todo:
        node = todo.pop().get_object()
        if isinstance(node, list):
            todo += node
        elif hasattr(node, "get"):
            if node.get("/S") == "/Figure":
                found.append(str(node.get("/Alt")))
            if "/K" in node:
                todo.append(node["/K"])
    return found


def test_a_drawing_too_large_for_the_column_goes_to_a_page_of_the_record_and_the_block_says_so():
    lines = ["reference com", "V0: 100 V, n0 to com"]
    for k in range(12):
        lines += [f"Rs{k}: 1.2 kΩ, n{k} to n{k + 1}", f"Rp{k}: 4.7 kΩ, n{k + 1} to com"]
    block = "\n".join(lines)
    report = check_text("sheet.md", f"# Ladder\n\n```circuit\n{block}\n```\n\nThe end.\n")
    reader = read(report)
    pages = [flat(p.extract_text()) for p in reader.pages]
    at = next(k for k, page in enumerate(pages) if "n12" in page and "Checkrecord" in "".join(pages[:k]))
    assert "ThecircuitasreadisdrawnonpageX".replace("X", str(at + 1)) in "".join(pages)
    assert "Thecircuitasread" in pages[at] and "Lefttothechecker" in pages[at + 1]
    assert len(alternative_texts(reader)) == 1


def test_nothing_is_drawn_that_is_not_known():
    symbols = "# S\n\n```circuit\nreference com\nVin: Vin V, in to com\nR1: R Ω, in to a\nR2: 2*R Ω, a to com\n```\n"
    (shown,) = next(iter(pictures.behind(check_text("s.md", symbols)).values()))
    assert "2*R Ω" in shown.picture.svg and " V</text>" in shown.picture.svg and "free symbols" in shown.caption
    assert not re.search(r">[\d.]+ (V|mA|A)<", shown.picture.svg)  # values at chance are not the circuit's
    loop = "# L\n\n```circuit\nreference com\nVa: 5 V, in to com\nVb: 6 V, in to com\nR: 1 kΩ, in to com\n```\n"
    (shown,) = next(iter(pictures.behind(check_text("l.md", loop)).values()))
    assert "no solution" in shown.caption and "Vb" in shown.picture.svg
    with pytest.raises(Unsolvable):
        solve(check_text("l.md", loop).reading.circuits[0])
    faulty = "# F\n\n```circuit\nreference com\nVa: 5 V, in to com\nR: 1 kΩ, in to com\nR2: many ohms, in to com\n```\n"
    (shown,) = next(iter(pictures.behind(check_text("f.md", faulty)).values()))
    assert "could not be read" in shown.caption and "5 mA" not in shown.picture.svg


def test_more_parts_than_can_be_read_are_not_drawn_and_that_is_said():
    lines = "\n".join(f"R{k}: 1 kΩ, a{k} to com" for k in range(pictures.MOST_PARTS + 1))
    report = check_text("m.md", f"# M\n\n```circuit\nreference com\n{lines}\n```\n")
    (shown,) = next(iter(pictures.behind(report).values()))
    assert shown.picture is None and str(pictures.MOST_PARTS + 1) in shown.caption
    assert shown.caption in to_html(report) and flat(shown.caption) in flat(text_of(read(report)))
    assert typst_pictures.large_drawings(pictures.behind(report), frozenset()) == ""
