"""Rows: index sets and the vectors of knowns over them.

A table's rows are statements of its group, from the worksheet itself or from a CSV file; either way a cell has a
place, and what is wrong with it is said there.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.diagnostics.shortened import shortened
from eqsheet.model.cell_number import cell_number, cure_of_cell, cure_of_row
from eqsheet.model.indexing import Codes, IndexSet, MemberColumn
from eqsheet.model.literal_kind import kind_of
from eqsheet.model.reserved_names import reserved_name
from eqsheet.model.spelling import did_you_mean
from eqsheet.model.tape import Literal
from eqsheet.syntax import nodes as syntax
from eqsheet.units.dimension import DIMENSIONLESS
from eqsheet.units.registry import UnitProblem, UnitTable
from eqsheet.units.unit import Unit

LEFT_UNKNOWN = "-"
# Of one kind of slip in one table a reader wants a few examples and the count.
MOST_SAID = 5


@dataclass(frozen=True)
class CellKnown:
    """A known from a cell: the row's code, its value as a literal, and the statement of the row."""

    code: int
    literal: Literal
    row: syntax.Statement

    @property
    def place(self) -> tuple[int, int]:
        """Start and end in the row."""
        return self.literal.start, self.literal.end


@dataclass(frozen=True)
class CellUnknown:
    """A cell that leaves its member unknown: the row's code, start and end in the row, and its statement."""

    code: int
    place: tuple[int, int]
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
    unknowns : tuple of CellUnknown
    """

    name: str
    set: str
    codes: Codes
    knowns: tuple[CellKnown, ...]
    unit: Unit | None
    unknowns: tuple[CellUnknown, ...] = ()

    @property
    def cells(self) -> list[CellKnown | CellUnknown]:
        """All cells in the order of their rows."""
        return sorted([*self.knowns, *self.unknowns], key=lambda cell: cell.code)


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
    first: dict[str, syntax.Statement] = {}
    slips: dict[str, list[Diagnostic]] = {}
    for statement in tables:
        node = statement.node
        assert isinstance(node, syntax.Rows)
        if first.setdefault(node.name, statement) is not statement:
            diagnostics.append(
                error(
                    "index-set-twice",
                    f"there are two index sets `{node.name}`",
                    Label(statement.whole, "again here"),
                    Label(first[node.name].whole, "first here"),
                )
            )
            continue
        rows = _distinct_rows(statement, node, slips.setdefault(node.name, []))
        members = tuple(_cells(row)[0].text for row in rows)
        sets[node.name] = IndexSet.of(node.name, members)
        rows_of[node.name] = statement, rows
    member_columns: dict[str, MemberColumn] = {}
    columns: list[TableColumn] = []
    headed: dict[str, Label] = {}
    for name, (statement, rows) in rows_of.items():
        node = statement.node
        assert isinstance(node, syntax.Rows)
        found = slips[name]
        for position, column in enumerate(node.columns):
            here = Label(_heading(statement, node).span(column.start, column.end), "again here")
            reserved = reserved_name(column.name, "column", Label(here.span))
            if reserved is not None:
                found.append(reserved)
                continue
            other = headed.setdefault(column.name, here)
            if other is not here:
                message = f"there are two columns `{column.name}`"
                found.append(error("column-twice", message, here, Label(other.span, "first here")))
                continue
            if column.of is not None:
                members_of = _member_column(statement, node, column, position, rows, sets, found)
                if members_of is not None:
                    member_columns[column.name] = members_of
            else:
                columns.append(_number_column(statement, node, column, position, rows, unit_table, found))
        diagnostics += _first_of_each_code(found, name)
    return Tables(sets, member_columns, tuple(columns))


def _heading(statement: syntax.Statement, node: syntax.Rows) -> syntax.Statement:
    """The statement in which the columns stand: a line of the worksheet, or of the file."""
    return node.heading or statement


def _first_of_each_code(found: Sequence[Diagnostic], name: str) -> list[Diagnostic]:
    """The findings of one table, of each code the first few; the last of them tells how many follow."""
    by_code: dict[str, list[Diagnostic]] = {}
    for one in found:
        by_code.setdefault(one.code, []).append(one)
    kept: list[Diagnostic] = []
    for group in by_code.values():
        kept += group[:MOST_SAID]
        more = len(group) - MOST_SAID
        if more > 0:
            note = f"there {'is' if more == 1 else 'are'} {more:,} more of this kind in `{name}`"
            kept[-1] = replace(kept[-1], notes=(*kept[-1].notes, note))
    return kept


def _cells(row: syntax.Statement) -> tuple[syntax.Cell, ...]:
    assert isinstance(row.node, syntax.TableRow)
    return row.node.cells


def _cell(row: syntax.Statement, position: int) -> syntax.Cell | None:
    """The cell of a column by its position; None where it is left unknown, or the row too short."""
    cells = _cells(row)
    if position + 1 >= len(cells):
        return None
    cell = cells[position + 1]
    return None if cell.text == LEFT_UNKNOWN and not cell.quoted else cell


def _distinct_rows(
    statement: syntax.Statement, node: syntax.Rows, diagnostics: list[Diagnostic]
) -> list[syntax.Statement]:
    """Rows with names of their own; one of the wrong length still makes its member."""
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
            help = f"a row is {names}; write `-` for a member left unknown"
            if len(cells) > wanted and node.heading is not None:
                help = cure_of_row(row.line.text) or help
            count = f"{len(cells)} cell{'s' * (len(cells) != 1)}"
            diagnostics.append(
                error(
                    "row-length",
                    f"this row has {count}, and the heading of `{node.name}` has {wanted}",
                    Label(row.whole),
                    Label(_heading(statement, node).whole, "the heading"),
                    help=help,
                )
            )
        first = cells[0]
        if not first.text:
            diagnostics.append(error("member-name", "this row has no name", Label(row.whole)))
            continue
        other = seen.setdefault(first.text, row)
        if other is not row:
            diagnostics.append(
                error(
                    "member-twice",
                    f"`{shortened(first.text)}` stands twice in `{node.name}`",
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
                Label(_heading(statement, node).span(column.start, column.end)),
                help=did_you_mean(column.of or "", sets),
            )
        )
        return None
    codes = np.full(len(rows), -1, dtype=np.int64)
    for i, row in enumerate(rows):
        cell = _cell(row, position)
        if cell is None:
            continue
        code = target.positions.get(cell.text)
        if code is None:
            diagnostics.append(
                error(
                    "no-such-member",
                    f"`{shortened(cell.text)}` is not a member of `{target.name}`",
                    Label(row.span(cell.start, cell.end)),
                    notes=(f"row `{shortened(_cells(row)[0].text)}`, column `{column.name}`",),
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
    unit = _unit(_heading(statement, node), column.unit, unit_table, diagnostics)
    knowns, unknowns = [], []
    for code, row in enumerate(rows):
        cell = _cell(row, position)
        if cell is None:
            if position + 1 < len(_cells(row)):
                left = _cells(row)[position + 1]
                unknowns.append(CellUnknown(code, (left.start, left.end), row))
            continue
        value = _value(cell, row, column, diagnostics)
        if value is None:
            continue
        si = value if unit is None else unit.to_si(value)
        dimension = DIMENSIONLESS if unit is None else unit.dimension
        kind = "plain" if unit is None else kind_of(unit)
        text = "" if unit is None else unit.text
        knowns.append(CellKnown(code, Literal(si, dimension, kind, cell.start, cell.end, text), row))
    return TableColumn(column.name, node.name, np.arange(len(rows)), tuple(knowns), unit, tuple(unknowns))


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
    value = cell_number(cell.text)
    if value is not None:
        return value
    where = f"row `{shortened(_cells(row)[0].text)}`, column `{column.name}`"
    cure = cure_of_cell(cell.text) or "write `-` for a member left unknown"
    message = f"`{shortened(cell.text)}` is not a number" if cell.text else "a cell is empty"
    diagnostics.append(
        error("cell-not-a-number", message, Label(row.span(cell.start, cell.end)), notes=(where,), help=cure)
    )
    return None
