"""One line of source with a part of it underlined, fitted to a width."""

from __future__ import annotations

from dataclasses import dataclass

from eqsheet.diagnostics.printable import printable
from eqsheet.diagnostics.source import Span

_CUT = "..."
# How much of a long line is kept before the place, so that it is read in its surroundings.
_BEFORE = 20


def shown_width(text: str) -> int:
    """Columns `text` takes on a terminal.

    >>> shown_width("ab"), shown_width("温度")
    (2, 4)
    """
    if text.isascii():
        return len(text)
    from wcwidth import wcswidth

    width = wcswidth(text)
    return width if width >= 0 else len(text)


@dataclass(frozen=True, slots=True)
class Excerpt:
    """A line ready to print and the columns to underline in it.

    Attributes
    ----------
    text : str
        The line, tabs widened, control characters replaced, cut to the width asked for.
    indent, length : int
        Columns before the underlined part, and its own; the length is at least 1.
    """

    text: str
    indent: int
    length: int


def _head(text: str, width: int) -> str:
    """The longest beginning of `text` that fits `width` columns."""
    if text.isascii():
        return text[:width]
    used = 0
    for count, character in enumerate(text):
        used += max(0, shown_width(character))
        if used > width:
            return text[:count]
    return text


def _tail(text: str, width: int) -> str:
    """The longest end of `text` that fits `width` columns."""
    return _head(text[::-1], width)[::-1]


def excerpt(span: Span, width: int) -> Excerpt:
    """The first line of `span`, its part of it to be underlined, in at most `width` columns (at least 40)."""
    width = max(width, 40)
    line = span.source.line_text(span.line)
    start = span.column - 1
    end = min(len(line), start + max(0, span.end - span.start))
    before, marked, after = printable(line[:start]), printable(line[start:end]), printable(line[end:])
    if shown_width(before) + shown_width(marked) + shown_width(after) > width:
        if shown_width(before) > _BEFORE:
            before = _CUT + _tail(before, _BEFORE - len(_CUT))
        room = width - shown_width(before)
        if shown_width(marked) > room:
            marked = _head(marked, room - len(_CUT)) + _CUT
            after = ""
        elif shown_width(marked) + shown_width(after) > room:
            after = _head(after, max(0, room - shown_width(marked) - len(_CUT))) + _CUT
    return Excerpt(before + marked + after, shown_width(before), max(1, shown_width(marked)))
