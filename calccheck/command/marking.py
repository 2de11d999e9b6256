"""``calccheck mark``: where each marked sheet goes, what is written there, and marks taken out again."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial
from pathlib import Path

from calccheck.annotate.to_terminal import totals
from calccheck.annotate.visible import visible
from calccheck.command.batch import run
from calccheck.command.citing import Run
from calccheck.command.files import MARKED, Source, Unusable, write_whole
from calccheck.command.reports import gathered, report_on, run_of
from calccheck.command.sheets import brief, sheet_of
from calccheck.command.terminal import complain, in_colour, status
from calccheck.edits import stray, unmark
from calccheck.model import Report

UNMARKED = ".unmarked"  # before the suffix of a copy from which the marks were taken out


@dataclass(frozen=True, slots=True)
class Order:
    """One sheet and the file to write; ``replace``: whether one of that name may be replaced."""

    source: Source
    target: Path
    replace: bool

    @property
    def in_place(self) -> bool:
        """Whether the sheet itself is written."""
        return self.target == self.source.path


def mark(options: argparse.Namespace) -> int:
    """The command; its exit status."""
    if options.to != "md" and (options.in_place or options.remove):
        raise Unusable("mark", f"--in-place and --remove go with --to md, not with --to {options.to}")
    if "-" in options.paths:
        raise Unusable("mark", "standard input has no name to write a copy by; name a file")
    found, problems = gathered(options.paths)
    orders = _orders(found, options, problems)
    task = remove_marks if options.remove else partial(write_marked, form=options.to, within=run_of(options))
    reports: list[Report] = []
    for order, outcome in zip(orders, run(task, orders, _name, options.jobs), strict=True):
        if outcome.value is None:
            problems.append(outcome.problem)
            continue
        report, written = outcome.value
        reports += [] if report is None else [report]
        if written:
            print(visible(str(order.target)))
    if not options.remove:
        print("\n".join(totals(reports, in_colour(sys.stdout))))
    complain(problems)
    return status(reports, problems)


def _name(order: Order) -> str:
    return order.source.name


def _orders(found: Sequence[Source], options: argparse.Namespace, problems: list[str]) -> list[Order]:
    """What to write for each sheet; no two sheets to one file."""
    orders: dict[Path, Order] = {}
    for source in found:
        target = source.path if options.in_place else _copy(source, options)
        taken = orders.get(target)
        if taken is not None:
            why = f"its copy {target} would be written over that of {taken.source.name}; mark them apart, with two folders"
            problems.append(str(Unusable(source.name, why)))
            continue
        orders[target] = Order(source, target, options.replace or options.in_place)
    return list(orders.values())


def _copy(source: Source, options: argparse.Namespace) -> Path:
    """``NAME.checked.md`` in the output folder, below it the folders that the sheet stands in."""
    infix = UNMARKED if options.remove else MARKED
    stem = source.within.stem.removesuffix(MARKED)
    return Path(options.output) / source.within.with_name(f"{stem}{infix}.{options.to}")


def write_marked(order: Order, form: str, within: Run) -> tuple[Report | None, bool]:
    """Mark one sheet and write it; its report, and whether there was anything to write. Raises ``Unusable``."""
    _refuse_existing(order)
    sheet = sheet_of(order.source)
    report = report_on(order.source, within)
    if not report.reading.is_calc:
        return brief(report), False
    if form == "md":
        _refuse_changed(sheet.name, unmark(sheet.text))
    data = _rendered(report, form)
    before = sheet.text.encode("utf-8") if order.in_place else None
    if data != before:
        write_whole(order.target, data, order.replace, before)
    return brief(report), data != before


def _rendered(report: Report, form: str) -> bytes:
    """The marked sheet in one form. Each form's libraries are loaded only for it."""
    if form == "md":
        from calccheck.annotate.to_markdown import to_markdown

        return to_markdown(report).encode("utf-8")
    if form == "html":
        from calccheck.annotate.to_html import to_html

        return to_html(report).encode("utf-8")
    from calccheck.annotate.to_pdf import to_pdf

    return to_pdf(report)


def remove_marks(order: Order) -> tuple[Report | None, bool]:
    """Take the marks out of one sheet; no report, and whether there were any. Raises ``Unusable``."""
    _refuse_existing(order)
    text = sheet_of(order.source).text
    plain = unmark(text)
    _refuse_changed(order.source.name, plain)
    if plain == text:
        return None, False
    write_whole(order.target, plain.encode("utf-8"), order.replace, text.encode("utf-8") if order.in_place else None)
    return None, True


def _refuse_changed(name: str, text: str) -> None:
    """Where the marks of an earlier run could not be taken out, new ones would only pile up."""
    for left in stray(text):
        if left.listing:
            raise Unusable(name, left.message)


def _refuse_existing(order: Order) -> None:
    """Before any work: a copy that may not be replaced."""
    if order.target.exists() and not order.replace:
        raise Unusable(str(order.target), "a file of this name exists; --replace lets it be replaced")
