"""Better starts for unknowns that nothing has placed: by closed forms from a few of them.

One typical value seeds a chain of closed forms, which makes most equations hold. But a long chain may run away, as one
of temperatures that each follow from the fourth power of the one before; then a start that makes none hold is nearer.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from eqsheet.model.tape import Formula
from eqsheet.solve.factor import factorise
from eqsheet.solve.finish import WEIGHT_FLOOR
from eqsheet.solve.problem import Problem, Vector
from eqsheet.worksheet.starting_values import Start
from eqsheet.worksheet.torn import TornBlock, torn_block

# How many times longer the first Newton step from a start may be than from another for it to count as no further from
# the root: such steps are no more than a hint.
NO_FURTHER = 2.0


def less_blind(
    formulas: Sequence[Formula],
    unknowns: Sequence[int],
    values: Sequence[float],
    start: Start,
    problem: Problem,
) -> Problem:
    """The problem with a better start for the unknowns that nothing has placed.

    Parameters
    ----------
    values : sequence of float
        SI values by quantity number; those of the unknowns are not read.
    problem : Problem
        The equations at `start`.
    """
    starts = [start]
    torn = torn_block(formulas, unknowns, values, start)
    if torn is not None:
        starts.insert(0, consistent(torn, start))
    if start.typical:
        magnitude = tuple(abs(v) or m for v, m in zip(start.typical, start.magnitude))
        starts.append(replace(start, values=start.typical, magnitude=magnitude))
    chosen = _chosen(problem, starts) if len(starts) > 1 else start
    return replace(problem, start=np.array(chosen.values), magnitude=np.array(chosen.magnitude))


def _chosen(problem: Problem, starts: Sequence[Start]) -> Start:
    """The first start that is no further from a root than the others."""
    # In units of the last, which no chain has made.
    units = np.array(starts[-1].magnitude)
    with np.errstate(all="ignore"):
        distances = [_distance(problem, np.array(s.values), np.array(s.magnitude), units) for s in starts]
    # Written so that where none has a value the first is taken.
    return next(s for s, d in zip(starts, distances) if not d > NO_FURTHER * min(distances))


def consistent(torn: TornBlock, start: Start) -> Start:
    """The start with the unknowns that nothing has placed told by the closed forms, where these have a value.

    The others are left alone: what a guess, bounds or known values tell is better than what follows from a
    blind start.
    """
    told, _ = torn.expand([start.values[p] for p in torn.tears])
    blind = set(start.blind)
    values = tuple(
        t if i in blind and math.isfinite(t) and t != 0.0 else v
        for i, (t, v) in enumerate(zip(told, start.values))
    )
    magnitude = tuple(
        abs(v) if v != s and v != 0.0 else m for v, s, m in zip(values, start.values, start.magnitude)
    )
    return replace(start, values=values, magnitude=magnitude)


def _distance(problem: Problem, x: Vector, magnitude: Vector, units: Vector) -> float:
    """Longest part of the first Newton step from x, in `units` (n,); inf outside the domain."""
    residual, jacobian = problem.linearise(x)
    if not (np.isfinite(residual).all() and np.isfinite(abs(jacobian).sum())):
        return math.inf
    factor = factorise(jacobian, np.maximum(np.abs(x), WEIGHT_FLOOR * magnitude))
    step = factor.weights * factor.solve(residual)
    longest = float((np.abs(step) / units).max())
    return longest if longest < math.inf else math.inf
