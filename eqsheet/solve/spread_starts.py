"""Starts spread evenly over the bounds, or over decades where there are none, the same at every run.

Reference: I. M. Sobol, On the distribution of points in a cube and the approximate evaluation of integrals,
USSR Comput. Math. Math. Phys. 7 (1967), 86-112; scrambled with a fixed seed by scipy.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from eqsheet.solve.problem import Problem, Vector

# Any fixed number: the same worksheet must give the same answer tomorrow.
SEED = 20040
# Decades to either side of its typical size over which an unknown is spread where a bound is missing.
DECADES = 3.0
# An unknown without bounds is spread by a hyperbolic sine: half of the starts within its typical size, the
# farthest about exp(REACH/2) times that.
REACH = 7.0
# Ratio of bounds of one sign from which a range is spread over its decades instead of evenly.
SPANS_DECADES = 100.0


def spread_starts(problem: Problem, count: int) -> Iterator[Vector]:
    """`count` points (n,), a power of two, strictly inside the bounds."""
    from scipy.stats import qmc

    sequence = qmc.Sobol(problem.n, scramble=True, rng=np.random.default_rng(SEED))
    for sample in sequence.random(count):
        yield np.array([_placed(problem, k, float(part)) for k, part in enumerate(sample)])


def _placed(problem: Problem, unknown: int, part: float) -> float:
    """The value of one unknown at `part`, strictly between 0 and 1, of its range."""
    part = min(max(part, 1e-9), 1.0 - 1e-9)
    low, high = float(problem.lower[unknown]), float(problem.upper[unknown])
    size = max(float(problem.magnitude[unknown]), abs(float(problem.start[unknown])))
    if low > -np.inf and high < np.inf:
        if low > 0.0 and high > SPANS_DECADES * low:
            return low * math.exp(math.log(high / low) * part)
        if high < 0.0 and low < SPANS_DECADES * high:
            return high * math.exp(math.log(low / high) * part)
        return low + (high - low) * part
    decades = size * math.pow(10.0, DECADES * (2.0 * part - 1.0))
    if low > -np.inf:
        return low + decades
    if high < np.inf:
        return high - decades
    side = 2.0 * part - 1.0
    return size * math.sinh(REACH * side) / math.sinh(0.5 * REACH)
