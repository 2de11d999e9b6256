"""The third stage: from claims and solutions to verdicts."""
