"""That a known over a family has members without a finite value, said once a line with the first of them."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace

import numpy as np

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.model.bind import Bound, member_formulas
from eqsheet.model.equation_group import bound_formula, values_of_knowns
from eqsheet.model.indexing import Domain
from eqsheet.model.lower_statements import without_value
from eqsheet.model.system import EquationItem
from eqsheet.model.tape import extract
from eqsheet.model.value_of_known import known_value
from eqsheet.syntax.nodes import Statement
from eqsheet.units.registry import UnitTable


def members_without_value(
    item: EquationItem,
    bound: Bound,
    statement: Statement,
    name: Callable[[int], str],
    told: Callable[[Domain, int], str],
    unit_table: UnitTable,
) -> Diagnostic | None:
    """That a known whose value depends on an index has none at some members; None where all have one.

    Parameters
    ----------
    name : callable
        Quantity number to name.
    told : callable
        Domain and entry to what tells the entry from the others.
    """
    if item.known < 0 or item.value == item.value:
        return None
    members = bound.domain.size
    values = values_of_knowns(item, bound_formula(item.formula, bound, 0, members))
    without = np.flatnonzero(~np.isfinite(values))
    if not len(without):
        return None
    first = int(without[0])
    formula = next(member_formulas(item.formula, bound.at(first), 0))
    if math.isfinite(known_value(formula)):
        # Arrays round the last digit otherwise, which counts only at the very end of the range of numbers.
        return None
    left, right = formula.tape.outputs
    side = right if formula.tape.instructions[left][0] == "quantity" else left
    (quantity,) = bound.numbers((item.known,), first)
    finding = without_value(extract(formula, (side,)), name(quantity), statement.line.text, unit_table)
    at = told(bound.domain, first)
    notes = (f"this is at {at}", *finding.notes) if at else finding.notes
    if len(without) > 1:
        notes = (*notes, f"{len(without):,} of the {members:,} members have no value")
    return replace(finding, notes=notes).at(statement)
