"""Values from other sheets, ``given Vbus = 12.52 V from TS-101``: whether that sheet claims them, and whether they still agree."""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence

from calccheck.arithmetic import Amount, size
from calccheck.formula import NO_QUALIFIERS, Reference
from calccheck.judge.rounding import Printed, coarse, equal, printed, within
from calccheck.model import Finding, Judged, Reading, Report
from calccheck.printing import shown
from calccheck.rules import RULES

# The reports of the calc sheets of a number, each judged by itself; more than one where a number was given twice.
Find = Callable[[str], Sequence[Report]]

_STANDS = ("agrees", "rounded", "accepted", "given")


def reference_findings(reading: Reading, judged: Sequence[Judged], find: Find | None) -> list[Finding]:
    """What is wrong with the values that a sheet takes from others. Without ``find`` none can be looked up, which is said."""
    cited = [j for j in judged if j.claim.from_sheet and j.verdict == "given"]
    if find is None:
        why = "was not looked up: no other sheets are at hand"
        return [_finding(j, f"{j.quantity} from {j.claim.from_sheet} {why}", "reference-open") for j in cited]
    own = reading.title.get("sheet", "")
    found: list[Finding] = []
    circles: set[str] = set()
    for j in cited:
        number = j.claim.from_sheet
        message = "a sheet is no source for itself" if number == own else _fault(j, number, find(number))
        if message:
            found.append(_finding(j, message))
        circle = _circle(own, number, find) if own and number != own and number not in circles else []
        if circle:
            circles.add(number)
            way = " → ".join([own, *circle])
            found.append(
                _finding(j, f"the sheets rest on each other: {way}; one of them must work its value out alone")
            )
    return found


def _finding(j: Judged, message: str, kind: str = "reference") -> Finding:
    return Finding(kind, RULES[kind].severity, message, j.claim.span)


def _circle(own: str, number: str, find: Find) -> list[str]:
    """The numbers from this one back to the sheet itself, each resting on the next; nothing where no way leads back."""
    ways: list[list[str]] = [[number]]
    met = {number}
    while ways:
        way = ways.pop()
        for report in find(way[-1]):
            for claim in report.reading.claims:
                if claim.from_sheet == own:
                    return [*way, own]
                if claim.from_sheet and claim.from_sheet not in met:
                    met.add(claim.from_sheet)
                    ways.append([*way, claim.from_sheet])
    return []


# --- one value ------------------------------------------------------------------------------------------------------


def _fault(here: Judged, number: str, sheets: Sequence[Report]) -> str:
    """Why a value does not stand in the sheet that it is taken from; nothing where it does."""
    if not sheets:
        return f"there is no sheet {number} to hold this against; correct the number, or bring the sheet"
    if len(sheets) > 1:
        names = " and ".join(sorted(r.reading.sheet.name for r in sheets))
        return f"several sheets are numbered {number}: {names}; a number belongs to one sheet"
    sheet = sheets[0]
    named = [j for j in sheet.claims if _name(here.quantity) in _names(j)]
    among = [j for j in named or sheet.claims if j.claimed is not None]
    same = [j for j in among if _agrees(here, j)]
    if any(j.verdict in _STANDS for j in same):
        return ""
    if same or (named and not among):
        j = (same or named)[0]
        return f"{number} has {_told(j)} in line {_line(j, sheet)}, but that claim {_is(j)}"
    near = _nearest(here, among) or (among[0] if named else None)
    there = f"{_told(near)} in line {_line(near, sheet)}" if near is not None else ""
    if named:
        return f"{here.quantity} is {_value(here)} here, but {number} has {there}"
    nothing = f"{number} claims nothing called {here.quantity}, and no value {_value(here)}"
    return f"{nothing}; nearest is {there}" if there else nothing


def _name(text: str) -> str:
    """A name or quantity as it is compared with others: ``Vbus``, ``V_bus`` and ``V_{bus}`` are one."""
    return re.sub(r"[^\w′″']|_", "", text).casefold()


def _names(j: Judged) -> set[str]:
    """The plain names and quantities that a claim sets equal to its value; those under conditions are others."""
    nodes = (m.node for m in j.claim.members if m.relation in ("", "="))
    return {_name(n.word) for n in nodes if isinstance(n, Reference) and n.qualifiers == NO_QUALIFIERS and not n.prefix}


def _agrees(here: Judged, there: Judged) -> bool:
    """Whether the value here is the one printed there, or a right rounding of it and of the truth there."""
    a, b = here.claimed, there.claimed
    if a is None or b is None or a.dimension != b.dimension:
        return False
    if equal(a.value, b.value):
        return True
    p = _printed(here)
    truth = there.computed or b
    if p is None or p.digits == 0 or isinstance(b.value, complex) or isinstance(truth.value, complex):
        return False
    fits = all(within(p, v) for v in (b.value, truth.value))
    return fits and not coarse(p, truth.value)


def _printed(j: Judged) -> Printed | None:
    return printed(j.claim.members[-1].node)


def _nearest(here: Judged, among: Sequence[Judged]) -> Judged | None:
    """The claim of the same dimension whose value is nearest."""
    alike = [(_far(here.claimed, j.claimed), k) for k, j in enumerate(among)]
    near = [(far, k) for far, k in alike if far is not None]
    return among[min(near)[1]] if near else None


def _far(a: Amount | None, b: Amount | None) -> float | None:
    return float(size(a.value - b.value)) if a is not None and b is not None and a.dimension == b.dimension else None


def _told(j: Judged) -> str:
    """A claim in short: its quantity and its value."""
    return f"{j.quantity} = {_value(j)}" if j.claimed is not None else " ".join(j.claim.text.split())


def _value(j: Judged) -> str:
    """The value as printed."""
    for m in reversed(j.claim.members):
        p = printed(m.node)
        if p is not None and j.claimed is not None and p.amount == j.claimed:
            return m.text
    return shown(j.claimed, j.claimed_unit) if j.claimed is not None else "no value"


def _line(j: Judged, sheet: Report) -> int:
    return sheet.reading.sheet.line_column(j.claim.span.start)[0]


def _is(j: Judged) -> str:
    return "differs from what the program finds there" if j.verdict == "differs" else f"is {j.verdict} there"
