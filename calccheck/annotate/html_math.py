"""Expression nodes as MathML Core (W3C): what is written is what is set, each member of a chain as a formula of its own."""

from __future__ import annotations

from collections.abc import Iterable

from calccheck.annotate.html_words import code, said
from calccheck.annotate.maths_lines import around_name, is_bracket
from calccheck.annotate.numbers_written import number_written
from calccheck.annotate.record import Entry
from calccheck.formula import Binary, Call, Group, Node, Number, Range, Reference, Unary
from calccheck.model import Member, Report

_OPERATORS = {"-": "−"}
_THIN = '<mspace width="0.2em"></mspace>'


def formula_html(sheet: str, members: Iterable[Member]) -> str:
    """Members with their relations, one behind the other, so that a chain may break between them."""
    return " ".join(_formula(sheet, m) for m in members)


def _formula(sheet: str, m: Member) -> str:
    sign = f"<mo>{said(m.relation)}</mo>" if m.relation else ""
    return f"<math>{sign}{mathml(m.node, sheet)}</math>"


def written(report: Report, entry: Entry) -> str:
    """A claim as written; one in dollar maths as the formula that was read, which is what its markup means."""
    members = report.claims[int(entry.key[1:]) - 1].claim.members if "\\" in entry.text else ()
    return formula_html(report.reading.sheet.text, members) if members else code(entry.text)


def mathml(node: Node, sheet: str) -> str:
    """MathML of an expression. ``sheet``: the sheet's text, from which numbers are set as written."""
    match node:
        case Number():
            return _text(number_written(node, sheet))
        case Reference():
            return _over(node, sheet) if node.bracket else _name(node)
        case Unary(sign="√"):
            return f"<msqrt>{mathml(_bare(node.operand), sheet)}</msqrt>"
        case Unary():
            return f'<mo form="prefix">{_OPERATORS.get(node.sign, node.sign)}</mo>{mathml(node.operand, sheet)}'
        case Binary():
            return _binary(node, sheet)
        case Group():
            unit = _THIN + _text(node.unit.text) if node.unit.text else ""
            inner = mathml(node.inner, sheet)
            return _bracketed(inner) + unit if unit or is_bracket(node, sheet) else f"<mrow>{inner}</mrow>"
        case Call():
            return _call(node, sheet)
        case Range():
            middle = "±" if node.centred else "…"
            return f"{mathml(node.low, sheet)}<mo>{middle}</mo>{mathml(node.high, sheet)}"


def _binary(node: Binary, sheet: str) -> str:
    left, right = node.left, node.right
    if node.operator == "÷":
        return f"<mfrac>{_row(_bare(left), sheet)}{_row(_bare(right), sheet)}</mfrac>"
    if node.operator == "^":
        return f"<msup>{_row(left, sheet)}{_row(_bare(right), sheet)}</msup>"
    sign = _OPERATORS.get(node.operator, node.operator)
    between = _THIN if node.operator == "·" else f"<mo>{sign}</mo>"
    return f"{mathml(left, sheet)}{between}{mathml(right, sheet)}"


def _call(node: Call, sheet: str) -> str:
    inner = "<mo>,</mo>".join(mathml(a, sheet) for a in node.arguments)
    if node.function == "sqrt":
        return f"<msqrt>{inner}</msqrt>"
    if node.function == "abs":
        return f"<mrow><mo>|</mo>{inner}<mo>|</mo></mrow>"
    return _text(node.function) + _bracketed(inner)


def _over(node: Reference, sheet: str) -> str:
    """A word over a bracket, such as ``max (V_adc / Vref)``."""
    inner = "".join((f"<mo>{said(sign)}</mo>" if sign else "") + mathml(part, sheet) for sign, part in node.bracket)
    return _text(node.prefix) + _THIN + _bracketed(inner)


def _name(node: Reference) -> str:
    """A name with its subscript lowered, its prefix before it and its qualifiers behind it in words."""
    before, behind = around_name(node)
    if node.letter and node.subscripts:
        core = f"<msub><mi>{said(node.letter)}</mi>{_text(','.join(node.subscripts))}</msub>"
    else:
        core = f"<mi>{said(node.word)}</mi>"
    return (_text(before) + _THIN if before else "") + core + (_THIN + _text(behind) if behind else "")


def _text(words: str) -> str:
    return f"<mtext>{said(words.replace(' ', chr(0xA0)))}</mtext>"


def _row(node: Node, sheet: str) -> str:
    return f"<mrow>{mathml(node, sheet)}</mrow>"


def _bracketed(inner: str) -> str:
    return f"<mrow><mo>(</mo>{inner}<mo>)</mo></mrow>"


def _bare(node: Node) -> Node:
    """The inside of a plain bracket."""
    return node.inner if isinstance(node, Group) and not node.unit.text else node
