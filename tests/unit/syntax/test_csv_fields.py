"""Fields of CSV lines: their texts, and their places in the file, with quotes and without."""

from __future__ import annotations

import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.csv_table import read_grid, read_table
from eqsheet.syntax.nodes import Statement, TableRow


def fields(row: Statement) -> list[tuple[str, str]]:
    """Text of each field, and what stands at its place."""
    assert isinstance(row.node, TableRow)
    return [(cell.text, row.span(cell.start, cell.end).text) for cell in row.node.cells]


@pytest.mark.parametrize("delimiter", [",", ";", "\t"])
def test_fields_are_found_where_they_stand(delimiter: str) -> None:
    lines = ["Q in L/s, H in m", " 0 ,  12.5", "7,", ' "8", 3 ', '9,"x, ""y"""']
    table, diagnostics = read_table(Source("pump.csv", "\n".join(lines).replace(",", delimiter)))
    assert not diagnostics
    assert table is not None
    plain, empty, quoted, escaped = map(fields, table.rows)
    assert plain == [("0", "0"), ("12.5", "12.5")]
    assert empty == [("7", "7"), ("", "")]
    assert quoted == [("8", '"8"'), ("3", "3")]
    assert escaped == [("9", "9"), (f'x{delimiter} "y"', f'"x{delimiter} ""y"""')]


def test_the_first_line_of_a_grid_is_a_row_after_its_first_field() -> None:
    for corner, columns in (("Q in L/s", ["Q"]), ("", [])):
        table, diagnostics = read_grid(Source("eta.csv", f"\n{corner}, 10, 20\n1, 5, 6\n"))
        assert not diagnostics
        assert table is not None
        assert [column.name for column in table.columns] == columns
        assert [fields(row) for row in table.rows] == [
            [("10", "10"), ("20", "20")],
            [("1", "1"), ("5", "5"), ("6", "6")],
        ]
        assert [row.line.line for row in table.rows] == [2, 3]


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("", "csv-empty"),
        ("\n\n", "csv-empty"),
        (",10,20", "csv-empty"),
        ("12 m,10\n1,2", "csv-heading"),
        ('"a,1\n1,2', "csv-quotes"),
    ],
)
def test_a_grid_that_cannot_be_read(text: str, code: str) -> None:
    _, diagnostics = read_grid(Source("eta.csv", text))
    assert [d.code for d in diagnostics] == [code]
