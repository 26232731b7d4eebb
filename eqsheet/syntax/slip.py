"""A slip in one logical line: what keeps it from being read, before it is given its place in a source."""

from __future__ import annotations


class Slip(Exception):
    """Raised while one logical line is read; caught in `parse` and turned into a diagnostic.

    Attributes
    ----------
    code : str
        Code of the diagnostic.
    message : str
        Its headline.
    start, end : int
        The guilty characters, counted from the start of the logical line's text.
    help : str
        The cure.
    notes : tuple of str
        Further facts.
    """

    def __init__(
        self, code: str, message: str, start: int, end: int, help: str = "", notes: tuple[str, ...] = ()
    ) -> None:
        super().__init__(message)
        self.code = code
        self.message = message
        self.start = start
        self.end = end
        self.help = help
        self.notes = notes


class Unexpected(Exception):
    """Raised by the automaton where no production goes on; `slips` finds out what was meant.

    Attributes
    ----------
    position : int
        Where the token that does not fit starts (the text's length at its end).
    expected : tuple of str
        Terminals that would have fitted.
    before : tuple of (str, int, int)
        The tokens read so far: terminal, start, end.
    """

    def __init__(
        self, position: int, expected: tuple[str, ...], before: tuple[tuple[str, int, int], ...]
    ) -> None:
        super().__init__(f"unexpected text at {position}")
        self.position = position
        self.expected = expected
        self.before = before
