"""Tables in CSV as the rows of an indented table, every cell with its place in the file.

The first line is a heading in the same words as in a worksheet: ``bus, V in kV, a of bus``. Fields are parted by
commas, semicolons or tabs, whichever the heading has; quotes are as in RFC 4180, but a field stays on its line.
"""

from __future__ import annotations

import csv
from dataclasses import dataclass, replace

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.diagnostics.source import Source, Span
from eqsheet.syntax.nodes import Cell, Column, LogicalLine, Rows, Statement, TableRow, UnitText
from eqsheet.syntax.parse import parse_statement

MOST_ROWS = 2_000_000
# After so many broken rows the file is taken to be something else.
MOST_BROKEN_ROWS = 20
# What stands before a heading's words where they are read as the heading of rows in a worksheet.
_HEAD = "rows x: "


@dataclass(frozen=True, slots=True)
class Table:
    """What a CSV file holds.

    Attributes
    ----------
    heading : Statement
        The first line.
    columns : tuple of Column
        The first is the column of names (or arguments); places count in the heading.
    rows : tuple of Statement
    """

    heading: Statement
    columns: tuple[Column, ...]
    rows: tuple[Statement, ...]


def read_table(source: Source, section: str = "") -> tuple[Table | None, tuple[Diagnostic, ...]]:
    """The table in a CSV file, None where its heading cannot be read, and what is wrong with it.

    Parameters
    ----------
    source : Source
        The file.
    section : str
        Section of the worksheet that the rows belong to.
    """
    diagnostics: list[Diagnostic] = []
    lines = source.text.split("\n")
    first = next((n for n, line in enumerate(lines) if line.strip()), None)
    if first is None:
        nowhere = Label(Span(source, 0, 0))
        return None, (error("csv-empty", f"{source.name} holds no table", nowhere, help=_WANTED),)
    delimiter = _delimiter(lines[first])
    offset = sum(len(line) + 1 for line in lines[:first])
    columns, cells = _columns(source, lines[first], offset, delimiter, diagnostics)
    if columns is None:
        return None, tuple(diagnostics)
    heading = _statement(source, lines[first], offset, first, cells, section)
    rows: list[Statement] = []
    offset += len(lines[first]) + 1
    for number in range(first + 1, len(lines)):
        line = lines[number]
        if line.strip():
            found = _cells(source, line, offset, delimiter, diagnostics)
            if found is not None:
                rows.append(_statement(source, line, offset, number, found, section))
            if len(diagnostics) >= MOST_BROKEN_ROWS or len(rows) > MOST_ROWS:
                where = Label(Span(source, offset, offset + len(line)))
                diagnostics.append(
                    error("csv-too-many", "the rest of this file was not read", where, help=_LIMITS)
                )
                break
        offset += len(line) + 1
    if not rows and not diagnostics:
        diagnostics.append(error("csv-empty", "this table has no rows", Label(heading.whole), help=_WANTED))
    return Table(heading, columns, tuple(rows)), tuple(diagnostics)


_WANTED = "the first line is the heading, and each further line a row"
_LIMITS = f"a table has at most {MOST_ROWS:,} rows; where many rows are broken, it may be of another format"


def _statement(
    source: Source, line: str, offset: int, number: int, cells: tuple[Cell, ...], section: str
) -> Statement:
    node = TableRow(0, len(line), cells)
    return Statement(node, LogicalLine(line, offset, number + 1, 0), source, section=section)


def _delimiter(heading: str) -> str:
    """The mark between fields: the one that the heading has most of; a comma where it has none."""
    return max((",", ";", "\t"), key=heading.count)


def _columns(
    source: Source, line: str, offset: int, delimiter: str, diagnostics: list[Diagnostic]
) -> tuple[tuple[Column, ...] | None, tuple[Cell, ...]]:
    columns = []
    cells = _cells(source, line, offset, delimiter, diagnostics) or ()
    for cell in cells:
        statement, found = parse_statement(
            Source(source.name, f"{_HEAD}{cell.text}\n    a 1", numbered=False)
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
        unit = None if column.unit is None else _moved(column.unit, cell.start - len(_HEAD))
        columns.append(Column(cell.start, cell.end, column.name, unit, column.of))
    return None if diagnostics else tuple(columns), cells


def _moved(unit: UnitText, by: int) -> UnitText:
    """The unit with its places moved."""
    factors = tuple(replace(f, start=f.start + by, end=f.end + by) for f in unit.factors)
    return replace(unit, start=unit.start + by, end=unit.end + by, factors=factors)


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
