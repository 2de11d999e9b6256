"""Every finding that the program can make beside the verdicts of claims: key, severity, what it is, where the docs tell more.

One row a kind; the reading and judging stages take severity from here, the outputs the title and anchor.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from calccheck.source import Span

Severity = Literal["error", "caution", "note"]


@dataclass(frozen=True, slots=True)
class Finding:
    """Something to be said about the sheet that is not the verdict of a claim. ``kind``: a key of ``RULES``."""

    kind: str
    severity: Severity
    message: str
    span: Span
    suggestion: str = ""


@dataclass(frozen=True, slots=True)
class Rule:
    """A kind of finding. ``anchor``: heading in docs/sheet-language.md or docs/how-it-checks.md."""

    severity: Severity
    title: str
    anchor: str


RULES: dict[str, Rule] = {
    "front-matter": Rule("error", "The front matter cannot be read", "sheet-language.md#front-matter"),
    "setting": Rule("error", "A setting is unknown or has no such value", "sheet-language.md#settings"),
    "circuit-line": Rule("error", "A line of a circuit block cannot be read", "sheet-language.md#the-circuit-block"),
    "circuit-name": Rule("error", "A name in a circuit block is not allowed or used twice", "sheet-language.md#names"),
    "not-solved-here": Rule("error", "A part that this version reads but does not solve", "limits.md#not-solved"),
    "structure": Rule("error", "The circuit has no single solution", "how-it-checks.md#structure"),
    "state": Rule("error", "A part is not in the state that its hand model assumes", "how-it-checks.md#assumed-states"),
    "routes": Rule("error", "The two routes disagree", "how-it-checks.md#two-routes"),
    "letter": Rule("caution", "A part's first letter contradicts its unit", "sheet-language.md#the-circuit-block"),
    "letter-case": Rule("caution", "Two names differ only in upper and lower case", "sheet-language.md#names"),
    "negative-resistance": Rule("caution", "A resistance below zero", "how-it-checks.md#structure"),
    "rating": Rule("error", "A part beyond its rating, or a rating not checked", "tolerances.md#ratings"),
    "preferred": Rule("caution", "A resistance that is no preferred value", "tolerances.md#preferred-values"),
    "dimension": Rule("error", "The dimensions do not fit", "sheet-language.md#expressions-and-units"),
    "untraced": Rule("caution", "A printed number stands for nothing in the sheet", "sheet-language.md#chains"),
    "waiver": Rule("error", "A waiver that cannot be read, has lapsed, or waives nothing", "sheet-language.md#waivers"),
    "waiver-idle": Rule("caution", "A waiver whose claim stands without it", "sheet-language.md#waivers"),
    "limit": Rule("error", "More than the program reads", "limits.md#sizes"),
    "fence": Rule("error", "A fence is not closed, or called almost as one that is read", "sheet-language.md#a-sheet"),
    "signature": Rule("error", "A signature cannot be read or is void", "reviewing.md#signatures"),
    "reference": Rule(
        "error", "A value from another sheet does not stand there", "reviewing.md#values-from-other-sheets"
    ),
    "reference-open": Rule(
        "caution", "A value from another sheet was not looked up", "reviewing.md#values-from-other-sheets"
    ),
    "hazard": Rule("caution", "A hazard that the sheet itself names", "reviewing.md#cautions"),
    "touch-voltage": Rule("caution", "Voltages dangerous to touch", "reviewing.md#cautions"),
    "mains": Rule("caution", "Sources at mains frequency", "reviewing.md#cautions"),
    "stored-energy": Rule("caution", "Dangerous energy stored in a capacitor", "reviewing.md#cautions"),
    "mark": Rule("error", "A mark of an earlier run stands where it does not belong", "reviewing.md#marked-copies"),
}
