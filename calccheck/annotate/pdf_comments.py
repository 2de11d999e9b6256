"""Real PDF comments: links that typst set around claims become highlight annotations with words (ISO 32000-1, 12.5.6.10).

The file is read by pypdf and lengthened by an incremental update (ISO 32000-1, 7.5.6): what typst wrote stays as it is, the
changed objects follow behind it. That keeps the file's version, identity and archive marks, and costs a tenth of rewriting it.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from hashlib import sha256
from io import BytesIO

from pypdf import PdfReader
from pypdf.generic import (
    ArrayObject,
    ByteStringObject,
    DictionaryObject,
    FloatObject,
    IndirectObject,
    NameObject,
    NumberObject,
    PdfObject,
    StreamObject,
    TextStringObject,
)

SCHEME = "annot:"
_AUTHOR = "calccheck"

Box = tuple[float, float, float, float]


@dataclass(frozen=True, slots=True)
class Comment:
    """The words of one comment and the colour of its highlight as RGB hex."""

    subject: str
    text: str
    colour: str


def add_comments(pdf: bytes, comments: dict[str, Comment], day: date) -> bytes:
    """The file with every link to ``annot:KEY`` (or ``annot:KEY+KEY``) turned into a highlight with those comments."""
    reader = PdfReader(BytesIO(pdf), strict=True)
    parents = _structure_parents(reader)
    size = _whole(reader.trailer["/Size"])
    changed: dict[int, PdfObject] = {}
    names: set[str] = set()
    for page in reader.pages:
        for reference in _array(page.get("/Annots")):
            link = _dictionary(reference)
            keys = _keys(link)
            if not keys or not isinstance(reference, IndirectObject):
                continue
            boxes = _lines_of(link)
            look = size + sum(number >= size for number in changed)
            changed[look] = _appearance(boxes, comments[keys[0]].colour)
            note = _highlight([comments[k] for k in keys], boxes, day, _unused("+".join(keys), names))
            note[NameObject("/AP")] = _names(N=IndirectObject(look, 0, reader))
            if "/StructParent" in link:
                note[NameObject("/StructParent")] = link["/StructParent"]
                element = parents[_whole(link["/StructParent"])]
                tag = DictionaryObject(_dictionary(element))
                tag[NameObject("/S")] = NameObject("/Annot")  # in the tagged text, too, it is no link any more
                changed[element.idnum] = tag
            changed[reference.idnum] = note
    return _updated(pdf, reader, changed)


def _dictionary(value: PdfObject | None) -> DictionaryObject:
    found = value.get_object() if value is not None else None
    return found if isinstance(found, DictionaryObject) else DictionaryObject()


def _array(value: PdfObject | None) -> ArrayObject:
    """An array's members, as references where they are."""
    found = value.get_object() if value is not None else None
    return found if isinstance(found, ArrayObject) else ArrayObject()


def _whole(value: PdfObject) -> int:
    return int(str(value))


def _keys(link: DictionaryObject) -> list[str]:
    address = str(_dictionary(link.get("/A")).get("/URI", ""))
    return address.removeprefix(SCHEME).split("+") if address.startswith(SCHEME) else []


def _unused(name: str, names: set[str]) -> str:
    """An annotation's name, unique in the file: a claim that runs over a page's end has two."""
    k = 2
    whole = name
    while whole in names:
        whole, k = f"{name}-{k}", k + 1
    names.add(whole)
    return whole


def _structure_parents(reader: PdfReader) -> dict[int, IndirectObject]:
    """From the number that an annotation bears to its element in the structure tree (ISO 32000-1, 14.7.4.4)."""
    found: dict[int, IndirectObject] = {}
    root = _dictionary(_dictionary(reader.trailer["/Root"]).get("/StructTreeRoot"))
    waiting: list[PdfObject | None] = [root.get("/ParentTree")]
    while waiting:
        node = _dictionary(waiting.pop())
        numbers = list(_array(node.get("/Nums")))
        for number, element in zip(numbers[::2], numbers[1::2], strict=True):
            if isinstance(element, IndirectObject):
                found[_whole(number)] = element
        waiting += _array(node.get("/Kids"))
    return found


def _lines_of(link: DictionaryObject) -> list[Box]:
    """The boxes of a link, one for each line of text: pieces that a change of font has parted are joined."""
    flat = [float(str(v)) for v in _array(link.get("/QuadPoints"))]
    quads = [flat[k : k + 8] for k in range(0, len(flat), 8)]
    x0, y0, x1, y1 = (float(str(v)) for v in _array(link["/Rect"]))
    parts = [(min(q[::2]), min(q[1::2]), max(q[::2]), max(q[1::2])) for q in quads] or [(x0, y0, x1, y1)]
    lines: list[Box] = []
    for part in sorted(parts, key=lambda b: (b[1] - b[3], b[0])):  # the tallest first: it tells the line
        for k, line in enumerate(lines):
            shared = min(line[3], part[3]) - max(line[1], part[1])
            if shared > 0.4 * (part[3] - part[1]):
                lines[k] = (min(line[0], part[0]), min(line[1], part[1]), max(line[2], part[2]), max(line[3], part[3]))
                break
        else:
            lines.append(part)
    return sorted(lines, key=lambda b: -b[3])


def _rgb(colour: str) -> list[float]:
    return [int(colour[k : k + 2], 16) / 255 for k in (1, 3, 5)]


def _reals(*values: float) -> ArrayObject:
    return ArrayObject(FloatObject(round(v, 3)) for v in values)


def _around(boxes: list[Box]) -> Box:
    return (min(b[0] for b in boxes), min(b[1] for b in boxes), max(b[2] for b in boxes), max(b[3] for b in boxes))


def _names(**entries: PdfObject) -> DictionaryObject:
    return DictionaryObject({NameObject(f"/{key}"): value for key, value in entries.items()})


def _appearance(boxes: list[Box], colour: str) -> StreamObject:
    """The highlight as drawn: the boxes filled, darkening what lies below."""
    red, green, blue = _rgb(colour)
    fills = " ".join(f"{x0:.3f} {y0:.3f} {x1 - x0:.3f} {y1 - y0:.3f} re f" for x0, y0, x1, y1 in boxes)
    blend = _names(Type=NameObject("/ExtGState"), BM=NameObject("/Multiply"))
    form = StreamObject()
    form.set_data(f"/G gs {red:.3f} {green:.3f} {blue:.3f} rg {fills}".encode("ascii"))
    form.update(
        _names(
            Type=NameObject("/XObject"),
            Subtype=NameObject("/Form"),
            BBox=_reals(*_around(boxes)),
            Group=_names(S=NameObject("/Transparency"), CS=NameObject("/DeviceRGB")),
            Resources=_names(ExtGState=_names(G=blend)),
        )
    )
    return form


def _highlight(comments: list[Comment], boxes: list[Box], day: date, name: str) -> DictionaryObject:
    quads = [v for x0, y0, x1, y1 in boxes for v in (x0, y1, x1, y1, x0, y0, x1, y0)]
    when = TextStringObject(f"D:{day:%Y%m%d}000000Z")
    return _names(
        Type=NameObject("/Annot"),
        Subtype=NameObject("/Highlight"),
        Rect=_reals(*_around(boxes)),
        QuadPoints=_reals(*quads),
        Contents=TextStringObject("\n\n".join(c.text for c in comments)),
        T=TextStringObject(_AUTHOR),
        Subj=TextStringObject(comments[0].subject),
        NM=TextStringObject(name),
        M=when,
        CreationDate=when,
        C=_reals(*_rgb(comments[0].colour)),
        F=NumberObject(4),  # print
    )


def _updated(pdf: bytes, reader: PdfReader, changed: dict[int, PdfObject]) -> bytes:
    """The file with these objects behind it, in the form of an incremental update."""
    out = BytesIO()
    out.write(pdf if pdf.endswith(b"\n") else pdf + b"\n")
    offsets: dict[int, int] = {}
    for number in sorted(changed):
        offsets[number] = out.tell()
        out.write(f"{number} 0 obj\n".encode("ascii"))
        changed[number].write_to_stream(out)
        out.write(b"\nendobj\n")
    table = out.tell()
    out.write(b"xref\n0 1\n0000000000 65535 f \n")
    for number in sorted(offsets):
        out.write(f"{number} 1\n{offsets[number]:010d} 00000 n \n".encode("ascii"))
    old = reader.trailer
    first = _array(old["/ID"])[0]
    second = ByteStringObject(sha256(out.getvalue()).digest()[:16])
    trailer = _names(
        Size=NumberObject(max(_whole(old["/Size"]), max(offsets, default=0) + 1)),
        Root=old.raw_get("/Root"),
        Info=old.raw_get("/Info"),
        ID=ArrayObject([first, second]),
        Prev=NumberObject(_start_of_table(pdf)),
    )
    out.write(b"trailer\n")
    trailer.write_to_stream(out)
    out.write(f"\nstartxref\n{table}\n%%EOF\n".encode("ascii"))
    return out.getvalue()


def _start_of_table(pdf: bytes) -> int:
    return int(pdf[pdf.rindex(b"startxref") + 9 :].split()[0])
