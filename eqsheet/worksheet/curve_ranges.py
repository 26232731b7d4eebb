"""Where unknowns must lie for the curves they are arguments of to have a value."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

from eqsheet.model.branches import literal_values, quantities_under
from eqsheet.model.evaluate import evaluate
from eqsheet.model.isolate import isolate
from eqsheet.model.outside_curve import curve_arguments
from eqsheet.model.tape import Formula, Tape

Range = tuple[float, float]


def argument_ranges(
    unknowns: Sequence[int], formulas: Sequence[Formula], values: Sequence[float]
) -> Mapping[int, Range]:
    """SI ranges by quantity number, of the unknowns that alone decide the argument of a curve.

    Parameters
    ----------
    values : sequence of float
        SI values by quantity number, nan where not known yet.
    """
    own = set(unknowns)
    found: dict[int, Range] = {}
    for formula in formulas:
        for reader, position, argument in curve_arguments(formula.tape):
            under = quantities_under(formula.tape, argument)
            slots = [k for k in under if formula.quantities[k] in own]
            if len(slots) != 1:
                continue
            interpolant = formula.tape.instructions[reader][-1]
            first, last = (
                _at(formula, argument, slots[0], end, values) for end in interpolant.ranges[position]
            )
            if first is None or last is None:
                continue
            quantity = formula.quantities[slots[0]]
            low, high = found.get(quantity, (-math.inf, math.inf))
            found[quantity] = max(low, min(first, last)), min(high, max(first, last))
    return {quantity: (low, high) for quantity, (low, high) in found.items() if low < high}


def _at(formula: Formula, argument: int, slot: int, end: float, values: Sequence[float]) -> float | None:
    """The quantity's value that makes an argument `end`; None where that is not plain."""
    tape = formula.tape
    if tape.instructions[argument] == ("quantity", slot):
        return end
    if not math.isfinite(end):
        return None
    instructions = (*tape.instructions, ("const", end))
    wanted = Tape(instructions, (argument, len(tape.instructions)), tape.quantities, tape.literals)
    isolation = isolate(wanted, slot)
    if isolation is None or len(isolation.candidates) != 1:
        return None
    closed = isolation.candidates[0].tape
    inputs = [values[q] for q in formula.quantities]
    value = float(evaluate(closed, inputs, literal_values(formula))[closed.outputs[0]])
    return value if math.isfinite(value) else None
