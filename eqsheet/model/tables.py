"""Rows: index sets and the vectors of knowns over them.

A table's rows are statements of its group, from the worksheet itself or from a CSV file; either way a cell has a
place, and what is wrong with it is said there.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.model.indexing import Codes, IndexSet, MemberColumn
from eqsheet.model.lower import kind_of
from eqsheet.model.spelling import did_you_mean
from eqsheet.model.tape import Literal
from eqsheet.syntax import nodes as syntax
from eqsheet.units.dimension import DIMENSIONLESS
from eqsheet.units.registry import UnitProblem, UnitTable
from eqsheet.units.unit import Unit

LEFT_UNKNOWN = "-"
_NUMBER = re.compile(r"[+-]?\d+(\.\d+)?([eE][+-]?\d+)?")


@dataclass(frozen=True)
class CellKnown:
    """A known from a cell: the row's code, its value as a literal, and the statement of the row."""

    code: int
    literal: Literal
    row: syntax.Statement


@dataclass(frozen=True)
class TableColumn:
    """A column of numbers.

    Attributes
    ----------
    name, set : str
    codes : Codes
        All rows, those left unknown included.
    knowns : tuple of CellKnown
    unit : Unit or None
    """

    name: str
    set: str
    codes: Codes
    knowns: tuple[CellKnown, ...]
    unit: Unit | None


@dataclass(frozen=True)
class Tables:
    """What all rows of a worksheet come to."""

    sets: Mapping[str, IndexSet]
    members: Mapping[str, MemberColumn]
    columns: tuple[TableColumn, ...]


def collect_tables(
    statements: Sequence[syntax.Statement], unit_table: UnitTable, diagnostics: list[Diagnostic]
) -> Tables:
    """Sets, member columns and columns of knowns; slips are added to `diagnostics`."""
    tables = [s for s in statements if isinstance(s.node, syntax.Rows) and not s.off]
    sets: dict[str, IndexSet] = {}
    rows_of: dict[str, tuple[syntax.Statement, list[syntax.Statement]]] = {}
    for statement in tables:
        node = statement.node
        assert isinstance(node, syntax.Rows)
        if node.name in sets:
            diagnostics.append(
                error("index-set-twice", f"there are two index sets `{node.name}`", Label(statement.whole))
            )
            continue
        rows = _sound_rows(statement, node, diagnostics)
        members = tuple(_cells(row)[0].text for row in rows)
        sets[node.name] = IndexSet.of(node.name, members)
        rows_of[node.name] = statement, rows
    member_columns: dict[str, MemberColumn] = {}
    columns: list[TableColumn] = []
    for statement, rows in rows_of.values():
        node = statement.node
        assert isinstance(node, syntax.Rows)
        for position, column in enumerate(node.columns):
            if column.of is not None:
                found = _member_column(statement, node, column, position, rows, sets, diagnostics)
                if found is not None:
                    member_columns[column.name] = found
            else:
                columns.append(
                    _number_column(statement, node, column, position, rows, unit_table, diagnostics)
                )
    return Tables(sets, member_columns, tuple(columns))


def _cells(row: syntax.Statement) -> tuple[syntax.Cell, ...]:
    assert isinstance(row.node, syntax.TableRow)
    return row.node.cells


def _sound_rows(
    statement: syntax.Statement, node: syntax.Rows, diagnostics: list[Diagnostic]
) -> list[syntax.Statement]:
    """Rows with as many cells as the heading asks for, and names of their own."""
    rows = []
    seen: dict[str, syntax.Statement] = {}
    wanted = len(node.columns) + 1
    for row in statement.body:
        if not isinstance(row.node, syntax.TableRow):
            diagnostics.append(
                error("misplaced-statement", f"only rows of `{node.name}` stand here", Label(row.whole))
            )
            continue
        if row.off:
            continue
        cells = row.node.cells
        if len(cells) != wanted:
            names = ", ".join(("name", *(c.name for c in node.columns)))
            diagnostics.append(
                error(
                    "row-length",
                    f"this row has {len(cells)} cells, and `{node.name}` has {wanted}",
                    Label(row.whole),
                    Label(statement.whole, "the heading"),
                    help=f"a row is {names}; write `-` for a member left unknown",
                )
            )
            continue
        first = cells[0]
        other = seen.setdefault(first.text, row)
        if other is not row:
            diagnostics.append(
                error(
                    "member-twice",
                    f"`{first.text}` stands twice in `{node.name}`",
                    Label(row.span(first.start, first.end), "again here"),
                    Label(other.whole, "first here"),
                )
            )
            continue
        rows.append(row)
    return rows


def _member_column(
    statement: syntax.Statement,
    node: syntax.Rows,
    column: syntax.Column,
    position: int,
    rows: Sequence[syntax.Statement],
    sets: Mapping[str, IndexSet],
    diagnostics: list[Diagnostic],
) -> MemberColumn | None:
    target = sets.get(column.of or "")
    if target is None:
        diagnostics.append(
            error(
                "unknown-index-set",
                f"there is no index set `{column.of}`",
                Label(statement.span(column.start, column.end)),
                help=did_you_mean(column.of or "", sets),
            )
        )
        return None
    codes = np.full(len(rows), -1, dtype=np.int64)
    for i, row in enumerate(rows):
        cell = _cells(row)[position + 1]
        if cell.text == LEFT_UNKNOWN and not cell.quoted:
            continue
        code = target.positions.get(cell.text)
        if code is None:
            diagnostics.append(
                error(
                    "no-such-member",
                    f"`{cell.text}` is not a member of `{target.name}`",
                    Label(row.span(cell.start, cell.end)),
                    notes=(f"row `{_cells(row)[0].text}`, column `{column.name}`",),
                    help=did_you_mean(cell.text, target.members),
                )
            )
            continue
        codes[i] = code
    return MemberColumn(column.name, node.name, target.name, codes)


def _number_column(
    statement: syntax.Statement,
    node: syntax.Rows,
    column: syntax.Column,
    position: int,
    rows: Sequence[syntax.Statement],
    unit_table: UnitTable,
    diagnostics: list[Diagnostic],
) -> TableColumn:
    unit = _unit(statement, column.unit, unit_table, diagnostics)
    knowns = []
    for code, row in enumerate(rows):
        cell = _cells(row)[position + 1]
        if cell.text == LEFT_UNKNOWN and not cell.quoted:
            continue
        value = _value(cell, row, column, diagnostics)
        if value is None:
            continue
        si = value if unit is None else unit.to_si(value)
        dimension = DIMENSIONLESS if unit is None else unit.dimension
        kind = "plain" if unit is None else kind_of(unit)
        text = "" if unit is None else unit.text
        knowns.append(CellKnown(code, Literal(si, dimension, kind, cell.start, cell.end, text), row))
    return TableColumn(column.name, node.name, np.arange(len(rows)), tuple(knowns), unit)


def _unit(
    statement: syntax.Statement,
    text: syntax.UnitText | None,
    unit_table: UnitTable,
    diagnostics: list[Diagnostic],
) -> Unit | None:
    if text is None:
        return None
    found = unit_table.resolve(text.text, tuple((f.symbol, f.exponent) for f in text.factors))
    if isinstance(found, UnitProblem):
        place = text.factors[found.index] if text.factors else text
        diagnostics.append(
            error(found.code, found.message, Label(statement.span(place.start, place.end)), help=found.help)
        )
        return None
    return found


def _value(
    cell: syntax.Cell, row: syntax.Statement, column: syntax.Column, diagnostics: list[Diagnostic]
) -> float | None:
    if _NUMBER.fullmatch(cell.text) and not cell.quoted:
        value = float(cell.text)
        if math.isfinite(value):
            return value
    where = f"row `{_cells(row)[0].text}`, column `{column.name}`"
    cure = "write `-` for a member left unknown"
    if re.fullmatch(r"[+-]?\d+,\d+", cell.text):
        cure = f"the decimal mark is a point: write {cell.text.replace(',', '.')}"
    elif not cell.text:
        cure = f"the cell is empty; {cure}"
    message = f"`{cell.text}` is not a number" if cell.text else "a cell is empty"
    diagnostics.append(
        error("cell-not-a-number", message, Label(row.span(cell.start, cell.end)), notes=(where,), help=cure)
    )
    return None
