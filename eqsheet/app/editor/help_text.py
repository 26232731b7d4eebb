"""The help page of the editor."""

from __future__ import annotations

from eqsheet.app.editor.words import WORDS
from eqsheet.review.columns import in_columns

_HEAD = """\
Type a statement and the worksheet is solved with it. A known takes the place of the known of that
name and keeps its label and comment; so do a start value (`f near 0.02`), a shown unit, a definition
and whatever has the same label. Anything else joins the section you changed last. A statement goes on
in the next line while a bracket is open or the line ends in an operator.
"""

_FOOT = """
A name alone shows that quantity. If a quantity is called like a command, `value list` shows it; a
statement about it (`list = 3 m`) is always taken as a statement.
Tab completes names, units and words. Ctrl-C clears the line or stops a long computation, Ctrl-D quits.
What you type is kept even if it is wrong: it comes back for you to mend, and `undo` takes it out.
"""


def help_lines() -> list[str]:
    """The page, line by line."""
    rows = [(word.usage, word.says) for word in WORDS]
    return [*_HEAD.splitlines(), "", *in_columns(rows, indent="  "), *_FOOT.splitlines()]
