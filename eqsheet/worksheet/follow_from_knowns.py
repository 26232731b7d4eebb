"""What follows from the knowns line by line: all that a guess may use.

In ``r = D/2`` with ``D`` known, ``r`` is as good as known: an equation of its own gives it in one way only, and no
start or bound has a say in it. What needs a choice between several solutions, or equations solved together, does
not follow in this sense, and a guess that could depend on it would have no first value.
"""

from __future__ import annotations

import math

from eqsheet.model.branches import literal_values
from eqsheet.model.evaluate import evaluate
from eqsheet.model.isolate import isolate
from eqsheet.worksheet.prepare import Prepared


def follow_from_knowns(prepared: Prepared) -> dict[int, float]:
    """SI values by quantity number of the knowns and of what follows from them.

    Beyond the knowns nothing is worked out where no guess asks for it.
    """
    values = dict(prepared.known_values)
    asked = {q for item in prepared.system.guesses for q in item.formula.quantities}
    if asked <= values.keys():
        return values
    for block in prepared.structure.blocks:
        if len(block.rows) != 1 or block.columns[0] in values:
            continue
        formula = prepared.formulas[prepared.rows[block.rows[0]]]
        (quantity,) = block.columns
        if any(q not in values for q in formula.quantities if q != quantity):
            continue
        isolation = isolate(formula.tape, formula.quantities.index(quantity))
        if isolation is None or len(isolation.candidates) != 1:
            continue
        tape = isolation.candidates[0].tape
        inputs = [values.get(q, math.nan) for q in formula.quantities]
        value = float(evaluate(tape, inputs, literal_values(formula))[tape.outputs[0]])
        if math.isfinite(value):
            values[quantity] = value
    return values
