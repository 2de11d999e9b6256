"""A PDF read back by pypdf: its text, where each piece of it stands, its annotations."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from io import BytesIO

from pypdf import PageObject, PdfReader
from pypdf.generic import DictionaryObject, IndirectObject

from calccheck.annotate.to_pdf import to_pdf
from calccheck.model import Report

MM = 72 / 25.4


@dataclass(frozen=True, slots=True)
class Word:
    """A piece of text with the place of its baseline, points from the page's lower left corner."""

    x: float
    y: float
    text: str


def words(page: PageObject) -> list[Word]:
    found: list[Word] = []

    def visit(text: str, cm: list[float], tm: list[float], _font: object, _size: float) -> None:
        x = tm[4] * cm[0] + tm[5] * cm[2] + cm[4]
        y = tm[4] * cm[1] + tm[5] * cm[3] + cm[5]
        if text.strip():
            found.append(Word(x, y, text.strip()))

    page.extract_text(visitor_text=visit)
    return found


def read(report: Report, number: int = 1, of: int = 1) -> PdfReader:
    return PdfReader(BytesIO(to_pdf(report, number, of)), strict=True)


def text_of(reader: PdfReader) -> str:
    return "\n".join(page.extract_text() for page in reader.pages)


def flat(text: str) -> str:
    """Without white space: where a line breaks, and what pypdf takes for a space, is not the sheet's doing."""
    return re.sub(r"\s", "", text)


def annotations(reader: PdfReader, subtype: str) -> Iterator[tuple[PageObject, IndirectObject, DictionaryObject]]:
    for page in reader.pages:
        for reference in page.get("/Annots", []):
            if reference.get_object()["/Subtype"] == subtype:
                yield page, reference, reference.get_object()
