"""Values and errors of all quantities before any block is solved."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import NamedTuple

from eqsheet.model.branches import literal_values
from eqsheet.model.evaluate import as_typed, evaluate_with_evidence
from eqsheet.worksheet.prepare import Prepared


class _Last(NamedTuple):
    known_values: Mapping[int, float]
    contested: frozenset[int]
    values: tuple[float, ...]
    errors: tuple[float, ...]


_last: list[_Last] = []
# Instructions of a known set to a number: the quantity and the number.
_A_NUMBER = 2


def known_quantities(prepared: Prepared) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """SI values by quantity number, nan where not known, and how far they may be from what was typed.

    Those of the last worksheet are kept, since it may well be solved again.
    """
    if _last:
        last = _last[0]
        if last.known_values is prepared.known_values and last.contested is prepared.contested:
            return last.values, last.errors
    count = len(prepared.system.names)
    values = [math.nan] * count
    errors = [0.0] * count
    for quantity, value in prepared.known_values.items():
        if quantity not in prepared.contested:
            values[quantity] = value
            errors[quantity] = _error(prepared, quantity, value)
    _last[:] = [_Last(prepared.known_values, prepared.contested, tuple(values), tuple(errors))]
    return _last[0].values, _last[0].errors


def _error(prepared: Prepared, quantity: int, value: float) -> float:
    """How far a known may be from what was typed: a number by its rounding, an expression by that of all its steps."""
    formula = prepared.system.equations[prepared.setters[quantity]].formula
    tape = formula.tape
    if len(tape.instructions) <= _A_NUMBER:
        return as_typed(value)
    left, right = tape.outputs
    side = right if tape.instructions[left][0] == "quantity" else left
    evidence = evaluate_with_evidence(tape, (math.nan,), literal_values(formula))
    return max(as_typed(value), evidence.errors[side])
