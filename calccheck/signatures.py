"""What a signature covers, in a form that prose and layout do not touch, and whether a signature still holds.

A signature stands for the circuit, the claims, the givens, the waivers and the settings *as they were read*: not for bytes,
spacing, the place of a claim in text, table or working, the order of parts or how a unit is spelt. It shows what was signed and
that it has changed; it does not prove who signed (the history of the repository does that).
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import MISSING, Field, dataclass, fields, is_dataclass
from datetime import date
from decimal import Decimal
from fractions import Fraction

from calccheck.formula import Group
from calccheck.model import Claim, Element, Finding, Reading, Signature
from calccheck.rules import RULES
from calccheck.units import Unit

FORM = 1  # of the canonical form; a signature made with another can no longer be held against the sheet
PARTS = ("circuit", "claims", "givens", "waivers", "settings")
_FIGURES = 12
_SHORT = 8  # hexadecimal digits of a part's digest

# Places and wording, which may change without changing what is said.
_LAYOUT = {"span", "text", "written", "worked", "unit_words", "place", "problems"}
_UNORDERED = {"elements", "ratings", "terminals", "symbols", "cases", "due_to"}
_ASCII_MICRO = re.compile(r"(?<!\w)u(?=[VASWFHsCJgmΩ])")

Plain = None | bool | int | str | list["Plain"]


@dataclass(frozen=True, slots=True)
class Digest:
    """SHA-256 of all that a signature covers, and the beginning of the digest of each part."""

    whole: str
    parts: Mapping[str, str]


def digest_of(reading: Reading) -> Digest:
    """The digest of a sheet as read."""
    texts = {part: _written_out(plain) for part, plain in _parts(reading).items()}
    everything = _written_out([FORM, [[part, text] for part, text in texts.items()]])
    return Digest(_sha(everything), {part: _sha(text)[:_SHORT] for part, text in texts.items()})


def _sha(text: str) -> str:
    from hashlib import sha256  # late, as json below: most sheets that are checked bear no signature

    return sha256(text.encode("utf-8", "surrogatepass")).hexdigest()


def _written_out(plain: Plain) -> str:
    import json

    return json.dumps(plain, ensure_ascii=True, separators=(",", ":"))


# --- the canonical form ---------------------------------------------------------------------------------------------


def _parts(reading: Reading) -> dict[str, Plain]:
    """Each part that a signature covers. Claims keep their order, because a value is carried on from above; givens need none."""
    several = len(reading.circuits) > 1
    claims = [_claim(c, several) for c in reading.claims if not c.given]
    givens: list[Plain] = [_claim(c, several) for c in reading.claims if c.given]
    waivers: list[Plain] = [[_claim(c, several), _plain(c.waiver)] for c in reading.claims if c.waiver]
    return {
        "circuit": _plain(reading.circuits),
        "claims": [*claims],
        "givens": sorted(givens, key=_written_out),
        "waivers": sorted(waivers, key=_written_out),
        "settings": _record(reading.settings, {"on"}),
    }


def _claim(claim: Claim, several: bool) -> Plain:
    """A claim by its members; one that cannot be read by its words. The circuit above it counts where there are ``several``."""
    if claim.problem is not None:
        return ["unread", " ".join(claim.text.split())]
    return _record(claim, {"waiver", "problem", *(() if several else ("circuit",))})


def _plain(value: object) -> Plain:
    """Anything that a reading is made of, as nested lists of text."""
    match value:
        case None | bool() | int() | str():
            return value
        case Fraction():
            return _rational(value)
        case Decimal() | date():
            return str(value)
        case float() | complex():
            return f"{value:.{_FIGURES}g}"
        case tuple() | list():
            return [_plain(v) for v in value]
        case frozenset() | set():
            return sorted((_plain(v) for v in value), key=_written_out)
        case Mapping():
            return sorted(([_plain(k), _plain(v)] for k, v in value.items()), key=_written_out)
        case Group(inner=inner, unit=unit) if not unit.text:
            return _plain(inner)  # brackets that only group: the tree says as much
        case Unit(text=text):
            return _ASCII_MICRO.sub("µ", text.replace("ohm", "Ω"))  # by its name: 3 VA are not 3 W
    return _record(value, set())


def _rational(value: Fraction) -> str:
    """A rational as it is; one that is a float in disguise (of a root, an angle) by so many figures as all machines agree on."""
    d = value.denominator
    if d.bit_length() > 100 or (d.bit_length() > 40 and d & (d - 1) == 0):
        return f"{float(value):.{_FIGURES}g}"
    return f"{value.numerator}/{d}"


def _record(record: object, left_out: set[str]) -> Plain:
    """A record by its kind and its fields, without layout and without what stands at its default.

    So a field that a later version adds voids no signature as long as the sheet makes no use of it.
    """
    if not is_dataclass(record):
        raise TypeError(f"a {type(record).__name__} is nothing that a sheet is made of")
    shown: list[Plain] = [type(record).__name__]
    for f in fields(record):
        value = getattr(record, f.name)
        if f.name in left_out or _is_layout(f.name, record) or value == _default(f):
            continue
        plain = _plain(value)
        if f.name in _UNORDERED and isinstance(plain, list):
            plain = sorted(plain, key=_written_out)
        shown.append([f.name, plain])
    return shown


def _is_layout(name: str, record: object) -> bool:
    if name == "word":
        return bool(
            getattr(record, "subscripts", ())
        )  # spelt with spaces or without: letter and subscripts say the same
    if name == "written" and isinstance(record, Element):
        return record.value is not None or record.phasor is not None  # else the words are all that is known of it
    return name in _LAYOUT


def _default(f: Field[object]) -> object:
    return f.default_factory() if f.default_factory is not MISSING else f.default


# --- whether signatures hold ----------------------------------------------------------------------------------------


def signature_line(name: str, day: date, now: Digest) -> str:
    """A signature as it stands below its role in the front matter."""
    parts = " ".join(f"{part}:{short}" for part, short in now.parts.items())
    return f"{name} {day.isoformat()} form:{FORM} sha256:{now.whole} {parts}"


def why_void(signature: Signature, now: Digest) -> str:
    """Why a signature no longer holds, naming the parts that have changed since; nothing where it holds."""
    if signature.form != FORM:
        return f"it was made in form {signature.form}, and only form {FORM} can be held against the sheet"
    if signature.digest == now.whole:
        return ""
    parts = [p for p in PARTS if signature.parts.get(p) != now.parts[p]]
    return f"changed since: {', '.join(parts)}" if parts else "its own line was altered"


def signature_findings(reading: Reading) -> list[Finding]:
    """Signatures that are void, and an originator who checks their own sheet."""
    if not reading.signatures:
        return []
    now = digest_of(reading)
    found = [_void(s, why) for s in reading.signatures if (why := why_void(s, now))]
    checker = next((s for s in reading.signatures if s.role == "checker"), None)
    if checker is not None and is_originator(checker.name, reading):
        found.append(_finding(f"{checker.name} is originator and checker; somebody else checks a sheet", checker))
    return found


def is_originator(name: str, reading: Reading) -> bool:
    """Whether the sheet has this person, by case-blind name, for its originator: by signature or, without one, by ``by:``."""
    signed = [s.name for s in reading.signatures if s.role == "originator"]
    return alike(name) in {alike(n) for n in signed or reading.title.get("by", "").split(",")}


def alike(name: str) -> str:
    """A name as it is compared with others: without case and outer or doubled blanks."""
    return " ".join(name.split()).casefold()


def _void(signature: Signature, why: str) -> Finding:
    who = f"the {signature.role}'s signature ({signature.name}, {signature.on.isoformat()}) is void"
    return _finding(f"{who}: {why}; read the sheet again and sign it anew", signature)


def _finding(message: str, signature: Signature) -> Finding:
    return Finding("signature", RULES["signature"].severity, message, signature.span)
