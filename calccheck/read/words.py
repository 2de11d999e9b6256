"""The words of the language."""

from __future__ import annotations

FUNCTIONS = {
    "sqrt", "exp", "ln", "log10", "sin", "cos", "tan", "asin", "acos", "atan", "abs", "min", "max", "dB",
}  # fmt: skip
PREFIXES = {"min", "max", "worst", "rss", "mag", "arg", "re", "im", "rms", "sigma", "yield"}
QUALIFIER_WORDS = {"due", "without", "with", "in", "at", "of"}
RESERVED = FUNCTIONS | PREFIXES | QUALIFIER_WORDS | {
    "to", "and", "as", "from", "open", "short", "shorted", "given", "case", "reference", "e", "j",
}  # fmt: skip
