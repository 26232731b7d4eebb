"""What the comment at the end of a statement says: description, source and assumption."""

from __future__ import annotations

import re
from typing import NamedTuple

_MARKER = re.compile(r"(?:^|(?<=[\s;,.]))(source|assume)[ \t]*:[ \t]*", re.IGNORECASE)


class Remarks(NamedTuple):
    """The parts of an end comment, each empty where it is not given."""

    description: str = ""
    origin: str = ""
    assumption: str = ""


NO_REMARKS = Remarks()


def remarks(comment: str) -> Remarks:
    """The parts of `comment`; a note that is given twice is joined with a semicolon.

    >>> remarks("bore; source: drawing P-104 rev B; assume: clean")
    Remarks(description='bore', origin='drawing P-104 rev B', assumption='clean')
    """
    if not comment:
        return NO_REMARKS
    marks = list(_MARKER.finditer(comment))
    if not marks:
        return Remarks(comment)
    found: dict[str, list[str]] = {"source": [], "assume": []}
    for mark, following in zip(marks, (*marks[1:], None)):
        end = following.start() if following else len(comment)
        found[mark[1].lower()].append(comment[mark.end() : end].strip(" \t;,"))
    return Remarks(
        comment[: marks[0].start()].strip(" \t;,"), "; ".join(found["source"]), "; ".join(found["assume"])
    )
