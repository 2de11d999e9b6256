"""The pages that are left to people, as typst source: what to tick, and boxes to sign."""

from __future__ import annotations

from calccheck.annotate.record import LIMITS
from calccheck.annotate.record_parts import SIGNATORIES, TICK, givens, raised, signature_rows, waivers
from calccheck.annotate.typst_record import Words
from calccheck.annotate.typst_summary import raised_row
from calccheck.annotate.typst_text import literal


def checker(w: Words) -> str:
    """What the check cannot show, cautions, givens and waivers, each with a box to tick; boxes to sign."""
    opening, points, closing = LIMITS
    listed = "".join(f"[{w.say(p)}]," for p in points)
    cautions = "".join(raised_row(w, e) for e in raised(w.report, w.rows))
    signatories = "".join(f"{literal(s)}," for s in SIGNATORIES)
    return (
        f"#checker-pages[\n#left-limits([{w.say(f'{opening}')}], ({listed}), [{w.say(f'{TICK} {closing}')}])\n"
        f"#left-raised(({cautions}))\n#left-givens(({_givens(w)}))\n#left-waivers(({_waivers(w)}))\n"
        f"#signatures(({_signed(w)}), ({signatories}))\n]\n"
    )


def _givens(w: Words) -> str:
    return "".join(
        f"({literal(e.number)}, {w.target(e)}, {literal(str(e.line))}, [{w.say(e.text)}], [{w.say(source)}]),"
        for e, source in givens(w.report, w.rows)
    )


def _waivers(w: Words) -> str:
    return "".join(
        f"({literal(str(e.line))}, [{w.say(text)}], [{w.say(line)}], [{state}]),"
        for e, text, line, state in waivers(w.report, w.rows)
    )


def _signed(w: Words) -> str:
    return "".join("(" + "".join(f"[{w.say(c)}]," for c in row) + ")," for row in signature_rows(w.report))
