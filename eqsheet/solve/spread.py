"""Newton's method from starts spread over the bounds, the most promising of them followed by descent."""

from __future__ import annotations

import numpy as np

from eqsheet.solve.interior import Interior
from eqsheet.solve.levenberg_marquardt import levenberg_marquardt
from eqsheet.solve.newton import newton
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Problem, Vector
from eqsheet.solve.spread_starts import spread_starts
from eqsheet.solve.trail import Budget, Trail

# Starts tried, and how many of the best of them by descent; enough for the published problems, and a
# fraction of a second.
STARTS = 128
DESCENTS = 16
# Steps for one start: where Newton's method works from a start, it does so within these.
SHORT = 60


def spread(problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """The first root found from the spread starts, else the best point of all."""
    interior = Interior(problem)
    best: Outcome | None = None
    promising: list[tuple[float, int, Vector]] = []
    for number, point in enumerate(spread_starts(problem, STARTS)):
        if trail.spent:
            break
        outcome = newton(problem, interior.enter(point), _short(trail, point))
        trail.note(outcome.x, outcome.residual, 1.0, -1)
        if outcome.solved:
            return trail.close(outcome.status, outcome.x, outcome.residual, outcome.on_bound)
        if outcome.status is not Status.DOMAIN:
            promising.append((outcome.residual, number, outcome.x))
    promising.sort(key=lambda entry: entry[:2])
    for _, _, point in promising[:DESCENTS]:
        if trail.spent:
            break
        outcome = levenberg_marquardt(problem, point, _short(trail, point))
        trail.note(outcome.x, outcome.residual, 1.0, -1)
        if outcome.solved:
            return trail.close(outcome.status, outcome.x, outcome.residual, outcome.on_bound)
        if best is None or outcome.residual < best.residual:
            best = outcome
    if best is None:
        return trail.close(Status.DOMAIN if trail.best_residual == np.inf else Status.STALLED)
    # Followed to its end, to say what the best point is.
    return levenberg_marquardt(problem, best.x, Trail(trail.method, best.x, trail.budget, trail.deadline))


def _short(trail: Trail, start: Vector) -> Trail:
    """A trail of its own for one start, within the same deadline."""
    return Trail(trail.method, start, Budget(SHORT, trail.budget.seconds), trail.deadline)
