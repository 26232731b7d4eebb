"""Equations that say the same wherever one looks, though none is a multiple of another on paper.

Two balances of which one follows from the others, or one line written twice in other words, leave no isolated root:
by the implicit function theorem a Jacobian whose rank is too small at every point has a curve of roots or none. A few
points without symmetry tell, since a rank that is full anywhere is full nearly everywhere. That saves the search
that would otherwise go on from start to start.
"""

from __future__ import annotations

import itertools

import numpy as np

from eqsheet.solve.factor import factorise
from eqsheet.solve.moved_start import moved_start
from eqsheet.solve.problem import Problem
from eqsheet.solve.spread_starts import spread_starts
from eqsheet.solve.termination import floored

# Points at which the rank is taken, and those tried to find as many inside the domain.
POINTS = 5
TRIED = 32


def redundant(problem: Problem) -> bool:
    """Whether the Jacobian has no full rank at any of the points looked at.

    A point with an empty row or column says nothing: functions that have gone flat there, or underflown.
    """
    seen = 0
    for point in itertools.chain([moved_start(problem)], spread_starts(problem, TRIED)):
        _, jacobian = problem.linearise(point)
        jacobian = np.asarray(jacobian.toarray() if hasattr(jacobian, "toarray") else jacobian)
        size = np.abs(jacobian)
        if not np.isfinite(size).all() or not (size.any(axis=0).all() and size.any(axis=1).all()):
            continue
        if not factorise(jacobian, floored(point, problem)).singular:
            return False
        seen += 1
        if seen == POINTS:
            return True
    return False
