"""The value of a known, from its formula alone."""

from __future__ import annotations

import math

from eqsheet.model.branches import literal_values
from eqsheet.model.evaluate import evaluate
from eqsheet.model.tape import Formula


def known_value(formula: Formula) -> float:
    """SI value of the one quantity of a formula with the outputs (left, right), one of which is the quantity."""
    left, right = formula.tape.outputs
    side = right if formula.tape.instructions[left][0] == "quantity" else left
    return float(evaluate(formula.tape, (math.nan,), literal_values(formula))[side])
