"""Limits that cannot be judged, because a side has no finite value at the solution."""

from __future__ import annotations

import math

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.model.branches import literal_values
from eqsheet.model.dimension_of import dimensions_of
from eqsheet.model.equation_group import LimitGroup
from eqsheet.model.evaluate import evaluate
from eqsheet.model.no_value import no_value
from eqsheet.model.outside_curve import outside_curve, written
from eqsheet.model.system import LimitItem
from eqsheet.units.dimension import DIMENSIONLESS
from eqsheet.units.display import default_unit
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.run import Run

CODE = "limit-without-value"


def limits_without_value(prepared: Prepared, run: Run) -> tuple[Diagnostic, ...]:
    """An error for each limit with such a side; of a large family for its first member alone.

    A curve read outside its range is told by `judge.limits_outside_curves`.
    """
    items = (
        part if isinstance(part, LimitItem) else _first_without_value(part, run)
        for part in prepared.system.limit_parts
    )
    found = (_without_value(prepared, run, item) for item in items if item is not None)
    return tuple(diagnostic for diagnostic in found if diagnostic is not None)


def _first_without_value(group: LimitGroup, run: Run) -> LimitItem | None:
    import numpy as np

    from eqsheet.model.evaluate import evaluate_arrays

    bound = group.bound
    values = np.array(run.values)
    there = np.flatnonzero(np.isfinite(values[bound.numbers]).all(axis=1))
    if not len(there):
        return None
    tape = bound.formula.tape
    results = evaluate_arrays(tape, list(values[bound.numbers[there].T]), bound.literals_of(there))
    sides = [np.broadcast_to(np.asarray(results[o], dtype=float), (len(there),)) for o in tape.outputs]
    missing = np.flatnonzero(~np.isfinite(sides).all(axis=0))
    return group.item(int(there[missing[0]])) if len(missing) else None


def _without_value(prepared: Prepared, run: Run, item: LimitItem) -> Diagnostic | None:
    formula = item.formula
    inputs = [run.values[q] for q in formula.quantities]
    if not all(map(math.isfinite, inputs)):
        return None
    values = evaluate(formula.tape, inputs, literal_values(formula))
    if all(math.isfinite(values[o]) for o in formula.tape.outputs) or outside_curve(formula.tape, values):
        return None
    system = prepared.system
    statement = system.statements[formula.statement]
    part = no_value(formula, values, statement.line.text)
    assert part is not None, "a side that is not finite has a part that is not"
    units = [
        default_unit(dimension or DIMENSIONLESS, "plain", system.unit_table)
        for dimension in dimensions_of(formula, prepared.dimensions)
    ]
    return error(
        CODE,
        f"the limit `{item.text}` cannot be judged: {part.reason}",
        Label(statement.span(part.start, part.end)),
        notes=tuple(f"`{text}` is {written(values[i], units[i])}" for i, text in part.operands),
        help="check the values it uses, or state the limit so that it has a value there",
    )
