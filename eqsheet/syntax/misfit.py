"""The place where a statement stops fitting the grammar, with what the rules about slips ask of it."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import cached_property

from eqsheet.syntax.slip import Slip

RESERVED = frozenset(
    (
        *("if", "then", "else", "and", "or", "not", "for", "in"),
        *("within", "valid", "require", "show", "define"),
    )
)
ENDS_OF_OPERANDS = frozenset(("NAME", "NUMBER", "SIGNED_NUMBER", "RPAR", "RSQB", "UNIT", "TEXT"))
OPERATORS = frozenset(("PLUS", "MINUS", "STAR", "SLASH", "CARET"))
COMPARISONS = frozenset(("EQUALS", "LESS", "LESS_EQUAL", "GREATER", "GREATER_EQUAL", "UNEQUAL"))

_WORD = re.compile(r"(?:[^\W\d]|_)[\w\u0300-\u036f]*")
_THING = re.compile(
    r"[0-9]+(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?|(?:[^\W\d]|_)[\w\u0300-\u036f]*|\(|\[|\"[^\"\n]*\"?|."
)


@dataclass(frozen=True)
class Misfit:
    """Where and among what the text does not fit.

    Attributes
    ----------
    text : str
        The logical line.
    position : int
        Where the part that does not fit starts; the text's length if the text ends too early.
    expected : frozenset of str
        Terminals that would have fitted.
    before : tuple of (str, int, int)
        The tokens read so far: terminal, start, end.
    """

    text: str
    position: int
    expected: frozenset[str]
    before: tuple[tuple[str, int, int], ...]

    @cached_property
    def rest(self) -> str:
        """The text from the misfit on."""
        return self.text[self.position :]

    @property
    def at_end(self) -> bool:
        """Whether the text ends too early."""
        return self.position >= len(self.text)

    @property
    def last(self) -> str:
        """Terminal of the token before, empty at the start."""
        return self.before[-1][0] if self.before else ""

    @property
    def last_text(self) -> str:
        """Text of the token before."""
        return self.text[self.before[-1][1] : self.before[-1][2]] if self.before else ""

    @property
    def last_start(self) -> int:
        """Where the token before starts."""
        return self.before[-1][1] if self.before else 0

    @property
    def touches(self) -> bool:
        """Whether the misfit stands directly after the token before."""
        return bool(self.before) and self.before[-1][2] == self.position

    @property
    def first(self) -> str:
        """Terminal of the first token that is no label and no ``off``."""
        return next((t for t, _, _ in self.before if t not in ("LABEL", "OFF")), "")

    @cached_property
    def word(self) -> str:
        """The word at the misfit, empty if none stands there."""
        found = _WORD.match(self.rest)
        return found.group() if found else ""

    @cached_property
    def thing(self) -> str:
        """The number, word, sign or quoted text at the misfit; empty at the end."""
        found = _THING.match(self.rest)
        return found.group() if found else ""

    def has(self, terminal: str) -> bool:
        """Whether `terminal` was among the tokens read."""
        return any(t == terminal for t, _, _ in self.before)

    def here(self, code: str, message: str, help: str = "", length: int = 0) -> Slip:
        """A slip at the misfit; at the end of the text, on its last character."""
        if self.at_end:
            return Slip(code, message, max(0, len(self.text) - 1), len(self.text), help)
        return Slip(code, message, self.position, self.position + (length or len(self.thing) or 1), help)

    def with_last(self, code: str, message: str, help: str = "", length: int = 1) -> Slip:
        """A slip from the token before through `length` characters of the misfit."""
        return Slip(code, message, self.last_start, min(self.position + length, len(self.text)), help)

    def at_last(self, code: str, message: str, help: str = "") -> Slip:
        """A slip at the token before."""
        return Slip(code, message, self.before[-1][1], self.before[-1][2], help)
