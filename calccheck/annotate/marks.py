"""The table of marks: sign, word and colour of every verdict, always shown together, never colour alone.

Inks are dark enough for text on white and on their own tint, and the night pair likewise on black: a contrast of at least
4.5 to 1 (WCAG 2.2, success criterion 1.4.3).
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Mark:
    """One mark. ``ink`` and ``tint``: text and background by day, as RGB hex; ``night_…`` on a dark screen."""

    sign: str
    word: str
    ink: str
    tint: str
    night_ink: str
    night_tint: str

    @property
    def label(self) -> str:
        """Sign and word: ``✗ differs``."""
        return f"{self.sign} {self.word}"


MARKS: dict[str, Mark] = {
    "differs": Mark("✗", "differs", "#a8201a", "#fbe3e1", "#ff9d96", "#43201e"),
    "unchecked": Mark("?", "unchecked", "#6b5200", "#faf0cc", "#ecc95c", "#382f10"),
    "error": Mark("!", "error", "#a8201a", "#fbe3e1", "#ff9d96", "#43201e"),
    "caution": Mark("!", "caution", "#963a00", "#fce8da", "#ffab74", "#412716"),
    "note": Mark("!", "note", "#4a4f55", "#eceef0", "#c3c9cf", "#2b2f33"),
    "accepted": Mark("◇", "accepted", "#5d3a8e", "#eee8f6", "#c9b1ee", "#2f2540"),
    "rounded": Mark("≈", "rounded", "#1b5e8a", "#e3eff6", "#8cc7ee", "#162f40"),
    "agrees": Mark("✓", "agrees", "#1d6b3a", "#e5f2e8", "#8bd3a2", "#17321f"),
    "given": Mark("○", "given", "#4a4f55", "#eceef0", "#c3c9cf", "#2b2f33"),
}
"""Worst first: verdicts of claims, and the three severities of findings between them."""
