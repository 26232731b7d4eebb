"""A start next to a given one that shares no symmetry with it.

Equations that do not tell two unknowns apart (``c d = 6, c + d = 5``) keep every iteration that starts with
equal values equal for ever, and a start on a stationary point or a kink never leaves it. Multiples of the
golden ratio, taken by the number of the unknown, are never alike (Weyl's sequence), so the way on depends
on the order of the unknowns alone and not on rounding.
"""

from __future__ import annotations

import numpy as np

from eqsheet.solve.interior import Interior
from eqsheet.solve.problem import Problem, Vector

GOLDEN = 0.5 * (5.0**0.5 - 1.0)
# Largest move relative to the size of the unknown: within the roughness of any guess.
MOVE = 2.0**-4


def moved_start(problem: Problem) -> Vector:
    """The start (n,), each unknown moved by up to `MOVE` of its size, strictly inside the bounds."""
    interior = Interior(problem)
    start = interior.enter(problem.start)
    parts = np.modf(GOLDEN * np.arange(1, problem.n + 1))[0] - 0.5
    step = 2.0 * MOVE * parts * np.maximum(np.abs(start), problem.magnitude)
    return interior.cut(start, step, 1.0)[0]
