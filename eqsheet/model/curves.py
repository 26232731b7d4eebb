"""Curves and surfaces: interpolants from the rows of their statements.

A curve's rows are argument and value. A surface's first row holds the values of its second argument, and each
later row a value of the first argument and the values there. Rows come from the worksheet itself or from a CSV
file; either way a cell has a place, and what is wrong with it is said there.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Collection, Mapping, Sequence
from contextlib import suppress
from dataclasses import dataclass

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.diagnostics.shortened import shortened
from eqsheet.model.cell_number import cell_number, cure_of_cell, cure_of_row
from eqsheet.model.interpolant import (
    Heading,
    Interpolant,
    smooth_curve,
    smooth_surface,
    stepped_curve,
    stepped_surface,
    straight_curve,
    straight_surface,
)
from eqsheet.model.lower import AGGREGATE_NAMES, FUNCTION_NAMES
from eqsheet.model.lower_definitions import parameter_slip
from eqsheet.model.reserved_names import reserved_name
from eqsheet.syntax import nodes as syntax
from eqsheet.units.registry import UnitProblem, UnitTable
from eqsheet.units.unit import Unit

# Each point costs memory in every formula that reads the curve; measured data beyond this are a slip.
MOST_POINTS = 100_000
_CURVES: Mapping[str, Callable[..., Interpolant]] = {
    "smooth": smooth_curve,
    "line": straight_curve,
    "step": stepped_curve,
}
_SURFACES: Mapping[str, Callable[..., Interpolant]] = {
    "smooth": smooth_surface,
    "line": straight_surface,
    "step": stepped_surface,
}


@dataclass(frozen=True, slots=True)
class _Entry:
    """A number of the table in SI, and the cell and row it stands in."""

    value: float
    cell: syntax.Cell
    row: syntax.Statement

    @property
    def place(self) -> Label:
        return Label(self.row.span(self.cell.start, self.cell.end))


class _Broken(Exception):
    """The curve cannot be used; what is wrong is already said."""


def collect_curves(
    statements: Sequence[syntax.Statement],
    definitions: Collection[str],
    unit_table: UnitTable,
    diagnostics: list[Diagnostic],
) -> Mapping[str, Interpolant]:
    """Interpolants by name, of those that can be used; slips are added to `diagnostics`.

    Parameters
    ----------
    definitions : collection of str
        Names of the definitions, among which those of curves must be different.
    """
    found: dict[str, Interpolant] = {}
    first: dict[str, syntax.Statement] = {}
    for statement in statements:
        node = statement.node
        if not isinstance(node, syntax.Curve) or statement.off:
            continue
        taken = _name_taken(statement, node, definitions, first)
        if taken is not None:
            diagnostics.append(taken)
            continue
        first[node.name] = statement
        if node.path is not None and not statement.body:
            # Its file could not be read, which is said already.
            continue
        with suppress(_Broken):
            found[node.name] = _Reader(statement, node, unit_table, diagnostics).interpolant()
    return found


def _name_taken(
    statement: syntax.Statement,
    node: syntax.Curve,
    definitions: Collection[str],
    first: Mapping[str, syntax.Statement],
) -> Diagnostic | None:
    here = Label(statement.span(node.name_end - len(node.name), node.name_end))
    if node.name in FUNCTION_NAMES or node.name in AGGREGATE_NAMES:
        return error(
            "definition-of-built-in",
            f"`{node.name}` is a built-in function",
            here,
            help="give the curve another name",
        )
    if node.name in definitions:
        return error("defined-twice", f"`{node.name}` is a definition and a curve", here)
    if node.name in first:
        other = Label(first[node.name].whole, "first here")
        return error("defined-twice", f"there are two curves `{node.name}`", here, other)
    return reserved_name(node.name, "curve", here) or parameter_slip(statement, node.parameters)


class _Reader:
    """Reads the rows of one curve or surface."""

    def __init__(
        self,
        statement: syntax.Statement,
        node: syntax.Curve,
        unit_table: UnitTable,
        diagnostics: list[Diagnostic],
    ) -> None:
        self.statement = statement
        self.node = node
        self._unit_table = unit_table
        self._diagnostics = diagnostics

    def interpolant(self) -> Interpolant:
        """The curve or surface.

        Raises
        ------
        _Broken
        """
        heading = Heading(
            self.node.name,
            tuple(p.name for p in self.node.parameters),
            tuple(self._unit(p.unit) for p in self.node.parameters),
            self._unit(self.node.result_unit),
        )
        rows = self._rows()
        if len(heading.arguments) == 1:
            x, y = self._curve_columns(rows, heading)
            return _CURVES[self.node.interpolation](heading, x, y)
        x, y, z = self._surface_grid(rows, heading)
        return _SURFACES[self.node.interpolation](heading, x, y, z)

    def _unit(self, text: syntax.UnitText | None) -> Unit | None:
        if text is None:
            return None
        found = self._unit_table.resolve(text.text, tuple((f.symbol, f.exponent) for f in text.factors))
        if isinstance(found, UnitProblem):
            place = text.factors[found.index] if text.factors else text
            here = Label(self.statement.span(place.start, place.end))
            raise self._said(error(found.code, found.message, here, help=found.help))
        return found

    def _rows(self) -> list[syntax.Statement]:
        rows = []
        if len(self.statement.body) > MOST_POINTS:
            raise self._said(
                error(
                    "worksheet-too-large",
                    f"`{self.node.name}` has {len(self.statement.body):,} rows; a curve has at most {MOST_POINTS:,}",
                    Label(self.statement.whole),
                    help="leave points out where the curve is nearly straight",
                )
            )
        for row in self.statement.body:
            if not isinstance(row.node, syntax.TableRow):
                raise self._said(
                    error(
                        "misplaced-statement", f"only rows of `{self.node.name}` stand here", Label(row.whole)
                    )
                )
            if not row.off:
                rows.append(row)
        return rows

    def _curve_columns(
        self, rows: Sequence[syntax.Statement], heading: Heading
    ) -> tuple[list[float], list[float]]:
        (argument,) = heading.arguments
        points = []
        for row in rows:
            x, y = self._cells(row, 2, f"a row is {argument} and the value of `{heading.name}` there")
            points.append((self._entry(x, row, heading.units[0]), self._entry(y, row, heading.unit)))
        self._check_axis([x for x, _ in points], argument)
        return [x.value for x, _ in points], [y.value for _, y in points]

    def _surface_grid(
        self, rows: Sequence[syntax.Statement], heading: Heading
    ) -> tuple[list[float], list[float], list[list[float]]]:
        if not rows:
            raise self._too_few(heading.arguments[0], 0)
        along, across = heading.arguments
        top, *rest = rows
        assert isinstance(top.node, syntax.TableRow)
        ys = [self._entry(cell, top, heading.units[1]) for cell in top.node.cells]
        self._check_axis(ys, across)
        count = len(ys) + 1
        layout = f"the first row holds values of {across}; a row is {along} and one value for each of them"
        xs, z = [], []
        for row in rest:
            first, *others = self._cells(row, count, layout)
            xs.append(self._entry(first, row, heading.units[0]))
            z.append([self._entry(cell, row, heading.unit).value for cell in others])
        self._check_axis(xs, along)
        return [x.value for x in xs], [y.value for y in ys], z

    def _cells(self, row: syntax.Statement, wanted: int, layout: str) -> tuple[syntax.Cell, ...]:
        assert isinstance(row.node, syntax.TableRow)
        cells = row.node.cells
        if len(cells) != wanted:
            plural = "" if len(cells) == 1 else "s"
            if len(cells) > wanted and self.node.path is not None:
                layout = cure_of_row(row.line.text) or layout
            raise self._said(
                error(
                    "row-length",
                    f"this row has {len(cells)} cell{plural}, and `{self.node.name}` has {wanted}",
                    Label(row.whole),
                    Label(self.statement.whole, "the heading"),
                    help=layout,
                )
            )
        return cells

    def _entry(self, cell: syntax.Cell, row: syntax.Statement, unit: Unit | None) -> _Entry:
        number = None if cell.quoted else cell_number(cell.text)
        if number is not None:
            value = number if unit is None else unit.to_si(number)
            if math.isfinite(value):
                return _Entry(value, cell, row)
        help = cure_of_cell(cell.text) or "every point of a curve has a number"
        message = f"`{shortened(cell.text)}` is not a number" if cell.text else "a cell is empty"
        raise self._said(
            error("cell-not-a-number", message, Label(row.span(cell.start, cell.end)), help=help)
        )

    def _check_axis(self, entries: Sequence[_Entry], argument: str) -> None:
        """At least two points, strictly increasing."""
        if len(entries) < 2:
            raise self._too_few(argument, len(entries))
        for before, here in zip(entries, entries[1:]):
            if here.value > before.value:
                continue
            same = here.value == before.value
            raise self._said(
                error(
                    "curve-not-increasing",
                    f"{argument} = {here.cell.text} stands twice in `{self.node.name}`"
                    if same
                    else f"{argument} = {here.cell.text} comes after {before.cell.text} in `{self.node.name}`",
                    here.place,
                    Label(before.place.span, "the one before"),
                    help="a curve has one value for each argument: leave one of the two out"
                    if same
                    else f"put {argument} in rising order",
                )
            )

    def _too_few(self, argument: str, count: int) -> _Broken:
        plural = "" if count == 1 else "s"
        return self._said(
            error(
                "curve-too-few-points",
                f"`{self.node.name}` has {count} value{plural} of {argument}; it takes two or more",
                Label(self.statement.span(self.node.start, self.node.end)),
                help="add points, or write a `define` for a constant",
            )
        )

    def _said(self, diagnostic: Diagnostic) -> _Broken:
        """Note what is wrong; gives what to raise."""
        self._diagnostics.append(diagnostic)
        return _Broken()
