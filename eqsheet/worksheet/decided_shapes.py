"""Shapes of a block on the branches that the values found before decide."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.branch_codes import branch_codes, branches_of
from eqsheet.model.branches import quantities_under
from eqsheet.model.outside_curve import curve_arguments
from eqsheet.model.specialise import conditions, specialise
from eqsheet.model.tape import Tape
from eqsheet.worksheet.array_equations import Shape


def decided_shapes(
    shapes: Sequence[Shape], unknowns: NDArray[np.int64], values: NDArray[np.float64]
) -> tuple[Shape, ...] | None:
    """The shapes without conditions, those whose members take different branches split.

    Parameters
    ----------
    unknowns : ndarray (n,)
        Quantity numbers.
    values : ndarray (quantities,)
        SI values of the quantities found before.

    Returns
    -------
    tuple of Shape or None
        None where a branch, or a step of a curve by steps, depends on an unknown.
    """
    if not any(_deciding(shape.tape) for shape in shapes):
        return tuple(shapes)
    own = np.zeros(len(values), dtype=bool)
    own[unknowns] = True
    found: list[Shape] = []
    for shape in shapes:
        deciding = _deciding(shape.tape)
        if own[shape.quantities[:, sorted(deciding)]].any():
            return None
        given = list(values[shape.quantities.T])
        code = branch_codes(shape.tape, given, shape.literals, len(shape.rows))
        for one in np.unique(code).tolist():
            held = specialise(shape.tape, branches_of(shape.tape, one))
            at = np.flatnonzero(code == one)
            literals = tuple(shape.literals[k][at] for k in held.literals)
            quantities = shape.quantities.T[list(held.quantities)][:, at].T
            found.append(Shape(held.tape, shape.rows[at], quantities, literals))
    return tuple(found)


def _deciding(tape: Tape) -> set[int]:
    """Slots of the quantities that decide branches, and steps of curves by steps."""
    found = {k for one in conditions(tape) for k in quantities_under(tape, one.condition)}
    for reader, _, argument in curve_arguments(tape):
        if tape.instructions[reader][-1].is_stepped:
            found |= quantities_under(tape, argument)
    return found
