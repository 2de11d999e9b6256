"""What stands behind a quantity: ``due to Vb and Ia``, ``without RL``, ``in case hot``, ``at 50 Hz``, ``of bridge``."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

from calccheck.formula import NO_QUALIFIERS, Change, Node, Qualifiers, Reference
from calccheck.read.cursor import Cursor
from calccheck.read.numbers_with_units import hertz, number_at
from calccheck.read.tokens import Token
from calccheck.read.words import QUALIFIER_WORDS
from calccheck.units import UNITS


def qualifiers(c: Cursor) -> Qualifiers:
    """``due to Vb and Ia``, ``without RL``, ``with RL as 10 kΩ``, ``in case hot``, ``at 50 Hz``, ``of bridge``."""
    found = NO_QUALIFIERS
    while c.now.kind == "word" and c.now.text in QUALIFIER_WORDS:
        t = c.take()
        if t.text == "due":
            once(c, found.due_to, t)
            found = replace(found, due_to=sources(c))
        elif t.text in ("without", "with"):
            found = replace(found, changes=(*found.changes, change(c, t)))
        elif t.text == "in":
            once(c, found.case, t)
            found = replace(found, case=case(c))
        elif t.text == "at":
            once(c, found.frequency is not None, t)
            found = replace(found, frequency=frequency(c))
        else:
            once(c, found.circuit, t)
            found = replace(found, circuit=c.name("a circuit's name behind of"))
    return found


def once(c: Cursor, present: object, t: Token) -> None:
    """A qualifier that may stand only once."""
    if present:
        c.fail(f"{t.text} stands twice behind one quantity", t)


def sources(c: Cursor) -> tuple[str, ...]:
    """``to Vb and Ia``."""
    c.keyword("to", "due")
    names = [c.name("a source's name behind due to")]
    while c.now.kind == "word" and c.now.text == "and":
        c.take()
        names.append(c.name("a source's name behind and"))
    return tuple(names)


def change(c: Cursor, t: Token) -> Change:
    """``without RL``, ``with RL open``, ``with RL shorted``, ``with RL as 10 kΩ``."""
    part = c.name(f"a part's name behind {t.text}")
    if t.text == "without":
        return Change(part, "without", c.span(t.start))
    how = c.take()
    if how.text in ("open", "shorted"):
        return Change(part, "open" if how.text == "open" else "shorted", c.span(t.start))
    if how.text != "as":
        c.fail(f"expected open, shorted or as behind with {part}, found {c.shown(how)}", how)
    return Change(part, "as", c.span(t.start), replacement(c))


def replacement(c: Cursor) -> Node:
    """One value, value code or name behind ``as``."""
    t = c.take()
    if t.kind == "number":
        after = c.now
        if after.kind == "word" and after.start == t.end and after.text not in UNITS:
            c.take()  # a value code such as 4k7: the circuit's own reading knows what it means
            return Reference(t.text + after.text, c.span(t.start), text=t.text + after.text)
        return number_at(c, t)
    if t.kind in ("word", "braced"):
        return Reference(t.text, c.span(t.start), text=t.text)
    c.fail(f"expected a value or a name behind as, found {c.shown(t)}", t)


def case(c: Cursor) -> str:
    """``case hot and windy``: the words up to the next qualifier, operator or relation."""
    c.keyword("case", "in")
    words = [c.name("a case's name")]
    while c.now.kind in ("word", "number") and c.now.text not in QUALIFIER_WORDS:
        words.append(c.take().text)
    return " ".join(words)


def frequency(c: Cursor) -> Fraction:
    """``50 Hz`` or ``dc``, in hertz."""
    t = c.take()
    if t.kind == "word" and t.text == "dc":
        return Fraction(0)
    if t.kind == "number":
        found = hertz(number_at(c, t))
        if found is not None:
            return found
    c.fail(f"expected a frequency (50 Hz, 314 rad/s) or dc behind at, found {c.shown(t)}", t)
