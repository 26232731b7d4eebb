"""Looks past the bounds of a block that was not solved: does it have a solution there?

A bound that shuts the solution out is as likely a slip as an equation, and the equations do not show it.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from eqsheet.model.tape import Formula
from eqsheet.solve.trail import Budget
from eqsheet.units.dimension import Dimension
from eqsheet.worksheet.guesses import Guesses
from eqsheet.worksheet.solve_block import PAST_BOUND, BlockResult, Known, solve_equations

# The run has failed already; a look past the bounds must not double the wait.
_BUDGET = Budget(iterations=60, seconds=0.5)
# What is large, or has families, is left as it is.
LARGEST_BLOCK = 60
# Further past a bound than so many times the range, or the size of a single bound, a solution is no help: an
# equation with angles has others everywhere.
FARTHEST = 30.0


@dataclass(frozen=True, slots=True)
class Beyond:
    """A solution outside the bounds.

    Attributes
    ----------
    values : mapping of int to float
        SI value of each unknown of the block there, by quantity number.
    shut_out : tuple of int
        Quantities whose own bounds it does not lie in, ascending; never empty.
    """

    values: Mapping[int, float]
    shut_out: tuple[int, ...]


def beyond_bounds(
    formulas: Sequence[Formula],
    unknowns: Sequence[int],
    known: Known,
    guesses: Guesses,
    dimensions: Sequence[Dimension | None],
    best: Sequence[float],
) -> Beyond | None:
    """A solution that the block has outside its bounds; None where none was found.

    Bounds at zero are the last to be given up: a negative length is no help.

    Parameters
    ----------
    best : sequence of float
        Where the search within the bounds ended, by position of the unknowns.
    """
    bounded = [q for q in unknowns if not all(map(math.isinf, guesses.bounds(q)))]
    if not bounded or len(unknowns) > LARGEST_BLOCK:
        return None
    starts = {q: v for q, v in zip(unknowns, best) if math.isfinite(v)}
    at_zero = {q: 0.0 for q in bounded if guesses.lower.get(q) == 0.0}
    tried = [at_zero]
    if at_zero:
        tried.append({})
    for lower in tried:
        for near in (starts, {q: guesses.near[q] for q in unknowns if q in guesses.near}):
            loose = Guesses(near, lower)
            result = solve_equations(formulas, unknowns, known, loose, dimensions, _BUDGET)
            if result.solved:
                return _beyond(unknowns, result, guesses)
    return None


def _beyond(unknowns: Sequence[int], result: BlockResult, guesses: Guesses) -> Beyond | None:
    values = dict(zip(unknowns, result.values))
    outside = tuple(q for q in unknowns if not _inside(values[q], *guesses.bounds(q)))
    if not outside or any(_far(values[q], *guesses.bounds(q)) for q in outside):
        return None
    return Beyond(values, outside)


def _inside(value: float, low: float, high: float) -> bool:
    slack = PAST_BOUND * abs(value)
    return low - slack <= value <= high + slack


def _far(value: float, low: float, high: float) -> bool:
    """Whether a value is so far past its bounds that they cannot be what is wrong; a bound at zero has no size."""
    width = high - low if math.isfinite(high - low) else abs(low if math.isfinite(low) else high)
    return width > 0.0 and max(low - value, value - high) > FARTHEST * width
