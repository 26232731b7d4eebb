"""A diagnostic as plain data, ready for `json.dumps`."""

from __future__ import annotations

from typing import Any

from eqsheet.diagnostics.diagnostic import Diagnostic, Label
from eqsheet.diagnostics.source import Span


def as_data(diagnostic: Diagnostic) -> dict[str, Any]:
    """The diagnostic as a dict with the keys of the program's JSON output.

    Returns
    -------
    dict
        ``code``, ``severity``, ``file``, ``line``, ``column``, ``message``, ``help``, ``notes`` (list of
        text) and ``labels`` (the secondary places: ``file``, ``line``, ``column``, ``text``, ``says``).
        ``line`` and ``column`` count from 1; None where there is no place or its numbers mean nothing.
    """
    span = diagnostic.span
    line, column = _numbers(span)
    return {
        "code": diagnostic.code,
        "severity": diagnostic.severity.value,
        "file": diagnostic.file if span is None else span.source.name,
        "line": line,
        "column": column,
        "message": diagnostic.message,
        "help": diagnostic.help,
        "notes": list(diagnostic.notes),
        "labels": [_label(label) for label in diagnostic.labels[1:]],
    }


def _numbers(span: Span | None) -> tuple[int | None, int | None]:
    if span is None or not span.source.numbered:
        return None, None
    return span.line, span.column


def _label(label: Label) -> dict[str, Any]:
    line, column = _numbers(label.span)
    return {
        "file": label.span.source.name,
        "line": line,
        "column": column,
        "text": label.span.text,
        "says": label.text,
    }
