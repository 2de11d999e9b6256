"""Printed numbers and the units behind them."""

from __future__ import annotations

import math
import re
from decimal import Decimal, InvalidOperation
from fractions import Fraction
from typing import NoReturn

from calccheck.formula import Node, Number
from calccheck.read.cursor import Cursor
from calccheck.read.tokens import Token, superscript
from calccheck.read.words import FUNCTIONS
from calccheck.units import HERTZ, NONE, PLAIN, UNITS, Unit, power, times

_CODE = re.compile(r"\d*[RKkMmµunpf]\d*")


def hertz(node: Node) -> Fraction | None:
    """A printed frequency in hertz, an angular one (rad/s) over 2π; ``None`` for anything else."""
    if not isinstance(node, Number) or node.unit.dimension != HERTZ:
        return None
    value = Fraction(node.digits) * node.unit.factor
    if node.unit.text.endswith("Hz"):
        return value
    return value / (2 * Fraction(math.pi)) if node.unit.text in ("rad/s", "mrad/s") else None


def number_at(c: Cursor, t: Token) -> Node:
    """A number and the unit behind it."""
    follows = c.now
    if follows.kind == "word" and follows.start == t.end and follows.text not in UNITS and follows.text != "π":
        glued(c, t, follows)
    try:
        digits = Decimal(t.text)
    except InvalidOperation:  # an exponent of twenty digits
        c.fail("a number out of range", t)
    if abs(digits.adjusted()) > 300:
        c.fail("a number out of range", t)
    unit, unit_words = unit_behind(c)
    return Number(digits, c.span(t.start), unit, unit_words, "e" in t.text.lower())


def glued(c: Cursor, t: Token, word: Token) -> NoReturn:
    """``2R1``, ``4k7``, ``4.7kOhm``: a number with something unknown right behind it."""
    written = t.text + word.text
    if _CODE.fullmatch(written):
        c.fail(f"{written} may be a value code or a product; write the value with its unit, or 2 × R", t)
    if word.text.lower().endswith(("ohm", "ohms")):
        prefix = word.text[: -4 if word.text.endswith("s") else -3]
        right = f"{t.text} {prefix.replace('K', 'k')}Ω"
        c.fail(f"{word.text} is no unit here; write {right}", word)
    if word.text[0] in "πω":
        c.fail(f"{word.text} reads as one name; part the factors: {t.text}{word.text[0]} × {word.text[1:]}", word)
    c.fail(f"{written} is no number with a unit; write {t.text} × {word.text} for a product", word)


def unit_behind(c: Cursor) -> tuple[Unit, tuple[str, ...]]:
    """The unit at this place, ``PLAIN`` where none stands: ``mm²``, ``V/ms``, ``Ω·mm²/m``, ``J/(kg·K)``."""
    first = unit_word(c)
    if first is None:
        return PLAIN, ()
    unit, found = first
    while c.is_operator("÷", "·"):
        mark, sign = c.at, -1 if c.take().text == "÷" else 1
        bracket = sign < 0 and c.is_operator("(") and c.take()
        further = unit_word(c)
        if further is None:
            c.at = mark
            break
        unit, found = times(unit, further[0], sign), (*found, *further[1])
        while bracket and c.is_operator("·"):
            c.take()
            more = unit_word(c)
            if more is None:
                break
            unit, found = times(unit, more[0], -1), (*found, *more[1])
        if bracket:
            if not c.is_operator(")"):
                c.at = mark
                break
            c.take()
    return unit, found


def unit_word(c: Cursor) -> tuple[Unit, tuple[str, ...]] | None:
    """One unit, raised to a power where one stands behind it."""
    t = c.now
    text = t.text if t.kind == "word" or (t.kind == "operator" and t.text in "%°") else ""
    known = UNITS.get(text)
    after = c.seen[c.at + 1] if known else t
    if known is None or (text in FUNCTIONS and after.text == "(" and after.start == t.end):
        return None
    c.take()
    exponent = 1
    if c.now.kind == "superscript" and len(c.now.text) <= 4:
        exponent = superscript(c.take().text)
    elif c.is_operator("^") and c.seen[c.at + 1].kind == "number" and known.dimension != NONE:
        c.take()
        raised = c.take()
        if not (raised.text.isdigit() and len(raised.text) <= 4):
            c.fail("a unit is raised to a whole number", raised)
        exponent = int(raised.text)
    if not 0 < abs(exponent) <= 9:
        c.fail("a unit is raised to a small whole number", t)
    return (power(known, exponent) if exponent != 1 else known), (text,)
