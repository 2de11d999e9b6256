"""What an unknown name may have meant."""

from __future__ import annotations

import re

from calccheck.formula import Reference
from calccheck.judge.scope import QUANTITY_LETTERS, Ledger


def unknown(ref: Reference, nearest: int, ledger: Ledger) -> tuple[str, str]:
    """The sentence about a name that means nothing here, and what to write instead (or nothing)."""
    circuit = ledger.circuits[nearest if 0 <= nearest < len(ledger.circuits) else 0] if ledger.circuits else None
    nodes = circuit.nodes() if circuit else ()
    parts = tuple(e.name for e in circuit.elements) if circuit else ()
    shown = ref.word
    if ref.letter in QUANTITY_LETTERS and ref.subscripts:
        hint = _quantity_hint(ref, nodes, parts)
        where = ", ".join(ref.subscripts)
        sentence = f"{shown}: neither a node nor a part of this circuit is called {where}"
        if circuit is None:
            sentence = f"{shown}: there is no circuit here whose quantity this could be"
        elif len(ref.subscripts) == 2:
            sentence = f"{shown}: {where} are not two nodes of this circuit"
    else:
        candidates = (*parts, *ledger.names, *(f"V_{n}" for n in nodes))
        hint = _plain_hint(shown, nodes, parts) or _nearest(shown, candidates)
        sentence = f"{shown} is no name of this sheet"
    return (f"{sentence}; did you mean {hint}?" if hint else sentence), hint


def _plain_hint(word: str, nodes: tuple[str, ...], parts: tuple[str, ...]) -> str:
    """``Vbus`` for ``V_bus``, ``R_1`` for ``R1``."""
    for letter in ("V", "I", "P"):
        rest = word[1:]
        if word.startswith(letter) and rest and (rest in parts or (letter == "V" and rest in nodes)):
            return f"{letter}_{rest}"
    joined = word.replace("_", "").replace("{", "").replace("}", "")
    return joined if joined != word and joined in parts else ""


def _quantity_hint(ref: Reference, nodes: tuple[str, ...], parts: tuple[str, ...]) -> str:
    """``V_{C,E}`` for ``V_CE``, else the same letter with the nearest node or part."""
    sub = ref.subscripts[0]
    joined = ref.letter + "".join(ref.subscripts)
    if joined in parts and ref.letter not in ("V", "I", "P"):
        return joined
    if len(ref.subscripts) == 1 and ref.letter in ("V", "R", "Isc"):
        for cut in range(1, len(sub)):
            if sub[:cut] in nodes and sub[cut:] in nodes:
                return f"{ref.letter}_{{{sub[:cut]},{sub[cut:]}}}"
    if len(ref.subscripts) != 1:
        return ""
    near = _nearest(sub, (*nodes, *parts) if ref.letter == "V" else parts)
    return (f"{ref.letter}_{near}" if re.fullmatch(r"\w+", near) else f"{ref.letter}_{{{near}}}") if near else ""


def _nearest(word: str, candidates: tuple[str, ...]) -> str:
    from difflib import get_close_matches  # late: only for a name that is unknown

    exact = {c.lower(): c for c in candidates}
    if word.lower() in exact:
        return exact[word.lower()]
    return next(iter(get_close_matches(word, candidates, 1, 0.6)), "")
