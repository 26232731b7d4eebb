"""Text that is safe to print: nothing in it that a terminal could act upon."""

from __future__ import annotations

TAB_WIDTH = 4


def printable(text: str) -> str:
    """`text` with tabs widened and every control character replaced by U+FFFD.

    Worksheets and file names come from anywhere; an escape sequence in them must not reach the terminal.

    >>> printable("a\\tb\\x1b[2J")
    'a    b\\ufffd[2J'
    """
    widened = text.replace("\t", " " * TAB_WIDTH)
    if widened.isprintable():
        return widened
    return "".join(character if character.isprintable() else "\ufffd" for character in widened)
