"""CSV files as tables: headings, marks between fields, quotes, and places of slips."""

from __future__ import annotations

import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.csv_table import MOST_BROKEN_ROWS, Table, read_table
from eqsheet.syntax.nodes import TableRow


def table(text: str) -> Table:
    found, diagnostics = read_table(Source("n.csv", text))
    assert diagnostics == ()
    assert found is not None
    return found


def cells(text: str) -> list[list[str]]:
    return [[c.text for c in row.node.cells] for row in table(text).rows if isinstance(row.node, TableRow)]


@pytest.mark.parametrize("mark", [",", ";", "\t", " , ", "; "])
def test_marks_between_fields(mark: str) -> None:
    lines = [("bus", "V in kV", "a of bus"), ("A", "1.5", "B"), ("B", "-", "A")]
    text = "\n".join(mark.join(line) for line in lines) + "\n"
    found = table(text)
    assert [(c.name, c.unit and c.unit.text, c.of) for c in found.columns] == [
        ("bus", None, None), ("V", "kV", None), ("a", None, "bus"),
    ]  # fmt: skip
    assert cells(text) == [["A", "1.5", "B"], ["B", "-", "A"]]


def test_the_mark_is_the_one_of_the_heading() -> None:
    assert cells("n;v\nA;1,5\n") == [["A", "1,5"]]


@pytest.mark.parametrize(
    ("line", "name"),
    [('"NH4+", 1', "NH4+"), ('"a, b", 1', "a, b"), ('"a ""b""", 1', 'a "b"'), ("  A  , 1", "A")],
)
def test_quotes_and_blanks(line: str, name: str) -> None:
    assert cells(f"n, v\n{line}\n")[0][0] == name


def test_blank_lines_are_free() -> None:
    assert cells("\n\nn, v\n\nA, 1\n\nB, 2") == [["A", "1"], ["B", "2"]]


def test_cells_know_their_places() -> None:
    row = table("n, v in m\nA,  12.5\n").rows[0]
    assert isinstance(row.node, TableRow)
    cell = row.node.cells[1]
    span = row.span(cell.start, cell.end)
    assert (span.text, span.line, span.column) == ("12.5", 2, 5)


def test_units_of_the_heading_know_their_places() -> None:
    found = table("n, v in kW/m^2\nA, 1\n")
    unit = found.columns[1].unit
    assert unit is not None
    assert found.heading.span(unit.start, unit.end).text == "kW/m^2"
    assert next(found.heading.span(f.start, f.end).text for f in unit.factors) == "kW"


@pytest.mark.parametrize(
    ("text", "code", "line", "guilty"),
    [
        ("", "csv-empty", 1, ""),
        ("\n \n", "csv-empty", 1, ""),
        ("n, v\n", "csv-empty", 1, "n, v"),
        ("n, v in\nA, 1\n", "csv-heading", 1, "v in"),
        ("n, 3\nA, 1\n", "csv-heading", 1, "3"),
        ("n, v,\nA, 1,\n", "csv-heading", 1, ""),
        ('n, v\n"A, 1\n', "csv-quotes", 2, '"A, 1'),
        ('n, v\nB, 1\n"A"x, 1\n', "csv-quotes", 3, '"A"x, 1'),
    ],
)
def test_slips(text: str, code: str, line: int, guilty: str) -> None:
    _, diagnostics = read_table(Source("n.csv", text))
    assert [d.code for d in diagnostics] == [code]
    span = diagnostics[0].span
    assert span is not None
    assert (span.source.name, span.line, span.text) == ("n.csv", line, guilty)


def test_a_file_of_another_format_is_given_up_soon() -> None:
    found, diagnostics = read_table(Source("n.csv", "n, v\n" + '"x\n' * 10_000))
    assert found is not None
    assert len(diagnostics) == MOST_BROKEN_ROWS + 1
    assert diagnostics[-1].code == "csv-too-many"
