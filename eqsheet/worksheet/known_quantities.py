"""Values and errors of all quantities before any block is solved."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import NamedTuple

from eqsheet.model.branches import literal_values
from eqsheet.model.evaluate import as_typed, evaluate_with_evidence
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.trust import FEW_DIGITS, FEWEST_SURE, digits_of


class Knowns(NamedTuple):
    """What is known at first.

    Attributes
    ----------
    values, errors : tuple of float
        SI values by quantity number, nan where not known, and how far they may be from what was typed.
    doubtful : tuple of int
        Knowns set to expressions that may leave few digits.
    """

    values: tuple[float, ...]
    errors: tuple[float, ...]
    doubtful: tuple[int, ...]


class _Last(NamedTuple):
    known_values: Mapping[int, float]
    contested: frozenset[int]
    knowns: Knowns


_last: list[_Last] = []
# Instructions of a known set to a number: the quantity and the number.
_A_NUMBER = 2


def known_quantities(prepared: Prepared) -> Knowns:
    """What is known at first; that of the last worksheet is kept, since it may well be solved again."""
    if _last:
        last = _last[0]
        if last.known_values is prepared.known_values and last.contested is prepared.contested:
            return last.knowns
    count = len(prepared.system.names)
    values = [math.nan] * count
    errors = [0.0] * count
    doubtful = []
    for quantity, value in prepared.known_values.items():
        if quantity not in prepared.contested:
            values[quantity] = value
            errors[quantity] = error = _error(prepared, quantity, value)
            # Zero is what it is worked out as, but for rounding.
            if value and error > FEWEST_SURE * abs(value) and digits_of(value, error) < FEW_DIGITS:
                doubtful.append(quantity)
    knowns = Knowns(tuple(values), tuple(errors), tuple(doubtful))
    _last[:] = [_Last(prepared.known_values, prepared.contested, knowns)]
    return knowns


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
