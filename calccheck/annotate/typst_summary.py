"""The front summary, as typst source: the verdict and what nobody should miss, each with a way to its place."""

from __future__ import annotations

from collections.abc import Sequence

from calccheck.annotate.record import Entry, headline, worst_first
from calccheck.annotate.record_parts import MEANINGS, counts, givens, raised, untitled, waivers
from calccheck.annotate.typst_record import Words
from calccheck.annotate.typst_text import literal

_MOST_WORST, _MOST_GIVENS = 14, 40


def summary(w: Words) -> str:
    """Verdict, cautions, counts by basis, the worst first, waivers, open assumptions."""
    in_front = raised(w.report, w.rows)
    table = "".join(
        f"({literal(verdict)}, {_numbers(row)}, [{w.say(MEANINGS[verdict])}])," for verdict, row in counts(w.report)
    )
    return (
        f"#summary({literal(w.report.verdict)}, [{w.say(headline(w.report))}], "
        f"raised-band(({''.join(raised_row(w, e) for e in in_front)})), ({table}), ({_others(w)}), "
        f"{_worst(w, [e for e in w.rows if e not in in_front and e.kind != 'accepted'])} + {_waived(w)} + {_assumed(w)}, "
        f"{w.report.reading.not_read})\n\n"
    )


def raised_row(w: Words, e: Entry) -> str:
    """A caution that the circuit raises: mark, place, words."""
    (said,) = e.sentences((e.message,))
    return f"({literal(e.kind)}, {literal(e.number)}, {w.target(e)}, {literal(str(e.line))}, [{w.tell(said)}]),"


def _numbers(row: Sequence[int]) -> str:
    return "(" + "".join(f"{literal(str(n) if n else '–')}," for n in row) + ")"


def _others(w: Words) -> str:
    title = w.report.reading.title
    return "".join(f"([{w.say(name)}], [{w.say(title[name])}])," for name in untitled(w.report))


def _worst(w: Words, rows: Sequence[Entry]) -> str:
    worst = worst_first(rows)
    more = len(worst) - _MOST_WORST
    rest = f"[{more} more: see the check record.]" if more > 0 else "none"
    return f"worst-part(({''.join(_worst_row(w, e) for e in worst[:_MOST_WORST])}), {rest})"


def _worst_row(w: Words, e: Entry) -> str:
    words = w.written(e) if e.key[0] == "c" else w.say(e.text)
    told = e.sentences([e.message] if e.message else e.cautions[:1])
    return (
        f"({literal(e.note_kind)}, {literal(e.number)}, {w.target(e)}, {literal(str(e.line))}, [{words}], "
        f"[{w.say(e.computed)}], [{w.say(e.deviation)}], [{w.tell(' '.join(told))}]),"
    )


def _waived(w: Words) -> str:
    rows = "".join(
        f"({literal(e.kind)}, {literal(e.number)}, {w.target(e)}, {literal(str(e.line))}, [{w.written(e)}], "
        f"[{w.say(e.computed)}], [{w.say(e.deviation)}], [{w.say(line)}.], [{state}]),"
        for e, _, line, state in waivers(w.report, w.rows)
    )
    return f"waived-part(({rows}))"


def _assumed(w: Words) -> str:
    """What is given, each with a way to its place, in running text."""
    found = [e for e, _ in givens(w.report, w.rows)]
    shown, more = found[:_MOST_GIVENS], len(found) - _MOST_GIVENS
    lead = "One value is given" if len(found) == 1 else f"{len(found)} values are given"
    rows = "".join(
        f"({w.target(e)}, [{w.say(e.text.removeprefix('given ') + ('.' if e is found[-1] else ';'))}])," for e in shown
    )
    rest = f"[ And {more} more: see the pages left to the checker.]" if more > 0 else "none"
    return f"assumed-part([{lead} and checked against nothing:], ({rows}), {rest})"
