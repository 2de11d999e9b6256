"""Reports as a log that services show beside the lines of a change: SARIF 2.1.0, an OASIS Standard (27 March 2020).

Section numbers below are those of the standard. What stands is counted and not listed.
"""

from __future__ import annotations

import json
import os
from collections import Counter
from collections.abc import Sequence
from hashlib import sha256
from pathlib import PurePath
from typing import Any
from urllib.parse import quote

from calccheck.annotate.remarks import REMARK_RULES, Remark, ranked
from calccheck.annotate.to_json import summary
from calccheck.annotate.visible import one_line
from calccheck.model import Report
from calccheck.rules import Rule
from calccheck.source import Sheet, Span

SCHEMA = "https://docs.oasis-open.org/sarif/sarif/v2.1.0/os/schemas/sarif-schema-2.1.0.json"
_LEVELS = {"error": "error", "caution": "warning", "note": "note"}
# By mark: kind (3.27.9) and level (3.27.10), which is "none" for every kind but "fail"
_KINDS = {
    "differs": ("fail", "error"),
    "unchecked": ("open", "none"),
    "error": ("fail", "error"),
    "caution": ("fail", "warning"),
    "note": ("informational", "none"),
    "accepted": ("fail", "note"),
    "given": ("review", "none"),
}
_LISTED = [key for key in REMARK_RULES if key not in ("agrees", "rounded")]
_INDEX = {key: k for k, key in enumerate(_LISTED)}
_SURROGATES = {code: f"\\u{code:04x}" for code in range(0xD800, 0xE000)}
Record = dict[str, Any]


def to_sarif(reports: Sequence[Report], program: str, problems: Sequence[str] = ()) -> str:
    """The log as JSON, worst first, ``program`` being the program's version and ``problems`` what could not be read.

    Columns count code points; locations are relative to the folder that the program ran in, absolute where the sheet was
    named so.
    """
    sheets = [r for r in reports if r.reading.is_calc]
    run = {
        "tool": {"driver": {"name": "calccheck", "version": program, "rules": [_rule(k) for k in _LISTED]}},
        "invocations": [
            {"executionSuccessful": not problems, "toolExecutionNotifications": [_notice(p) for p in problems]}
        ],
        "columnKind": "unicodeCodePoints",
        "newlineSequences": ["\r\n", "\n", "\r"],
        "artifacts": [_artifact(r) for r in sheets],
        "results": _results(sheets),
        "properties": {"summary": summary(sheets, len(reports) - len(sheets))},
    }
    log = {"$schema": SCHEMA, "version": "2.1.0", "runs": [run]}
    return json.dumps(log, ensure_ascii=False, indent=2, allow_nan=False).translate(_SURROGATES) + "\n"


def _rule(key: str) -> Record:
    rule: Rule = REMARK_RULES[key]
    return {
        "id": key,
        "shortDescription": {"text": f"{rule.title}."},
        "help": {"text": f"See docs/{rule.anchor}."},
        "defaultConfiguration": {"level": _LEVELS[rule.severity]},
    }


def _notice(problem: str) -> Record:
    return {"level": "error", "message": _message(problem.split("\n")[0])}


def _artifact(report: Report) -> Record:
    return {
        "location": {"uri": uri_of(report.reading.sheet.name)},
        "roles": ["analysisTarget"],
        "properties": {"verdict": report.verdict},
    }


def uri_of(name: str) -> str:
    """A sheet's name as a URI reference (RFC 3986), every byte that means something else there percent-encoded."""
    path = PurePath(name)
    return path.as_uri() if path.is_absolute() else quote(os.fsencode(path.as_posix()))


# --- results --------------------------------------------------------------------------------------------------------


def _results(sheets: Sequence[Report]) -> list[Record]:
    index = {id(report): k for k, report in enumerate(sheets)}
    listed = [(report, remark) for report, remark in ranked(sheets) if not remark.stands]
    prints = _fingerprints(listed)
    return [_result(report, r, index[id(report)], mark) for (report, r), mark in zip(listed, prints, strict=True)]


def _result(report: Report, remark: Remark, index: int, fingerprint: str) -> Record:
    sheet = report.reading.sheet
    kind, level = _KINDS[remark.kind]
    result: Record = {
        "ruleId": remark.rule,
        "ruleIndex": _INDEX[remark.rule],
        "kind": kind,
        "level": level,
        "message": _message(_sentences(remark)),
        "locations": [_location(sheet, index, remark.span)],
        "partialFingerprints": {"sheetText/v1": fingerprint},
    }
    if remark.further:
        result["relatedLocations"] = [
            {"id": k, **_location(sheet, index, span), "message": _message(f"{said}.")}
            for k, (span, said) in enumerate(remark.further, 1)
        ]
    waiver = remark.judged.claim.waiver if remark.kind == "accepted" and remark.judged else None
    if waiver is not None:
        said = f"{one_line(waiver.reason)} (by {one_line(waiver.by)})"
        result["suppressions"] = [{"kind": "inSource", "status": "accepted", "justification": said}]
    return result


def _sentences(remark: Remark) -> str:
    """What was found, what may have gone wrong and what to write instead."""
    told = [
        remark.message,
        f"Recomputed: {remark.recomputed}" if remark.recomputed else "",
        f"Likely: {'; '.join(remark.likely)}" if remark.likely else "",
        f"Write: {remark.write}" if remark.write else "",
    ]
    return " ".join(line if line.endswith((".", "?", "!")) else f"{line}." for line in told if line)


def _message(text: str) -> Record:
    """Plain text as a message string: braces doubled, for alone they hold arguments (3.11.5), and nothing a link (3.11.6)."""
    plain = one_line(text).replace("{", "{{").replace("}", "}}")
    return {"text": plain.replace("](", "] (")}


def _location(sheet: Sheet, index: int, span: Span) -> Record:
    line, column = sheet.line_column(span.start)
    end_line, end_column = sheet.line_column(span.end)
    region: Record = {"startLine": line, "startColumn": column, "endLine": end_line, "endColumn": end_column}
    if span.end > span.start:
        region["snippet"] = {"text": sheet.text[span.start : span.end]}
    return {"physicalLocation": {"artifactLocation": {"uri": uri_of(sheet.name), "index": index}, "region": region}}


def _fingerprints(listed: Sequence[tuple[Report, Remark]]) -> list[str]:
    """For each remark the digest of its rule, quantity, words in the sheet and turn among its like there (3.27.17).

    So a result is known again after its lines have moved, in the sheet or with it.
    """
    found: dict[int, str] = {}
    turns: Counter[tuple[int, str]] = Counter()
    for k in sorted(range(len(listed)), key=lambda k: listed[k][1].span.start):
        report, remark = listed[k]
        words = report.reading.sheet.text[remark.entry.span.start : remark.entry.span.end]
        like = f"{remark.rule}\n{remark.title}\n{' '.join(words.split())}"
        turns[id(report), like] += 1
        whole = f"{like}\n{turns[id(report), like]}"
        found[k] = sha256(whole.encode("utf-8", "surrogatepass")).hexdigest()[:32]
    return [found[k] for k in range(len(listed))]
