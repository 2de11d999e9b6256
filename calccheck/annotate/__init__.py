"""Outputs of a report: each a function of reports to text or bytes."""
