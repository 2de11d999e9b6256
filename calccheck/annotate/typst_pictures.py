"""Pictures in the printed document, as typst source: at a legible size where they belong, else on a page of the record."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from calccheck.annotate.drawing.svg import Picture
from calccheck.annotate.pictures import BY_SOURCE, MOVED, Shown
from calccheck.annotate.typst_text import literal, shown

_NATURAL, _CHART = 0.7, 0.6  # points for a unit: lettering of 7 points, 6 in bars
_LEGIBLE = 0.47  # what lettering is shrunk to beside the block; a picture that would need less goes to the record
_COLUMN, _FULL, _HIGH = 368.0, 504.0, 570.0  # points: the text column, the record's width, a page's height
_DEEPER = 26.0  # points that each container takes from the column


def figure(offset: int, pictures: Sequence[Shown], missing: frozenset[str], deep: int) -> str:
    """What stands behind the block at this offset of the sheet, ``deep`` containers inside the page."""
    column = _COLUMN - _DEEPER * deep
    drawn = [p for p in pictures if p.picture is not None]
    captions = [p.caption for p in pictures if p.caption]
    if not captions:
        return f"#charts([{shown(BY_SOURCE, missing)}], ({''.join(_chart(p, {}) for p in drawn)}))\n\n"
    text = f"[{shown(captions[0], missing)}]"
    if not drawn:
        return f"#drawn({text}, none)\n\n"
    if _is_large(drawn[0]):
        return f"#drawn-elsewhere({literal(_label(offset))})\n\n"
    return f"#drawn({text}, {_fitted(drawn[0].picture, column, _HIGH)})\n\n"


def large_drawings(pictures: Mapping[int, Sequence[Shown]], missing: frozenset[str]) -> str:
    """The drawings that do not stand behind their blocks, each as large as a page of the record allows."""
    return "".join(
        f"#drawn-large({literal(_label(at))}, [{shown(p.caption, missing)}], {_fitted(p.picture, _FULL, _HIGH)})\n"
        for at, found in pictures.items()
        for p in found
        if _is_large(p)
    )


def _is_large(p: Shown) -> bool:
    """Whether a drawing does not fit behind its block at a legible size."""
    return bool(p.caption) and p.picture is not None and _scale(p.picture, _COLUMN)[0] < _LEGIBLE


def glance(charts: Sequence[Shown], numbers: Mapping[str, str], missing: frozenset[str]) -> str:
    """The record's part with the bars of every claimed total, each with links to its claims."""
    rows = "".join(_chart(p, numbers) for p in charts)
    return f"#record-glance([Superposition at a glance], [{shown(BY_SOURCE, missing)}], ({rows}))\n" if rows else ""


def sensitivities(charts: Sequence[Shown], numbers: Mapping[str, str], missing: frozenset[str]) -> str:
    """The record's part with what moves each quantity claimed over its tolerances."""
    rows = "".join(_chart(p, numbers) for p in charts)
    return f"#record-glance([What moves it], [{shown(MOVED, missing)}], ({rows}))\n" if rows else ""


def _label(offset: int) -> str:
    return f"drawn-{offset}"


def _chart(p: Shown, numbers: Mapping[str, str]) -> str:
    if p.picture is None:
        return ""
    claims = "".join(f"({literal('r-' + key)}, {literal(numbers[key])})," for key in p.claims if key in numbers)
    return f"({_fitted(p.picture, _COLUMN, _HIGH, _CHART)}, ({claims})),"


def _fitted(picture: Picture | None, width: float, height: float, natural: float = _NATURAL) -> str:
    assert picture is not None
    scale, turned = _scale(picture, width, height, natural)
    return (
        f"(svg: {literal(picture.svg)}, alt: {literal(f'{picture.title}. {picture.words}')}, "
        f"width: {picture.width * scale:.1f}pt, turned: {'true' if turned else 'false'})"
    )


def _scale(picture: Picture, width: float, height: float = _HIGH, natural: float = _NATURAL) -> tuple[float, bool]:
    """Points for a unit, and whether the picture is turned by a right angle because it is larger so."""
    upright = min(natural, width / picture.width, height / picture.height)
    turned = min(natural, width / picture.height, height / picture.width)
    return (turned, True) if upright < _LEGIBLE and turned > upright else (upright, False)
