"""How far the tokens of a piece are taken, and how to give up at one."""

from __future__ import annotations

from typing import NoReturn

from calccheck.arithmetic import Doubt
from calccheck.read.tokens import Token, tokens
from calccheck.source import Piece, Span


class Cursor:
    """The state of one parse: the tokens of a piece and how far they are taken."""

    __slots__ = ("at", "deep", "maths", "piece", "seen")

    def __init__(self, piece: Piece, seen: list[Token] | None = None) -> None:
        self.piece, self.seen, self.at, self.deep = piece, seen or tokens(piece), 0, 0
        self.maths = seen is not None

    @property
    def now(self) -> Token:
        """The next token."""
        return self.seen[self.at]

    def take(self) -> Token:
        """The next token, taken."""
        self.at += 1
        return self.seen[self.at - 1]

    def span(self, start: int, end: int | None = None) -> Span:
        """The place in the sheet from an offset in the piece to the last token taken."""
        return self.piece.span(start, self.seen[self.at - 1].end if end is None else end)

    def fail(self, reason: str, token: Token | None = None, suggestion: str = "") -> NoReturn:
        """Give up at a token."""
        t = token or self.now
        end = min(max(t.end, t.start + 1), len(self.piece.text))
        raise Doubt(reason, self.piece.span(max(0, min(t.start, end - 1)), end), suggestion)

    def expect_end(self) -> None:
        """Nothing may follow."""
        if self.now.kind != "end":
            self.fail(f"expected an operator or the end, found {self.shown(self.now)}")

    def shown(self, t: Token) -> str:
        """A token as written."""
        return "the end" if t.kind == "end" else self.piece.text[t.start : t.end]

    def is_operator(self, *texts: str) -> bool:
        """Whether the next token is one of these operators."""
        t = self.seen[self.at]
        return t.kind == "operator" and t.text in texts

    def close(self, sign: str, opened: Token) -> None:
        """Take the closing sign."""
        if not self.is_operator(sign):
            self.fail(f"expected {sign} to close this, found {self.shown(self.now)}", opened)
        self.take()

    def name(self, what: str) -> str:
        """The next word, as a name."""
        if self.now.kind != "word":
            self.fail(f"expected {what}, found {self.shown(self.now)}")
        return self.take().text

    def keyword(self, word: str, behind: str) -> None:
        """A word that must stand here."""
        if self.now.text != word:
            self.fail(f"expected {word} behind {behind}, found {self.shown(self.now)}")
        self.take()
