"""The units in force: the published list, the worksheet's own units, and the ambient pressure."""

from __future__ import annotations

from collections.abc import Sequence

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error, note
from eqsheet.syntax import nodes as syntax
from eqsheet.units.dimension import Dimension
from eqsheet.units.registry import UnitProblem, UnitTable
from eqsheet.units.unit import Unit

_PRESSURE = Dimension.of({"kg": 1, "m": -1, "s": -2})


def collect_units(statements: Sequence[syntax.Statement], diagnostics: list[Diagnostic]) -> UnitTable:
    """The unit table of a worksheet: new units in the order of their dependence, gauge units on `ambient`."""
    table = _with_ambient(UnitTable.standard(), statements, diagnostics)
    waiting = [s for s in statements if isinstance(s.node, syntax.NewUnit)]
    while waiting:
        left: list[syntax.Statement] = []
        problems: list[Diagnostic] = []
        for statement in waiting:
            outcome = _with_new_unit(table, statement)
            if isinstance(outcome, UnitTable):
                if outcome is table:
                    diagnostics.append(_no_news(table, statement))
                table = outcome
            else:
                left.append(statement)
                problems.append(outcome)
        if len(left) == len(waiting):
            diagnostics.extend(problems)
            break
        waiting = left
    return table


def _no_news(table: UnitTable, statement: syntax.Statement) -> Diagnostic:
    """That a line makes a unit that is there already, and just so: a currency of the list, or a second line."""
    node = statement.node
    assert isinstance(node, syntax.NewUnit)
    known = table.meaning(node.symbol)
    return note(
        "unit-known",
        f"`{node.symbol}` is a unit already{f' ({known})' if known else ''}, so this line changes nothing",
        Label(statement.whole),
        help="leave the line out",
    )


def _with_new_unit(table: UnitTable, statement: syntax.Statement) -> UnitTable | Diagnostic:
    node = statement.node
    assert isinstance(node, syntax.NewUnit)
    base: Unit | UnitProblem | None = None
    count = 1.0
    if node.value is not None:
        text = node.value.unit
        factors = () if text is None else tuple((f.symbol, f.exponent) for f in text.factors)
        base = table.resolve("" if text is None else text.text, factors)
        if isinstance(base, UnitProblem):
            place = text.factors[base.index] if text is not None and text.factors else node
            return error(
                base.code,
                base.message,
                Label(statement.span(place.start, place.end)),
                help=base.help,
            )
        count = -float(node.value.text) if node.value.negated else float(node.value.text)
    assert not isinstance(base, UnitProblem)  # returned above
    outcome = table.with_unit(node.symbol, base, count)
    if isinstance(outcome, UnitProblem):
        return error(outcome.code, outcome.message, Label(statement.whole), help=outcome.help)
    return outcome


def _with_ambient(
    table: UnitTable, statements: Sequence[syntax.Statement], diagnostics: list[Diagnostic]
) -> UnitTable:
    """Gauge units stand on the known `ambient`, which must itself be an absolute pressure."""
    for statement in statements:
        node = statement.node
        if not isinstance(node, syntax.Equation):
            continue
        for target, value in ((node.left, node.right), (node.right, node.left)):
            if not (
                isinstance(target, syntax.Reference) and target.name == "ambient" and target.owner is None
            ):
                continue
            here = Label(statement.span(value.start, value.end))
            unit = None
            if isinstance(value, syntax.Number) and value.unit is not None:
                factors = tuple((f.symbol, f.exponent) for f in value.unit.factors)
                unit = table.resolve(value.unit.text, factors)
            if unit is None or isinstance(unit, UnitProblem) or unit.dimension != _PRESSURE or unit.reading:
                diagnostics.append(
                    error(
                        "ambient-form",
                        "`ambient` is the absolute pressure that gauge pressures stand on, and must be a literal",
                        here,
                        help="write for instance `ambient = 84 kPa`",
                    )
                )
                return table
            assert isinstance(value, syntax.Number)
            return table.with_ambient(unit.to_si(float(value.text)))
    return table
