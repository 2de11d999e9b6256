"""The calc register: one row a sheet, what is to be mended in its row, and what is still open."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import date

from calccheck.model import ROLES, Report, Role, Signature, Verdict
from calccheck.signatures import digest_of, why_void
from calccheck.source import Span

FIELDS = ("project", "subject", "sheet", "revision", "by", "date")  # a title block has them all (common practice)
ASSUMED = "assumed without a source: "


@dataclass(frozen=True, slots=True)
class Signed:
    """A signature with the reason why it no longer holds, or none."""

    role: Role
    name: str
    on: date
    void: str


@dataclass(frozen=True, slots=True)
class Remark:
    """Something about a sheet, with its line: ``to mend`` fails the register, ``open`` is to be settled some day."""

    kind: str
    line: int
    message: str


@dataclass(frozen=True, slots=True)
class Row:
    """A sheet in the register. ``title``: its title block; ``number`` is empty where it has none."""

    path: str
    number: str
    title: Mapping[str, str]
    verdict: Verdict
    counts: Mapping[Verdict, int]
    errors: int
    signatures: tuple[Signed, ...]
    to_mend: tuple[Remark, ...]
    open: tuple[Remark, ...]

    @property
    def claims(self) -> int:
        """How many claims the sheet makes, givens among them."""
        return sum(self.counts.values())

    def signed(self, role: Role) -> Signed | None:
        """The signature in this role."""
        return next((s for s in self.signatures if s.role == role), None)


def register_rows(reports: Sequence[Report], day: date) -> list[Row]:
    """The rows of all calc sheets by sheet number, 9 before 10; ``day``: by which waivers have run out."""
    sheets = [r for r in reports if r.reading.is_calc]
    paths: dict[str, list[str]] = {}
    for r in sheets:
        paths.setdefault(_number(r), []).append(r.reading.sheet.name)
    rows = [_row(r, [p for p in paths[_number(r)] if p != r.reading.sheet.name], day) for r in sheets]
    return sorted(rows, key=lambda row: (not row.number, _in_order(row.number), row.path))


def _number(report: Report) -> str:
    return report.reading.title.get("sheet", "").strip()


def _in_order(number: str) -> list[tuple[int, int, str]]:
    """Text by its letters, numbers in it by their size: by how many digits they have, then by these."""
    pieces = re.findall(r"[0-9]+|[^0-9]+", number)
    return [(0, len(p.lstrip("0")), p.lstrip("0")) if p[0].isdecimal() else (1, 0, p.casefold()) for p in pieces]


def _row(report: Report, namesakes: Sequence[str], day: date) -> Row:
    reading = report.reading
    now = digest_of(reading) if reading.signatures else None
    signatures = tuple(_signed(s, why_void(s, now)) for s in reading.signatures) if now else ()
    number = _number(report)
    return Row(
        reading.sheet.name, number, reading.title, report.verdict, report.counts,
        sum(f.severity == "error" for f in report.findings), signatures,
        tuple(_to_mend(report, namesakes if number else [], day)), tuple(_open(report)),
    )  # fmt: skip


def _signed(signature: Signature, void: str) -> Signed:
    return Signed(signature.role, signature.name, signature.on, void)


# --- remarks --------------------------------------------------------------------------------------------------------


def _to_mend(report: Report, namesakes: Sequence[str], day: date) -> Iterator[Remark]:
    """What fails the register, title block first, then in the order of the sheet."""
    if namesakes:
        number = _number(report)
        yield Remark("number", 1, f"{number} is also the number of {', '.join(sorted(namesakes))}")
    missing = [f for f in FIELDS if not report.reading.title.get(f, "").strip()]
    if missing:
        yield Remark("title", 1, f"missing in the title block: {', '.join(missing)}")
    failing = Counter(j.verdict for j in report.claims if j.verdict in ("differs", "unchecked"))
    for verdict, n in sorted(failing.items()):
        first = next(j.claim.span for j in report.claims if j.verdict == verdict)
        yield Remark("claims", _line(report, first), f"{_claims(n, verdict)}, the first here")
    for f in report.findings:
        if f.severity == "error":
            yield Remark(f.kind, _line(report, f.span), f.message)
    told = {f.span for f in report.findings if f.kind == "waiver"}
    for j in report.claims:
        w = j.claim.waiver
        if w is not None and w.until is not None and w.until < day and w.span not in told:
            yield Remark("waiver", _line(report, w.span), f"a waiver by {w.by} ran until {w.until.isoformat()}")


def _claims(n: int, verdict: str) -> str:
    if verdict == "unchecked":
        return f"{n} claim{'' if n == 1 else 's'} unchecked"
    return "1 claim differs" if n == 1 else f"{n} claims differ"


def _open(report: Report) -> Iterator[Remark]:
    """Signatures still missing, and assumptions that name no sheet as their source."""
    signed = {s.role for s in report.reading.signatures}
    missing = [r for r in ROLES if r not in signed]
    if missing:
        yield Remark("unsigned", 1, f"not signed by {', '.join(missing)}")
    for j in report.claims:
        if j.verdict == "given" and not j.claim.from_sheet:
            words = " ".join(j.claim.text.split()).removeprefix("given ")
            yield Remark("assumption", _line(report, j.claim.span), ASSUMED + words)


def _line(report: Report, span: Span) -> int:
    return report.reading.sheet.line_column(span.start)[0]
