"""The usual slips of the pen on a line of a circuit block: what each is called and how the line reads without it.

The table is asked only about a line that cannot be read, and its answer is offered only when the whole line then reads.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import partial

from calccheck.read.names import NODE, WORD
from calccheck.source import Piece, Span, whole
from calccheck.units import UNITS


@dataclass(frozen=True, slots=True)
class Mend:
    """A corrected line, what was wrong, and where."""

    line: str
    reason: str
    span: Span


@dataclass(frozen=True, slots=True)
class _Slip:
    """``write``: the text in place of a match, or the match itself where it is none. ``reason`` may hold both."""

    pattern: re.Pattern[str]
    write: Callable[[re.Match[str]], str]
    reason: str


def mended(line: Piece, reads: Callable[[Piece], bool]) -> Mend | None:
    """The line without the slips that the table knows, when ``reads`` finds that it then reads."""
    code = line.text.partition("#")[0].rstrip()
    rest = line.text[len(code) :].rstrip()
    text, reasons, first = code, [], None
    for slip in _SLIPS:
        m = next((m for m in slip.pattern.finditer(text) if _changed(slip, m)), None)
        if m is None:
            continue
        first = first or line.span(*_within(m, code))
        reasons.append(slip.reason.format(found=m[0].strip(" ,"), written=slip.write(m).strip(" ,")))
        text = slip.pattern.sub(partial(_rewritten, slip), text)
    if first is None or not reads(whole(text)):
        return None
    return Mend(text + rest, "; ".join(reasons), first)


def _changed(slip: _Slip, m: re.Match[str]) -> bool:
    """Whether more than the blanks between columns would change."""
    return slip.write(m).split() != m[0].split()


def _rewritten(slip: _Slip, m: re.Match[str]) -> str:
    return slip.write(m) if _changed(slip, m) else m[0]


def _within(m: re.Match[str], code: str) -> tuple[int, int]:
    """The place of a match, without the blanks and commas at its ends."""
    start, end = m.span("at" if "at" in m.re.groupindex else 0)
    shown = m.string[start:end]
    lead = len(shown) - len(shown.lstrip(" \t,"))
    return min(start + lead, len(code)), min(start + len(shown.rstrip(" \t,")), len(code))


# --- units ----------------------------------------------------------------------------------------------------------

_UNIT_WORDS = {
    "ohm": "Ω", "Ω": "Ω", "volt": "V", "v": "V", "amp": "A", "ampere": "A", "a": "A", "siemens": "S", "mho": "S", "farad": "F",
    "f": "F", "henry": "H", "h": "H", "watt": "W", "w": "W", "r": "Ω", "s": "S",
}  # fmt: skip
_PREFIX_WORDS = {
    "K": "k", "kilo": "k", "k": "k", "mega": "M", "meg": "M", "M": "M", "milli": "m", "m": "m", "micro": "µ", "u": "µ", "µ": "µ",
    "nano": "n", "n": "n", "pico": "p", "p": "p", "": "",
}  # fmt: skip


def _spellings() -> Iterator[tuple[str, str]]:
    for word, symbol in _UNIT_WORDS.items():
        for prefix, sign in _PREFIX_WORDS.items():
            for spelt in {
                word,
                word + "s",
                word.capitalize(),
                word.capitalize() + "s",
                word.upper(),
                word.upper() + "S",
            }:
                yield prefix + spelt, sign + symbol


_SPELT = {spelt: symbol for spelt, symbol in _spellings() if spelt not in UNITS}
_LETTERS = {"R": "Ω", "C": "F", "L": "H", "V": "V", "I": "A"}


def _unit(m: re.Match[str]) -> str:
    right = _SPELT.get(m["unit"])
    return f"{m['number']} {right}" if right else m[0]


def _with_unit(m: re.Match[str]) -> str:
    """A value without a unit, with the one that the part's first letter promises."""
    prefix = m["prefix"].replace("K", "k").replace("u", "µ")
    unit = _LETTERS.get(m["letter"], "Ω" if prefix in ("k", "M") else "")
    return f"{m['head']} {prefix}{unit}" if unit else m[0]


# --- nodes ----------------------------------------------------------------------------------------------------------


def _nodes(m: re.Match[str]) -> str:
    """Node names without what may not stand in a name: ``3.3V`` as ``3V3``, ``bat pos`` as ``bat_pos``."""
    return f"{m['lead']} {_node(m['first'])} to {_node(m['second'])}"


def _node(text: str) -> str:
    text = re.sub(r"(?<=\d)\.(\d+)V", r"V\1", text)
    return text[:1] + re.sub(r"[^\w′″']+", "_", text[1:])


def _decimal(m: re.Match[str]) -> str:
    return f" max {int(m['over']) / int(m['under']):g} {m['unit']}" if int(m["under"]) else m[0]


# --- the table ------------------------------------------------------------------------------------------------------

_NUMBER = r"[+\-−]?\d*\.?\d+"
_END = r"(?=\s*(?:,|$))"
_PAIR = rf"{NODE}\s+to\s+{NODE}"
_VALUE = r"(?:[^,{]|\{[^}]*\})*"
_TWO_ENDED = rf"^(?P<lead>\s*{WORD}\s*:(?!\s*(?:op-amp|npn|pnp|transformer)\b){_VALUE},)"
_BETWEEN = r"(?:\s*(?:[-=]*>|--|[-–—→/:~,])\s*|\s+(?:and|To|TO)\s+|\s+)"


def _slip(pattern: str, write: str | Callable[[re.Match[str]], str], reason: str) -> _Slip:
    return _Slip(re.compile(pattern), write if callable(write) else lambda m: m.expand(write), reason)


# A group called at is the place to show; without one it is the whole match.
_SLIPS = [
    _slip(r"(?<![\w.])\d{1,3}(?: \d{3})+(?![\w.])", lambda m: m[0].replace(" ", ""),
          "{found} is grouped by plain blanks; write {written}, or thin or no-break spaces"),
    _slip(r"(?<![\w{.])\d+,(?!\d{3}(?!\d))\d+", lambda m: m[0].replace(",", "."),
          "{found} has a decimal comma; a number is written with a point: {written}"),
    _slip(r";\s*(?=.)", ", ", "a part's line is parted by commas"),
    _slip(r"^\s*(?i:reference|ref|ground)\b[\s:=]+(?P<node>\S+)\s*$", r"reference \g<node>", "the reference is stated as {written}"),
    _slip(rf"^(?P<lead>\s*)(?P<first>{WORD})[\s\-.]+(?P<second>\w+)(?=\s*:)", r"\g<lead>\g<first>\g<second>",
          "{found} is no name; a name is letters, digits and _"),
    _slip(rf"^(?P<name>\s*{WORD})\s*=\s*", r"\g<name>: ", "a part's name is followed by a colon"),
    _slip(rf"^(?P<name>\s*{WORD})\s+(?=[\d(]|(?:short|open|op-amp|npn|pnp|diode|transformer)\b)", r"\g<name>: ",
          "there is no colon behind the name"),
    _slip(r"(?<=:)\s*(?i:op[ _-]?amp|opa)\b", " op-amp", "the word is op-amp"),
    _slip(r"(?<=:)\s*(?i:shorted|short|open|npn|pnp|diode)\b", lambda m: " " + m[0].strip().lower().replace("shorted", "short"),
          "{found} is written {written}"),
    _slip(rf"(?<=:)\s*(?P<nodes>{_PAIR})\s*,\s*(?P<value>[^,]+?)\s*{_END}", r" \g<value>, \g<nodes>",
          "the value stands before the nodes"),
    _slip(r"(?<![\w.])(?P<number>\d*\.?\d+)\s*(?P<prefix>[GMkKmµunp])\s+(?P<unit>Ω|[Oo]hms?|[VAFHS])\b",
          r"\g<number> \g<prefix>\g<unit>", "a prefix and its unit are one word: {written}"),
    _slip(r"(?<![\w.])(?P<number>\d*\.?\d+)\s*(?P<unit>[kmµ]?[VA])\s*(?:dc|DC)\b", r"\g<number> \g<unit>",
          "a source without a frequency is DC: {written}"),
    _slip(r"(?<![\w.])(?P<number>\d*\.?\d+)\s*(?P<unit>[^\W\d_]+)(?![\w:])(?!\s+to\b)", _unit, "{found} is written {written}"),
    _slip(rf"^(?P<head>\s*(?P<letter>[^\W\d_])\w*\s*:\s*(?P<at>{_NUMBER}))\s*(?P<prefix>[GMkKmµunp]?){_END}", _with_unit,
          "the value has no unit"),
    _slip(rf"{_TWO_ENDED}(?P<at>\s*(?P<first>{NODE}){_BETWEEN}(?P<second>{NODE})){_END}", r"\g<lead> \g<first> to \g<second>",
          "two nodes are joined by to"),
    _slip(rf"{_TWO_ENDED}(?P<at>\s*(?P<first>[^,±=]+?)\s+to\s+(?P<second>[^,±=]+?)){_END}", _nodes,
          "a node's name is letters, digits and _"),
    _slip(rf"(?P<value>:{_VALUE}[^\s,])(?P<at>\s+(?P<nodes>{_PAIR})){_END}", r"\g<value>, \g<nodes>",
          "there is no comma before the nodes"),
    _slip(rf"(?P<lead>:{_VALUE}\w)(?P<at>\s+(?P<size>\d*\.?\d+\s*%)){_END}", r"\g<lead> ±\g<size>", "a tolerance is written ±5 %"),
    _slip(rf"(?<=,)\s*(?P<size>\d*\.?\d+\s*%){_END}", r" ±\g<size>", "a tolerance is written ±5 %"),
    _slip(rf"(?<=,)\s*(?:max\.?\s*)?(?P<over>\d+)\s*/\s*(?P<under>\d+)\s*(?P<unit>[kmµ]?[WVA]){_END}", _decimal,
          "a rating is written as one number: {written}"),
    _slip(rf"(?<=,)\s*(?:(?i:max\.|max|rated|rating|maximum|limit)\s*)?(?P<size>\d*\.?\d+\s*[kmµ]?[WVA])(?:\s*max\.?)?{_END}",
          r" max \g<size>", "a rating is written {written}"),
]  # fmt: skip
