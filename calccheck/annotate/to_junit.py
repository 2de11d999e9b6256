"""Reports as test results, in the XML form that build services have in common, which no standard describes.

A suite for each sheet and a case for each claim: what differs is a failure, what could not be checked or read an error, what
was held against nothing or is accepted all the same was skipped.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import chain
from xml.etree import ElementTree
from xml.etree.ElementTree import Element, SubElement

from calccheck.annotate.marks import MARKS
from calccheck.annotate.record import comment_text
from calccheck.annotate.remarks import Remark, remarks
from calccheck.annotate.to_json import summary
from calccheck.annotate.to_terminal import totals
from calccheck.annotate.visible import one_line, visible
from calccheck.model import Report

_OUTCOMES = {"differs": "failure", "unchecked": "error", "error": "error", "accepted": "skipped", "given": "skipped"}
_COUNTS = {"failure": "failures", "error": "errors", "skipped": "skipped"}


def to_junit(reports: Sequence[Report], program: str, problems: Sequence[str] = ()) -> str:
    """The XML, UTF-8: totals and ``problems`` (what could not be read) first, then the sheets, worst first.

    Of the text nothing is left that XML 1.0 does not allow. No times are given: the same sheets give the same bytes.
    """
    sheets = [r for r in reports if r.reading.is_calc]
    found = [(report, remarks(report)) for report in sheets]
    found.sort(key=lambda pair: min((r.rank for r in pair[1]), default=(len(MARKS), 0.0)))
    root = Element("testsuites", {"name": f"calccheck {program}"})
    root.append(_run_suite(reports, sheets, problems))
    root.extend(_suite(report, said) for report, said in found)
    for suite in root:
        _count(suite, [suite])
    _count(root, list(root))
    ElementTree.indent(root)
    return f'<?xml version="1.0" encoding="UTF-8"?>\n{ElementTree.tostring(root, encoding="unicode")}\n'


def _run_suite(reports: Sequence[Report], sheets: Sequence[Report], problems: Sequence[str]) -> Element:
    """The run as a whole: totals as properties and in words, and a case for each file that could not be read."""
    suite = Element("testsuite", {"name": "calccheck"})
    counts = summary(sheets, len(reports) - len(sheets))
    _properties(suite, {key: str(n) for key, n in counts.items()})
    for problem in problems:
        first = one_line(problem.split("\n")[0])
        case = SubElement(suite, "testcase", {"name": first, "classname": "calccheck"})
        _outcome(case, "error", "unreadable", first, visible_lines(problem))
    SubElement(suite, "system-out").text = "\n".join(totals(reports))
    return suite


def _suite(report: Report, said: Sequence[Remark]) -> Element:
    """One sheet: its claims and errors worst first; cautions, which are no outcome, in words below them."""
    name = visible(report.reading.sheet.name)
    suite = Element("testsuite", {"name": name, "file": name})
    _properties(suite, {"verdict": report.verdict} | {key: str(n) for key, n in report.counts.items()})
    taken: set[str] = set()
    for remark in said:
        if remark.kind not in ("caution", "note"):
            suite.append(_case(report, remark, name, taken))
    beside = [_line(report, r, name) for r in said if r.kind in ("caution", "note")]
    if beside:
        SubElement(suite, "system-out").text = "\n".join(beside)
    return suite


def _case(report: Report, remark: Remark, file: str, taken: set[str]) -> Element:
    line, column = report.reading.sheet.line_column(remark.span.start)
    names = (f"{remark.title} (line {line})", f"{remark.title} (line {line}, column {column})")
    more = (f"{names[1][:-1]}, no. {n})" for n in range(2, len(taken) + 3))
    name = next(n for n in chain(names, more) if n not in taken)
    taken.add(name)
    case = Element("testcase", {"name": name, "classname": file, "file": file, "line": str(line)})
    if not remark.stands:
        whole = visible_lines(comment_text(remark.entry))
        _outcome(case, _OUTCOMES[remark.kind], remark.rule, remark.message, f"{file}:{line}:{column}\n{whole}")
    return case


def _outcome(case: Element, outcome: str, kind: str, message: str, text: str) -> None:
    if outcome == "skipped":
        SubElement(case, outcome, {"message": message}).text = text
    else:
        SubElement(case, outcome, {"type": kind, "message": message}).text = text


def _line(report: Report, remark: Remark, file: str) -> str:
    line, column = report.reading.sheet.line_column(remark.span.start)
    return f"{file}:{line}:{column}: {remark.kind}: {remark.message}"


def _properties(suite: Element, values: dict[str, str]) -> None:
    listed = SubElement(suite, "properties")
    for name, value in values.items():
        SubElement(listed, "property", {"name": name, "value": value})


def _count(whole: Element, suites: Sequence[Element]) -> None:
    """Totals of the cases in some suites, as attributes of one of them or of their root."""
    cases = [case for suite in suites for case in suite.iter("testcase")]
    whole.set("tests", str(len(cases)))
    for outcome, attribute in _COUNTS.items():
        whole.set(attribute, str(sum(case.find(outcome) is not None for case in cases)))


def visible_lines(text: str) -> str:
    """The text, safe to show line by line."""
    return "\n".join(one_line(line) for line in text.split("\n"))
