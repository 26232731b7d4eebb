"""Which branches the members of a large family take, as one number for each member."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.branches import quantities_under
from eqsheet.model.evaluate import evaluate_arrays
from eqsheet.model.specialise import conditions
from eqsheet.model.tape import Tape

Array = NDArray[np.float64]
Numbers = NDArray[np.int64]


def branch_codes(
    tape: Tape, quantities: Sequence[Array], literals: Sequence[Array | float], members: int
) -> Numbers:
    """For each member a number that tells which conditions are decided, and how; 0 where none is.

    Parameters
    ----------
    quantities : sequence of ndarray (members,)
        SI values, nan where a quantity is not known.
    literals : sequence of (ndarray (members,) or float)
    """
    with np.errstate(all="ignore"):
        results = evaluate_arrays(tape, quantities, literals)
    code = np.zeros(members, dtype=np.int64)
    for condition in reversed(conditions(tape)):
        given = np.ones(members, dtype=bool)
        for slot in quantities_under(tape, condition.condition):
            given &= ~np.isnan(quantities[slot])
        truth = np.broadcast_to(np.asarray(results[condition.condition], dtype=float), (members,))
        own = np.where(~given | np.isnan(truth), 0, np.where(truth == 1.0, 1, 2))
        code = 3 * code + own
    return code


def branches_of(tape: Tape, code: int) -> dict[int, bool]:
    """The branch taken at each ``if`` that a number of `branch_codes` tells to be decided."""
    found = {}
    for condition in conditions(tape):
        code, own = divmod(code, 3)
        if own:
            found[condition.instruction] = own == 1
    return found
