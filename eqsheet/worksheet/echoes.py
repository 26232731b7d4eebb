"""Diagnostics that merely echo a broken line: names that are missing because the line, or a file, was not read."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence

from eqsheet.diagnostics.diagnostic import Diagnostic

_MISSING = frozenset(
    ("unknown-name", "unknown-function", "unknown-instance", "unknown-template", "unknown-index-set")
)
_FILES = frozenset(
    ("unreadable-attachment", "path-not-inside", "include-cycle", "csv-empty", "csv-heading", "csv-quotes")
)
_WORD = re.compile(r"[^\W\d]\w*")


def without_echoes(found: Iterable[Diagnostic], earlier: Sequence[Diagnostic]) -> list[Diagnostic]:
    """The diagnostics without those that miss a name which stands on a line that could not be read.

    Parameters
    ----------
    found : iterable of Diagnostic
        From the statements that could be read.
    earlier : sequence of Diagnostic
        From reading the text.
    """
    if any(diagnostic.code in _FILES for diagnostic in earlier):
        # What a file that was not read would have made cannot be known.
        return [d for d in found if d.code not in _MISSING and d.code != "no-such-member"]
    lost: set[str] = set()
    for diagnostic in earlier:
        if diagnostic.span is not None:
            lost.update(_WORD.findall(diagnostic.span.source.line_text(diagnostic.span.line)))
    return [d for d in found if d.code not in _MISSING or _first_word(d) not in lost]


def _first_word(diagnostic: Diagnostic) -> str:
    word = None if diagnostic.span is None else _WORD.match(diagnostic.span.text)
    return "" if word is None else word[0]
