"""Calc sheets made up for the benchmarks: the same number gives the same sheet. Every claim in them stands.

About 100 lines and 15 claims: front matter, prose with inline claims, a circuit, formulas with numbers put in, a table of the
sources' parts. Values come from ``hand``, which shares nothing with the program.
"""

from __future__ import annotations

import random
import re
import textwrap
from dataclasses import replace

import hand
from families import FAMILIES
from hand import Quantity, worth

_NAME = re.compile(r"[A-Z][a-z]?[A-Za-z0-9_]*")

# What the sheets say between their numbers.
SENTENCES = (
    "The values were taken from the data sheet of the part as delivered, and the tolerance is that of its code letter.",
    "Leads and terminals are shorter than half a metre here, so that their resistance is left out of this sheet.",
    "The supply is regulated at the cabinet; its ripple is well below the last place printed and is not looked at.",
    "All sources act at once unless a qualifier says otherwise, and currents count from the first node to the second.",
    "Ambient temperature is that of the *heated* cabinet; the sheet for the mast box treats the cold case by itself.",
    "The connector is rated for three times this current and need not be looked at again in a later revision.",
    "Readings taken at commissioning agreed with the values below within the **uncertainty** of the meter used.",
    "See the [wiring list](wiring.md) for terminal numbers; only those nodes are named here that carry a claim.",
    "A blown fuse opens the branch completely; a leaking input is covered by the margin that the last section keeps.",
    "The converter samples slowly enough that every capacitor in the circuit has settled before it reads.",
    "Where two sheets name the same node they name the same terminal, and the register lists both.",
    "Loads that run for a few seconds only are left out, because the energy they take is in the battery sheet.",
    "The resistor network comes as one part, so that its values drift together and their ratio stays.",
    "Noise and settling are treated elsewhere; this sheet is about direct currents in the steady state.",
    "The figures are printed to one place more than the instrument shows, so that no rounding adds up unseen.",
    "If the part is ever replaced by one of another series, the second section is to be worked again by hand.",
    "The cable screen is earthed at one end only and carries no current of this circuit.",
    "Each source is taken alone first, the others being zeroed: a voltage is shorted, a current is opened.",
)  # fmt: skip
ITEMS = (
    "Sources are taken as ideal; their inner resistance is part of the resistor beside them.",
    "Resistors have their nominal values; the tolerance sheet treats the extremes.",
    "The reference node is the star point in the cabinet.",
    "Temperatures from −10 °C to 40 °C leave all values within their tolerance.",
    "Nothing else hangs on the nodes named here.",
    "The connector's contact resistance (20 mΩ, data sheet) is left out.",
)  # fmt: skip


def sheet(number):
    """The text of one sheet."""
    rng = random.Random(number)
    work = renamed(FAMILIES[number % len(FAMILIES)](rng), number // len(FAMILIES) % 100)
    work = replace(work, figures=rng.choice((4, 4, 5)))
    sections = [
        f"---\nproject: Invented station {number // 40}\nsubject: {work.subject}\nsheet: B-{number:04}\nrevision: "
        f"{rng.choice('ABC')}\nby: QD\ndate: 2026-11-{1 + number % 28:02}\n---",
        f"# {work.subject}",
        "## Purpose", prose(rng, 3),
        "## Basis", "\n".join(f"- {item}" for item in rng.sample(ITEMS, 4)), prose(rng, 3), block(work.parts),
        "## Each source alone", prose(rng, 3), _alone(work), prose(rng, 2),
        "## All sources", prose(rng, 2), _table(work), _total(work), prose(rng, 2),
        "## Load", prose(rng, 3), _load(work), prose(rng, 3),
        "## Conclusion", _conclusion(work), prose(rng, 4),
    ]  # fmt: skip
    return "\n\n".join(sections) + "\n"


def renamed(work, tag):
    """The same work with names that no sheet near it has: R1 becomes R371, RL becomes RL37."""

    def new(name):
        digits = name[-1].isdigit()
        return f"{name[:-1]}{tag}{name[-1]}" if digits else f"{name}{tag}"

    def formula(text):
        return _NAME.sub(lambda m: new(m[0]), text)

    return replace(
        work,
        parts=[replace(p, name=new(p.name)) for p in work.parts],
        load=new(work.load),
        named=[(new(name), formula(text), value) for name, text, value in work.named],
        formulas=[(replace(q, due_to=tuple(map(new, q.due_to))), formula(text)) for q, text in work.formulas],
    )


def prose(rng, sentences):
    return textwrap.fill(" ".join(rng.sample(SENTENCES, sentences)), 100)


def shown(value, unit, work):
    text, unit, _ = hand.printed(value, work.figures, unit)
    return f"{text} {unit}".rstrip()


def block(parts):
    """The circuit as an engineer writes it: values with prefixes, columns in line."""
    rows = [(f"{p.name}: {element(p)},", f"{p.plus} to {p.minus}") for p in parts]
    wide = max(len(left) for left, _ in rows)
    return "\n".join(["```circuit", "reference com", *(f"{left:{wide}} {right}" for left, right in rows), "```"])


def element(p):
    """``4.7 kΩ``: a part's value, which has few figures."""
    text, unit, _ = hand.printed(p.value, 6, {"R": "Ω", "V": "V", "I": "A"}[p.kind])
    return f"{text.rstrip('0').rstrip('.') if '.' in text else text} {unit}"


def _claim(q, work):
    return f"{q.text()} = {shown(worth(q, work.parts), hand.UNITS[q.letter], work)}"


def _alone(work):
    values = {p.name: element(p) for p in work.parts}
    lines = []
    for name, formula, value in work.named:
        lines += _chain(name, formula, values, shown(value, "Ω", work))
        values[name] = shown(value, "Ω", work)
    for q, formula in work.formulas:
        lines += _chain(q.text(), formula, values, shown(worth(q, work.parts), "V", work))
    return "\n".join(["```working", *lines, "```"])


def _chain(name, formula, values, result):
    inset = " " * len(name)
    put_in = _NAME.sub(lambda m: values[m[0]], formula)
    return [f"{name} = {formula}", f"{inset} = {put_in}", f"{inset} = {result}"]


def _table(work):
    sources = hand.sources(work.parts)
    rows = [["", *(f"due to `{s}`" for s in sources), "total"]]
    for letter, name in (("V", work.out), ("I", work.load)):
        asked = [Quantity(letter, (name,), (s,)) for s in sources] + [Quantity(letter, (name,))]
        rows.append([f"`{asked[-1].text()}`", *(shown(worth(q, work.parts), hand.UNITS[letter], work) for q in asked)])
    wide = [max(len(row[k]) for row in rows) for k in range(len(rows[0]))]
    lines = ["| " + " | ".join(f"{cell:{w}}" for cell, w in zip(row, wide, strict=True)) + " |" for row in rows]
    return "\n".join([lines[0], "|" + "|".join("-" * (w + 2) for w in wide) + "|", *lines[1:]])


def _total(work):
    sources = hand.sources(work.parts)
    v = Quantity("V", (work.out,))
    asked = [Quantity("V", (work.out,), (s,)) for s in sources]
    terms = [shown(worth(q, work.parts), "V", work) for q in asked]
    total = terms[0] + "".join(f" − {t[1:]}" if t[0] == "−" else f" + {t}" for t in terms[1:])
    names = " + ".join(q.text() for q in asked)
    return f"The parts add up: `{v.text()} = {names} = {total} = {shown(worth(v, work.parts), 'V', work)}`."


def _load(work):
    """The load's current and power, the power worked from the current as printed: some last places carry its rounding."""
    load = next(p for p in work.parts if p.name == work.load)
    i, p, v = (Quantity(letter, (work.load,)) for letter in "IPV")
    volts, amperes = (shown(worth(q, work.parts), hand.UNITS[q.letter], work) for q in (v, i))
    text, _, factor = hand.printed(worth(i, work.parts), work.figures, "A")
    carried = float(text.replace("−", "-")) * factor
    lines = [
        f"{i.text()} = {v.text()} / {load.name} = {_bracketed(volts)} / {element(load)} = {amperes}",
        f"{p.text()} = {i.text()}² × {load.name}",
        f"{' ' * len(p.text())} = ({amperes})² × {element(load)}",
        f"{' ' * len(p.text())} = {shown(carried**2 * load.value, 'W', work)}",
    ]
    return "\n".join(["```working", *lines, "```"])


def _bracketed(text):
    return f"({text})" if text.startswith("−") else text


def _conclusion(work):
    source = work.parts[0] if work.parts[0].kind != "R" else work.parts[1]
    first, second = Quantity("V", (work.out,)), Quantity("P", (source.name,))
    return (
        f"The node stands at `{_claim(first, work)}`, the first source takes `{_claim(second, work)}`,\n"
        f"and the load sees `{_claim(Quantity('V', (work.load,)), work)}` across it."
    )


if __name__ == "__main__":
    import sys

    print(sheet(int(sys.argv[1])), end="")
