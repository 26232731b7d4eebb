"""Starts spread evenly over the bounds, or over decades where there are none, the same at every run."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from eqsheet.solve.interior import Interior
from eqsheet.solve.moved_start import moved_start
from eqsheet.solve.problem import Problem, Vector
from eqsheet.solve.sobol import sobol

# Factors by which a whole guess may be wrong, as by a unit taken for another.
COMMON_FACTORS = (0.1, 10.0, 0.01, 100.0, 1e-3, 1e3, -1.0, -0.1)
# Decades to either side of its typical size over which an unknown is spread where a bound is missing.
DECADES = 3.0
# An unknown without bounds is spread by a hyperbolic sine: half of the starts within its typical size, the
# farthest about exp(REACH/2) times that.
REACH = 7.0
# Ratio of bounds of one sign from which a range is spread over its decades instead of evenly.
SPANS_DECADES = 100.0


def scaled_starts(problem: Problem) -> Iterator[Vector]:
    """The moved guess (n,) times each of the common factors, where that lies strictly inside the bounds."""
    interior = Interior(problem)
    start = moved_start(problem)
    for factor in COMMON_FACTORS:
        if interior.contains(factor * start):
            yield factor * start


def spread_starts(problem: Problem, count: int) -> Iterator[Vector]:
    """`count` points (n,), a power of two or none, strictly inside the bounds.

    Unknowns without bounds keep the sign of their guess in every second point.
    """
    if count == 0:
        return
    for number, sample in enumerate(sobol(problem.n, count)):
        either_sign = number % 2 == 1
        yield np.array([_placed(problem, k, float(part), either_sign) for k, part in enumerate(sample)])


def _placed(problem: Problem, unknown: int, part: float, either_sign: bool) -> float:
    """The value of one unknown at `part`, strictly between 0 and 1, of its range."""
    part = min(max(part, 1e-9), 1.0 - 1e-9)
    low, high = float(problem.lower[unknown]), float(problem.upper[unknown])
    start = float(problem.start[unknown])
    size = max(float(problem.magnitude[unknown]), abs(start))
    if low > -np.inf and high < np.inf:
        return _between(low, high, part)
    decades = size * math.pow(10.0, DECADES * (2.0 * part - 1.0))
    if low > -np.inf:
        return low + decades
    if high < np.inf:
        return high - decades
    if either_sign or start == 0.0:
        return size * math.sinh(REACH * (2.0 * part - 1.0)) / math.sinh(0.5 * REACH)
    return math.copysign(decades, start)


def _between(low: float, high: float, part: float) -> float:
    """The value at `part` of a range, which is divided by decades where its ends are of one sign and far
    apart."""
    if low > 0.0 and high > SPANS_DECADES * low:
        return low * math.exp(math.log(high / low) * part)
    if high < 0.0 and low < SPANS_DECADES * high:
        return high * math.exp(math.log(low / high) * part)
    return low + (high - low) * part
