"""Source texts and places in them."""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import dataclass, field
from functools import cached_property


@dataclass(frozen=True)
class Source:
    """One text the program has read: a file, standard input or a `--with` argument.

    Attributes
    ----------
    name : str
        What messages call it: the path as the user gave it, ``<stdin>`` or ``--with``.
    text : str
        The whole text, line ends normalised to ``\\n``, without byte order mark.
    numbered : bool
        False where line numbers mean nothing to the user (a `--with` argument).
    attached : bool
        A file that a worksheet names; its lines are told from the worksheet's own by its name.
    """

    name: str
    text: str = field(repr=False)
    numbered: bool = True
    attached: bool = False

    @cached_property
    def line_starts(self) -> tuple[int, ...]:
        """Offset of the first character of each line."""
        starts = [0]
        position = self.text.find("\n")
        while position >= 0:
            starts.append(position + 1)
            position = self.text.find("\n", position + 1)
        return tuple(starts)

    def line_and_column(self, offset: int) -> tuple[int, int]:
        """Line and column of `offset`, both counted from 1.

        >>> Source("a", "x = 1\\ny = 2").line_and_column(8)
        (2, 3)
        """
        line = bisect_right(self.line_starts, offset)
        return line, offset - self.line_starts[line - 1] + 1

    def line_text(self, line: int) -> str:
        """Text of line number `line` (from 1) without its line end; empty past the end."""
        if not 1 <= line <= len(self.line_starts):
            return ""
        start = self.line_starts[line - 1]
        end = self.text.find("\n", start)
        return self.text[start:] if end < 0 else self.text[start:end]


@dataclass(frozen=True, slots=True)
class Span:
    """Characters ``start`` up to (not including) ``end`` of a source, as offsets from 0."""

    source: Source
    start: int
    end: int

    @property
    def line(self) -> int:
        """Line number of the first character, from 1."""
        return self.source.line_and_column(self.start)[0]

    @property
    def column(self) -> int:
        """Column of the first character, from 1."""
        return self.source.line_and_column(self.start)[1]

    @property
    def text(self) -> str:
        """The text spanned."""
        return self.source.text[self.start : self.end]
