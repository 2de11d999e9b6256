"""Expression nodes set as mathematics: typst math source in which every name and number of the sheet is a string literal.

What is written is what is set: nothing is simplified or reordered; only the bracket around a whole numerator, denominator,
root or exponent gives way to the bar, the root sign or the raising.
"""

from __future__ import annotations

from calccheck.annotate.characters import told
from calccheck.annotate.maths_lines import around_name, is_bracket
from calccheck.annotate.numbers_written import number_written
from calccheck.annotate.typst_text import literal
from calccheck.formula import Binary, Call, Group, Node, Number, Range, Reference, Unary

_RELATIONS = {"=": "=", "≈": "approx", "<": "<", "≤": "lt.eq", ">": ">", "≥": "gt.eq", "": ""}
_OPERATORS = {"+": "+", "-": "minus", "×": "times", "∥": "parallel", "·": "thin"}
_SIGNS = {"+": "#positive;", "-": "#negative;"}  # no operators: nothing stands before them to be added to
_MOST_BARS = 2  # a fraction within a fraction within a fraction is set with a slash


def relation(sign: str) -> str:
    """The typst symbol of a relation."""
    return _RELATIONS[sign]


def mathematics(node: Node, sheet: str, bars: int = 0) -> str:
    """Typst math source of an expression.

    ``sheet``: the sheet's text, from which numbers are set as written. ``bars``: fraction bars around the node.
    """
    match node:
        case Number():
            return _upright(number_written(node, sheet))
        case Reference():
            return _over(node, sheet, bars) if node.bracket else _name(node)
        case Unary(sign="√"):
            return f"sqrt({mathematics(_bare(node.operand), sheet, bars)})"
        case Unary():
            return f"{_SIGNS[node.sign]}{mathematics(node.operand, sheet, bars)}"
        case Binary():
            return _binary(node, sheet, bars)
        case Group():
            unit = f" thin {_upright(node.unit.text)}" if node.unit.text else ""
            inner = mathematics(node.inner, sheet, bars)
            return f"({inner}){unit}" if unit or bars >= _MOST_BARS or is_bracket(node, sheet) else inner
        case Call():
            return _call(node, sheet, bars)
        case Range():
            middle = "plus.minus" if node.centred else "dots.h"
            return f"{mathematics(node.low, sheet, bars)} {middle} {mathematics(node.high, sheet, bars)}"


def _binary(node: Binary, sheet: str, bars: int) -> str:
    if node.operator == "÷" and bars < _MOST_BARS:
        over, under = (mathematics(_bare(side), sheet, bars + 1) for side in (node.left, node.right))
        return f"frac({over}, {under})"
    left = mathematics(node.left, sheet, bars)
    if node.operator == "^":
        if isinstance(node.left, Reference) and left.startswith("attach(") and left.endswith(")"):
            return f"{left[:-1]}, t: {mathematics(_bare(node.right), sheet, _MOST_BARS)})"  # above its subscript
        return f"attach({left}, t: {mathematics(_bare(node.right), sheet, _MOST_BARS)})"
    sign = {"÷": "slash", "∠": "angle"}.get(node.operator) or _OPERATORS[node.operator]
    return f"{left} {sign} {mathematics(node.right, sheet, bars)}"


def _call(node: Call, sheet: str, bars: int) -> str:
    inner = " comma ".join(mathematics(a, sheet, bars) for a in node.arguments)
    if node.function in ("sqrt", "abs"):
        return f"{node.function}({inner})"
    return f"op({literal(node.function)}) ({inner})"


def _bare(node: Node) -> Node:
    """The inside of a plain bracket."""
    return node.inner if isinstance(node, Group) and not node.unit.text else node


def _upright(text: str) -> str:
    return f"#upright({literal(told(text))})"


def _over(node: Reference, sheet: str, bars: int) -> str:
    """A word over a bracket, such as ``max (V_adc / Vref)``."""
    inner = " ".join(f"{relation(sign)} {mathematics(part, sheet, bars)}".strip() for sign, part in node.bracket)
    return f"{_upright(node.prefix)} thin ({inner})"


def _name(node: Reference) -> str:
    """A name in italics with its subscript lowered, its prefix before it and its qualifiers behind it in upright words."""
    before, behind = around_name(node)
    if node.letter and node.subscripts:
        core = f"attach(#slanted({literal(told(node.letter))}), b: {_upright(','.join(node.subscripts))})"
    else:
        core = f"#leaning({literal(told(node.word))})"
    words = [_upright(w) if w else "" for w in (before, behind)]
    return " thin ".join(part for part in (words[0], core, words[1]) if part)
