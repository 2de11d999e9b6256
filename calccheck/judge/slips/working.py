"""Slips in the working itself: a number put in that does not belong, arithmetic, rounding too early."""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction

from calccheck.arithmetic import Amount, DimensionFault, Doubt, evaluate
from calccheck.formula import Binary, Call, Group, Node, Number, Reference, Unary, numbers
from calccheck.judge.laws import followed
from calccheck.judge.members import Worked
from calccheck.judge.rounding import equal, fit, printed
from calccheck.judge.scope import magnitude
from calccheck.judge.slips.case import Case, Guess
from calccheck.judge.slips.rewriting import everywhere, opened
from calccheck.judge.trace import reach
from calccheck.printing import shown


def working_slip(case: Case) -> Iterator[Guess]:
    """A substitution that does not reach the truth for one number in it; a value that its substitution does not give."""
    first = next(iter(case.members("differs")), None)
    if first is not None and first.sort == "substitution":
        yield from _number_put_in(first, case)
    last = right_substitution(case)
    if last is not None and last.amount is not None and not _follows(case, last.amount):
        room = max(1, round(1 / case.chance)) if case.chance else 1  # numbers as near that it might as well be
        figures = max(4, *(f.printed.figures for f in case.figures))
        told = f"an arithmetic slip: {last.member.text} comes to {shown(last.amount, figures=figures)}"
        yield Guess(told, certain=True, tried=room)


def early_rounding(case: Case) -> Iterator[Guess]:
    """The rounded numbers of the working, or values printed above, carried on."""
    last = right_substitution(case)
    if last is not None:
        if last.amount is not None:
            yield Guess(f"rounding too early: {last.member.text} worked with its rounded numbers", last.amount.value)
        return
    key, circuit = case.key, case.circuit
    if key is not None and circuit is not None:
        for value, law in followed(key, case.ledger, circuit):
            yield Guess(f"rounding too early: {law} worked with the rounded values printed above", value)


def right_substitution(case: Case) -> Worked | None:
    """The last substitution that stands, before the value that does not."""
    stand = [w for w in case.members("agrees", "rounded") if w.sort == "substitution"]
    return stand[-1] if stand and case.figures else None


def _follows(case: Case, amount: Amount) -> bool:
    """Whether the printed value is a working's result, rounded or cut off."""
    return amount.dimension == case.dimension and case.fits(amount.value) > 0


# --- the number that does not belong --------------------------------------------------------------------------------


def _number_put_in(w: Worked, case: Case) -> Iterator[Guess]:
    """For each number that does not stand for its piece of the formula: whether the member is right with that piece."""
    formula = _formula_before(w, case)
    pairs = aligned(formula, w.node) if formula is not None else None
    wrong = [(n, f) for n, f in pairs if not _stands_for(n, f, case)] if pairs is not None else list(_any_part(w, case))
    for number, piece in wrong:
        mended = _with_piece(w.node, number, piece)
        if _reaches(w, mended, case):
            told = _put_in(number, piece, w, case)
            yield Guess(told, certain=True, tried=1 if pairs is not None else len(wrong))


def _formula_before(w: Worked, case: Case) -> Node | None:
    """The formula that a substitution puts numbers into."""
    chain = [case.held, *(m for m, step in case.miss.judged if step.verdict in ("agrees", "rounded"))]
    before = [m for m in chain if m.sort == "formula" and m.member.span.start < w.member.span.start]
    bare = [m for m in before if not isinstance(m.node, Reference)]
    return bare[-1].node if bare else None


def aligned(formula: Node, put_in: Node) -> list[tuple[Node, Node]] | None:
    """The numbers of a substitution, signed or not, each with the piece of the formula that it stands for.

    ``None`` for a substitution of another shape than the formula's.
    """
    formula, put_in = opened(formula), opened(put_in)
    same = isinstance(put_in, Number) and isinstance(formula, Number) and formula.digits == put_in.digits
    if printed(put_in) is not None and not same and type(formula) is not type(put_in):
        return [(put_in, formula)]
    match formula, put_in:
        case Unary(), Unary() if formula.sign == put_in.sign:
            return aligned(formula.operand, put_in.operand)
        case Binary(), Binary() if _same_operator(formula, put_in):
            left, right = aligned(formula.left, put_in.left), aligned(formula.right, put_in.right)
            return None if left is None or right is None else left + right
        case Call(), Call() if formula.function == put_in.function and len(formula.arguments) == len(put_in.arguments):
            found = [aligned(f, p) for f, p in zip(formula.arguments, put_in.arguments, strict=True)]
            return None if None in found else [pair for pairs in found for pair in pairs or ()]
        case (Reference(), Reference()) | (Number(), Number()):
            return []
    return None


def _same_operator(a: Binary, b: Binary) -> bool:
    return a.operator == b.operator or {a.operator, b.operator} == {"×", "·"}


def _stands_for(n: Node, piece: Node, case: Case) -> bool:
    """Whether a number is its piece's value, rounded or not, or a value printed above for it that stands."""
    p, amount = printed(n), _amount(piece, case)
    if p is None or amount is None or isinstance(amount.value, complex):
        return True
    if amount.dimension != p.amount.dimension:
        return False
    above = case.ledger.standing.get(magnitude(p.amount))
    carried = above is not None and equal(above.truth.value, amount.value)
    return carried or fit(p, amount.value, Fraction(0)) != "no"


def _amount(piece: Node, case: Case) -> Amount | None:
    try:
        return evaluate(piece, case.names.amount)
    except (Doubt, DimensionFault):
        return None


def _any_part(w: Worked, case: Case) -> Iterator[tuple[Node, Node]]:
    """Every number with every part and assumption of its dimension that it might have been meant for."""
    words = [e.name for c in case.ledger.circuits for e in c.elements if e.stated is not None]
    words += [d.name for d in case.ledger.names.values() if d.given]
    for n in numbers(w.node):
        p = printed(n)
        for word in words:
            piece = Reference(word, n.span, text=word)
            amount = _amount(piece, case)
            if p and amount and amount.dimension == p.amount.dimension and amount.value != p.amount.value:
                yield n, piece


def _with_piece(node: Node, number: Node, piece: Node) -> Node:
    """The expression with a piece in the place of a number, wherever the number is printed alike."""
    digits = printed(number)

    def change(n: Node) -> Node | None:
        return Group(piece, n.span) if digits is not None and printed(n) == digits else None

    return everywhere(node, change)


def _reaches(w: Worked, mended: Node, case: Case) -> bool:
    """Whether a mended substitution comes to the truth within the rounding of its other numbers."""
    left = numbers(mended)
    traced = [t for t in case.miss.ground.traced(w) if t.number in left]
    try:
        return reach(mended, case.names.amount, traced, {}).holds(case.truth)
    except (Doubt, DimensionFault):
        return False


def _put_in(number: Node, piece: Node, w: Worked, case: Case) -> str:
    amount, p = _amount(piece, case), printed(number)
    assert p is not None
    value = shown(amount, p.written_in) if amount is not None else ""
    belongs = f"{piece.text or piece.word} = {value}" if isinstance(piece, Reference) else value
    put = f"{p.digits} {p.written_in.text}".strip().replace("-", "−")
    return f"{put} put in where {belongs} belongs in {w.member.text}"
