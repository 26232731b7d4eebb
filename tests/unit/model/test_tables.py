"""Rows of a worksheet as sets, member columns and knowns."""

from __future__ import annotations

import pytest

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.diagnostics.source import Source
from eqsheet.model.tables import MOST_SAID, Tables, collect_tables
from eqsheet.model.unit_statements import collect_units
from eqsheet.syntax.parse import parse_document


def tables(text: str) -> tuple[Tables, list[Diagnostic]]:
    document, found = parse_document(Source("x", text))
    assert [d.code for d in found] == []
    diagnostics: list[Diagnostic] = []
    return collect_tables(
        document.statements, collect_units(document.statements, []), diagnostics
    ), diagnostics


def sound(text: str) -> Tables:
    found, diagnostics = tables(text)
    assert diagnostics == []
    return found


def test_members_in_order_of_the_rows() -> None:
    found = sound('rows species: z\n    H2O 0.2\n    "NH4+" 0.8\n')
    assert found.sets["species"].members == ("H2O", "NH4+")
    assert found.sets["species"].positions == {"H2O": 0, "NH4+": 1}


def test_values_in_units_and_cells_left_unknown() -> None:
    (column,) = sound("rows bus: P in kW\n    A 10\n    B -\n    C -2.5e1\n").columns
    assert [(known.code, known.literal.value) for known in column.knowns] == [(0, 10e3), (2, -25e3)]
    assert column.codes.tolist() == [0, 1, 2]


def test_readings_are_told_from_differences() -> None:
    absolute, difference = sound("rows room: T in degC, dT in K\n    A 20 5\n").columns
    assert absolute.knowns[0].literal.value == pytest.approx(293.15)
    assert absolute.knowns[0].literal.kind == "reading"
    assert difference.knowns[0].literal.value == 5


def test_columns_that_name_members_of_another_or_their_own_set() -> None:
    text = "rows line: a of bus, next of line\n    L1 B L2\n    L2 A -\nrows bus:\n    A\n    B\n"
    members = sound(text).members
    assert (members["a"].rows, members["a"].of, members["a"].codes.tolist()) == ("line", "bus", [1, 0])
    assert members["next"].codes.tolist() == [1, -1]


def test_a_table_switched_off_is_none() -> None:
    assert sound("off rows bus: P\n    A 1\nx = 2\n").sets == {}


@pytest.mark.parametrize(
    ("text", "code", "line", "guilty"),
    [
        ("rows n: v\n    A 1\nrows n: w\n    B 2\n", "index-set-twice", 3, "rows n: w"),
        ("rows n: v\n    A 1\n    A 2\n", "member-twice", 3, "A"),
        ("rows n: v, w\n    A 1 2\n    B 1\n", "row-length", 3, "B 1"),
        ("rows n: v\n    A 1 2\n", "row-length", 2, "A 1 2"),
        ("rows n: v\n    A much\n", "cell-not-a-number", 2, "much"),
        ("rows n: v in parsec\n    A 1\n", "unknown-unit", 1, "parsec"),
        ("rows n: a of m\n    A B\n", "unknown-index-set", 1, "a of m"),
        ("rows n: a of n\n    A B\n", "no-such-member", 2, "B"),
        ("rows n: v\n    A 1\nrows m: v\n    B 1\n", "column-twice", 3, "v"),
        ("rows n: v, v\n    A 1 2\n", "column-twice", 1, "v"),
    ],
)
def test_slips(text: str, code: str, line: int, guilty: str) -> None:
    _, diagnostics = tables(text)
    assert [d.code for d in diagnostics] == [code]
    span = diagnostics[0].span
    assert span is not None
    assert (span.line, span.text.strip()) == (line, guilty)


def test_a_row_of_the_wrong_length_still_makes_its_member() -> None:
    found, _ = tables("rows n: v, w\n    A 1\n    B 1 2\n")
    assert found.sets["n"].members == ("A", "B")
    assert [[known.code for known in column.knowns] for column in found.columns] == [[0, 1], [1]]


def test_many_slips_of_one_kind_are_counted() -> None:
    _, diagnostics = tables("rows n: v\n" + "".join(f"    A{i} x\n" for i in range(100)))
    assert len(diagnostics) == MOST_SAID
    assert diagnostics[-1].notes[-1] == f"there are {100 - MOST_SAID} more of this kind in `n`"
