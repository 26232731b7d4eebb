"""A diagnostic on one line, for editors and for searching."""

from __future__ import annotations

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.diagnostics.printable import printable


def place(diagnostic: Diagnostic) -> str:
    """Where it is: ``file:line:column``; without the numbers where they mean nothing; empty without a file.

    The column counts characters from 1.
    """
    span = diagnostic.span
    if span is None:
        return printable(diagnostic.file)
    if not span.source.numbered:
        return printable(span.source.name)
    return f"{printable(span.source.name)}:{span.line}:{span.column}"


def headline(diagnostic: Diagnostic) -> str:
    """``severity: message [code]``."""
    return f"{diagnostic.severity.value}: {printable(diagnostic.message)} [{diagnostic.code}]"


def one_line(diagnostic: Diagnostic) -> str:
    """``file:line:column: severity: message [code]``, without a line end.

    >>> from eqsheet.diagnostics.diagnostic import Label, error
    >>> from eqsheet.diagnostics.source import Source, Span
    >>> where = Span(Source("loop.eqsheet", "D = 5 lbs"), 6, 9)
    >>> one_line(error("unknown-unit", "unknown unit `lbs`", Label(where)))
    'loop.eqsheet:1:7: error: unknown unit `lbs` [unknown-unit]'
    """
    where = place(diagnostic)
    return f"{where}: {headline(diagnostic)}" if where else headline(diagnostic)
