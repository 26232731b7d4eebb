"""Tables in CSV as the rows of an indented table, every cell with its place in the file.

The first line is a heading in the same words as in a worksheet: ``bus, V in kV, a of bus``. Fields are parted by
commas, semicolons or tabs, whichever the heading has; quotes are as in RFC 4180, but a field stays on its line.
"""

from __future__ import annotations

import csv

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.diagnostics.source import Source, Span
from eqsheet.syntax.nodes import Cell, Column, LogicalLine, Rows, Statement, TableRow
from eqsheet.syntax.parse import parse_statement

MOST_ROWS = 2_000_000
# After so many broken rows the file is taken to be something else.
MOST_BROKEN_ROWS = 20


def table_rows(
    source: Source, head: Statement
) -> tuple[tuple[Column, ...] | None, tuple[Statement, ...], tuple[Diagnostic, ...]]:
    """Columns, rows and diagnostics of a CSV file.

    Parameters
    ----------
    source : Source
        The file.
    head : Statement
        The line of the worksheet that names it.

    Returns
    -------
    columns : tuple of Column or None
        The first is the column of names (or arguments); None where the heading cannot be read.
    rows : tuple of Statement
    diagnostics : tuple of Diagnostic
    """
    diagnostics: list[Diagnostic] = []
    lines = source.text.split("\n")
    first = next((n for n, line in enumerate(lines) if line.strip()), None)
    if first is None:
        nowhere = Label(Span(source, 0, 0))
        return None, (), (error("csv-empty", f"{source.name} holds no table", nowhere),)
    delimiter = _delimiter(lines[first])
    offset = sum(len(line) + 1 for line in lines[:first])
    columns = _columns(source, lines[first], offset, delimiter, diagnostics)
    if columns is None:
        return None, (), tuple(diagnostics)
    rows: list[Statement] = []
    for number in range(first, len(lines)):
        line = lines[number]
        if number > first and line.strip():
            cells = _cells(source, line, offset, delimiter, diagnostics)
            if cells is not None:
                logical = LogicalLine(line, offset, number + 1, 0)
                rows.append(Statement(TableRow(0, len(line), cells), logical, source, section=head.section))
            if len(diagnostics) >= MOST_BROKEN_ROWS or len(rows) > MOST_ROWS:
                where = Label(Span(source, offset, offset + len(line)))
                diagnostics.append(error("csv-too-many", "the rest of this file was not read", where))
                break
        offset += len(line) + 1
    return columns, tuple(rows), tuple(diagnostics)


def _delimiter(heading: str) -> str:
    """The mark between fields: the one that the heading has most of; a comma where it has none."""
    return max((",", ";", "\t"), key=heading.count)


def _columns(
    source: Source, line: str, offset: int, delimiter: str, diagnostics: list[Diagnostic]
) -> tuple[Column, ...] | None:
    columns = []
    for cell in _cells(source, line, offset, delimiter, diagnostics) or ():
        statement, found = parse_statement(
            Source(source.name, f"rows x: {cell.text}\n    a 1", numbered=False)
        )
        node = None if statement is None else statement.node
        if found or not isinstance(node, Rows) or len(node.columns) != 1:
            diagnostics.append(
                error(
                    "csv-heading",
                    f"`{cell.text}` is not the heading of a column",
                    Label(Span(source, offset + cell.start, offset + cell.end)),
                    help="write `name`, `name in UNIT` or `name of SET`",
                )
            )
            continue
        column = node.columns[0]
        columns.append(Column(cell.start, cell.end, column.name, column.unit, column.of))
    return None if diagnostics else tuple(columns)


def _cells(
    source: Source, line: str, offset: int, delimiter: str, diagnostics: list[Diagnostic]
) -> tuple[Cell, ...] | None:
    """Fields of a line with their places; None after a diagnostic."""
    spans = _spans(line, delimiter)
    try:
        (values,) = csv.reader([line], delimiter=delimiter, skipinitialspace=True, strict=True)
    except (csv.Error, ValueError):
        values = []
    if len(values) != len(spans):
        diagnostics.append(
            error(
                "csv-quotes",
                "the quotes of this line do not match",
                Label(Span(source, offset, offset + len(line))),
                help="a quote inside a quoted field is written twice; a field stays on its line",
            )
        )
        return None
    return tuple(
        Cell(start, end, value.strip(), quoted=line[start : start + 1] == '"')
        for (start, end), value in zip(spans, values)
    )


def _spans(line: str, delimiter: str) -> list[tuple[int, int]]:
    """Where each field stands, without the blanks around it."""
    spans = []
    start = 0
    quoted = False
    for i, character in enumerate(line + delimiter):
        if character == '"':
            quoted = not quoted
        elif character == delimiter and (not quoted or i == len(line)):
            field = line[start:i]
            left = start + len(field) - len(field.lstrip())
            spans.append((left, max(left, start + len(field.rstrip()))))
            start = i + 1
    return spans
