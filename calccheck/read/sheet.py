"""A whole sheet read: page, title block, circuits, claims."""

from __future__ import annotations

import re
from collections.abc import Sequence
from itertools import pairwise

from calccheck.arithmetic import Amount, DimensionFault, Doubt, evaluate
from calccheck.document import Block, blocks, inlines
from calccheck.formula import Node, Range, Reference
from calccheck.loose_units import with_loose_units
from calccheck.model import Circuit, Finding, Reading, Settings
from calccheck.read.circuit_block import given_lines, read_circuit
from calccheck.read.claims import assumption, read_claims
from calccheck.read.markdown import read_page
from calccheck.read.signatures import read_signatures
from calccheck.read.titleblock import read_titleblock
from calccheck.rules import RULES
from calccheck.source import Piece, Sheet, Span


def read_sheet(sheet: Sheet, repository: Settings) -> Reading:
    """Everything that a sheet says, with its places. ``repository``: settings that the sheet's own ``check:`` overrides."""
    long = _too_long(sheet)
    if long is not None:
        if not _MAY_BE_A_SHEET.search(sheet.text):
            return Reading(sheet, (), False, {}, repository, (), (), ())
        return Reading(sheet, (), True, {}, repository, (), (), (long,))
    page = read_page(sheet.text)
    front = page[0] if page and page[0].kind == "front matter" else None
    title, settings, findings = read_titleblock(front, repository)
    stated = title.pop("signatures", None) is not None
    fences = [b for b in blocks(page) if b.kind == "fence"]
    circuit_fences = [f for f in fences if _word(f) == "circuit"]
    misnamed = _misnamed(fences)
    is_calc = bool(circuit_fences) or any(_word(f) == "working" for f in fences) or "sheet" in title
    if not (is_calc or misnamed):
        return Reading(sheet, page, False, title, settings, (), (), ())
    givens = _givens(page)
    circuits: list[Circuit] = []
    for fence in circuit_fences:
        reading = read_circuit(fence, givens, sheet, settings.hertz)
        circuits.append(reading.circuit)
        findings = (*findings, *reading.findings)
    found = read_claims(page, _names(circuits), [given_lines(f) for f in circuit_fences])
    signatures, faults = read_signatures(front, stated) if front else ((), ())
    told = (*findings, *faults, *misnamed, *_same_names(circuits, sheet), *found.findings)
    every = sorted(told, key=lambda f: f.span.start)
    return Reading(
        sheet, page, True, title, settings, tuple(circuits), tuple(found.claims), tuple(every), found.not_read, signatures
    )  # fmt: skip


def _misnamed(fences: Sequence[Block]) -> list[Finding]:
    """Fences called almost circuit or working: what stands in them would be passed over in silence."""
    found = []
    for word, fence in ((_word(f), f) for f in fences):
        plain = re.sub(r"[^a-z]", "", word.lower())
        near = [w for w in ("circuit", "working") if word != w and plain[:1] == w[0] and _alike(plain, w)]
        if near:
            message = f"a fence called {word} is not read; is {near[0]} meant?"
            found.append(Finding("fence", RULES["fence"].severity, message, fence.span, f"```{near[0]}"))
    return found


def _alike(word: str, wanted: str) -> bool:
    """Whether a word is another but for a letter or two."""
    if word in (wanted, wanted + "s") or abs(len(word) - len(wanted)) > 1:
        return word in (wanted, wanted + "s")
    from difflib import SequenceMatcher  # late: few fences are called so

    return SequenceMatcher(None, word, wanted).ratio() > 0.84


_MAY_BE_A_SHEET = re.compile(r"^(?:[ \t>]*(?:`{3,}|~{3,})\s*(?:circuit|working)\b|sheet:)", re.MULTILINE)
LONGEST_LINE = 100_000  # characters; dense mark-up on a longer line takes minutes, and nobody writes one by hand
LONGEST_SHEET = 5_000_000


def _too_long(sheet: Sheet) -> Finding | None:
    """A limit said aloud, for what no person wrote."""
    starts = [*sheet.line_starts, len(sheet.text)]
    for start, end in pairwise(starts):
        if end - start > LONGEST_LINE:
            message = (
                f"a line of more than {LONGEST_LINE:,} characters: nothing in this sheet was checked; part the line"
            )
            return Finding("limit", RULES["limit"].severity, message, Span(start, start + 1))
    if len(sheet.text) > LONGEST_SHEET:
        message = f"more than {LONGEST_SHEET:,} characters: nothing in this sheet was checked; part the sheet"
        return Finding("limit", RULES["limit"].severity, message, Span(0, 1))
    return None


def _word(fence: Block) -> str:
    return (fence.info.split() or [""])[0]


def _names(circuits: Sequence[Circuit]) -> set[str]:
    return {n for c in circuits for n in (*(e.name for e in c.elements), *c.nodes())}


def _same_names(circuits: Sequence[Circuit], sheet: Sheet) -> list[Finding]:
    """Two circuits of one sheet called alike, by which ``of NAME`` could mean either."""
    seen: dict[str, Circuit] = {}
    found = []
    for c in circuits:
        if c.name and c.name in seen:
            line = sheet.line_column(seen[c.name].span.start)[0]
            found.append(
                Finding("circuit-name", "error", f"a circuit called {c.name} stands in line {line} already", c.span)
            )
        seen.setdefault(c.name, c)
    return found


def _givens(page: tuple[Block, ...]) -> dict[str, Amount]:
    """The sheet's assumptions that part values may be worked from, wherever in the sheet they stand."""
    known: dict[str, Amount] = {}
    for piece in _given_pieces(page):
        claim = assumption(piece, "working", -1)
        if claim.problem is not None or not isinstance(claim.members[0].node, Reference):
            continue
        amount = _worked(claim.members[1].node, known)
        if amount is not None:
            known.setdefault(claim.members[0].node.word, amount)
    return known


def _given_pieces(page: tuple[Block, ...]) -> list[Piece]:
    found: list[Piece] = []
    for block in blocks(page):
        if block.kind == "fence" and _word(block) == "circuit":
            found += given_lines(block)
        elif block.kind == "fence" and _word(block) == "working":
            stated = [line for line in block.lines if line.text.lstrip().startswith("given ")]
            found += [line.part(0, len(line.text.partition("#")[0])).strip() for line in stated]
        elif block.inlines:
            codes = [i.text for i in inlines(block.inlines) if i.kind == "code" and i.text is not None]
            found += [c for c in codes if c.text.lstrip().startswith("given ")]
    return found


def _worked(node: Node, known: dict[str, Amount]) -> Amount | None:
    def lookup(ref: Reference) -> Amount:
        if ref.word not in known:
            raise Doubt(ref.word)
        return known[ref.word]

    if isinstance(node, Range):
        return None
    try:
        return evaluate(with_loose_units(node, lambda ref: ref.word in known), lookup)
    except (Doubt, DimensionFault):
        return None
