"""Tables in CSV as the rows of an indented table, every cell with its place in the file.

The first line is a heading in the same words as in a worksheet: ``bus, V in kV, a of bus``. Fields are parted by
commas, semicolons or tabs, whichever the heading has; quotes are as in RFC 4180, but a field stays on its line.

The table of a surface is a grid: its first line holds the values of the second argument, after one field that is
empty or the heading of the first argument.
"""

from __future__ import annotations

import csv
import re
from dataclasses import dataclass, replace

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.diagnostics.shortened import shortened
from eqsheet.diagnostics.source import Source, Span
from eqsheet.syntax.nodes import Cell, Column, LogicalLine, Rows, Statement, TableRow, UnitText
from eqsheet.syntax.parse import parse_statement

MOST_ROWS = 2_000_000
# After so many broken rows the file is taken to be something else.
MOST_BROKEN_ROWS = 20
# What stands before a heading's words where they are read as the heading of rows in a worksheet.
_HEAD = "rows x: "
# A name and a unit: in brackets, after `in`, or after a blank where it looks like no second word of a name.
_WITH_UNIT = re.compile(
    r"(\w[\w ]*?)\s*(?:\sin\s+|(?=[\[(])|\s(?=\S{1,3}$|\S*[/^°%*·]))[\[(]?([^\s\[\]()]{1,40})[\])]?"
)
_POWER = re.compile(r"([^\W\d])(-?[0-9])")
_PLAIN_SIGNS = str.maketrans({"°": "deg", "²": "^2", "³": "^3", "⋅": "*", "×": "*", "℃": "degC", "Ω": "Ohm"})


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
    file = _opened(source, section, diagnostics)
    if file is None:
        return None, tuple(diagnostics)
    cells = _cells(source, file.text, file.offset, file.delimiter, diagnostics) or ()
    columns = _columns(source, cells, file.offset, diagnostics)
    if columns is None:
        return None, tuple(diagnostics)
    heading = _statement(source, file.text, file.offset, file.first, cells, section)
    return Table(heading, columns, _rows(file, heading, diagnostics)), tuple(diagnostics)


def read_grid(source: Source, section: str = "") -> tuple[Table | None, tuple[Diagnostic, ...]]:
    """The table of a surface in a CSV file; parameters and diagnostics as in `read_table`.

    Its first row is what the first line holds after its first field; `columns` has the column of the first
    argument, and is empty where that field is.
    """
    diagnostics: list[Diagnostic] = []
    file = _opened(source, section, diagnostics)
    if file is None:
        return None, tuple(diagnostics)
    cells = _cells(source, file.text, file.offset, file.delimiter, diagnostics) or ()
    corner = cells[:1] if cells and cells[0].text else ()
    columns = _columns(source, corner, file.offset, diagnostics)
    if columns is None:
        return None, tuple(diagnostics)
    heading = _statement(source, file.text, file.offset, file.first, cells[1:], section)
    rows = _rows(file, heading, diagnostics)
    return Table(heading, columns, (heading, *rows)), tuple(diagnostics)


@dataclass(frozen=True, slots=True)
class _File:
    """A file cut into lines: its heading is line `first`, at `offset` in the text."""

    source: Source
    section: str
    lines: list[str]
    first: int
    offset: int
    delimiter: str

    @property
    def text(self) -> str:
        """Of the heading."""
        return self.lines[self.first]


def _opened(source: Source, section: str, diagnostics: list[Diagnostic]) -> _File | None:
    lines = source.text.split("\n")
    first = next((n for n, line in enumerate(lines) if line.strip()), None)
    if first is None:
        nowhere = Label(Span(source, 0, 0))
        diagnostics.append(error("csv-empty", f"{source.name} holds no table", nowhere, help=_WANTED))
        return None
    offset = sum(len(line) + 1 for line in lines[:first])
    return _File(source, section, lines, first, offset, _delimiter(lines[first]))


def _rows(file: _File, heading: Statement, diagnostics: list[Diagnostic]) -> tuple[Statement, ...]:
    """All rows after the heading."""
    rows: list[Statement] = []
    source, offset = file.source, file.offset + len(file.text) + 1
    for number in range(file.first + 1, len(file.lines)):
        line = file.lines[number]
        if line.strip():
            found = _cells(source, line, offset, file.delimiter, diagnostics)
            if found is not None:
                rows.append(_statement(source, line, offset, number, found, file.section))
            if len(diagnostics) >= MOST_BROKEN_ROWS or len(rows) > MOST_ROWS:
                where = Label(Span(source, offset, offset + len(line)))
                diagnostics.append(
                    error("csv-too-many", "the rest of this file was not read", where, help=_LIMITS)
                )
                break
        offset += len(line) + 1
    if not rows and not diagnostics:
        diagnostics.append(error("csv-empty", "this table has no rows", Label(heading.whole), help=_WANTED))
    return tuple(rows)


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
    source: Source, cells: tuple[Cell, ...], offset: int, diagnostics: list[Diagnostic]
) -> tuple[Column, ...] | None:
    """What the fields of a heading mean; None after a diagnostic."""
    columns = []
    for cell in cells:
        column = _column(cell.text)
        if column is None:
            diagnostics.append(
                error(
                    "csv-heading",
                    f"`{shortened(cell.text)}` is not the heading of a column",
                    Label(Span(source, offset + cell.start, offset + cell.end)),
                    help=_cure_of_heading(cell.text),
                )
            )
            continue
        unit = None if column.unit is None else _moved(column.unit, cell.start - len(_HEAD))
        columns.append(Column(cell.start, cell.end, column.name, unit, column.of))
    return None if diagnostics else tuple(columns)


def _column(text: str) -> Column | None:
    """What a field of a heading means, None where it means nothing; places count from the start of the statement."""
    statement, found = parse_statement(Source("heading", f"{_HEAD}{text}\n    a 1", numbered=False))
    node = None if statement is None else statement.node
    if found or not isinstance(node, Rows) or len(node.columns) != 1:
        return None
    return node.columns[0]


def _cure_of_heading(text: str) -> str:
    """How to write a heading whose unit stands in brackets or in signs of another notation.

    >>> _cure_of_heading("L [m]"), _cure_of_heading("rho kg/m3"), _cure_of_heading("pipe length")
    ('write `L in m`', 'write `rho in kg/m^3`', 'write `name`, `name in UNIT` or `name of SET`')
    """
    found = _WITH_UNIT.fullmatch(text)
    if found is not None:
        unit = _POWER.sub(r"\1^\2", found[2].translate(_PLAIN_SIGNS))
        written = f"{found[1].replace(' ', '_')} in {unit}"
        if _column(written) is not None:
            return f"write `{written}`"
    return "write `name`, `name in UNIT` or `name of SET`"


def _moved(unit: UnitText, by: int) -> UnitText:
    """The unit with its places moved."""
    factors = tuple(replace(f, start=f.start + by, end=f.end + by) for f in unit.factors)
    return replace(unit, start=unit.start + by, end=unit.end + by, factors=factors)


def _cells(
    source: Source, line: str, offset: int, delimiter: str, diagnostics: list[Diagnostic]
) -> tuple[Cell, ...] | None:
    """Fields of a line with their places; None after a diagnostic."""
    if '"' not in line:
        return _unquoted(line, delimiter)
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


def _unquoted(line: str, delimiter: str) -> tuple[Cell, ...]:
    """Fields of a line without quotes, which are most by far."""
    cells = []
    start = 0
    for field in line.split(delimiter):
        text = field.strip()
        left = start + field.find(text)
        cells.append(Cell(left, left + len(text), text))
        start += len(field) + 1
    return tuple(cells)


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
