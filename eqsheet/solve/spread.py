"""Newton's method and dogleg descent from starts spread over the bounds."""

from __future__ import annotations

import itertools
from collections.abc import Iterator

import numpy as np

from eqsheet.solve.dogleg import dogleg
from eqsheet.solve.interior import Interior
from eqsheet.solve.levenberg_marquardt import levenberg_marquardt
from eqsheet.solve.newton import newton
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Problem, Vector
from eqsheet.solve.spread_starts import scaled_starts, spread_starts
from eqsheet.solve.trail import Budget, Rung, Trail

# Starts tried; enough for the published problems, and a fraction of a second.
STARTS = 64
# Points looked at for starts inside the domain: where equations have no value over most of the range, the
# few points where they have one are worth finding.
CANDIDATES = 1024
# Starts that end on a continuum of roots after which no isolated root is expected any more.
ENOUGH_CONTINUA = 12
# Steps from one start: where a start is any good, these suffice.
SHORT = 60


def spread(problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """The first root found from the spread starts, else what the best point of all descends to."""
    interior = Interior(problem)
    best: Outcome | None = None
    continua = 0
    for point, methods in _attempts(problem):
        if trail.spent or continua >= ENOUGH_CONTINUA:
            break
        for method in methods:
            if trail.spent:
                break
            inner = Trail(trail.method, point, Budget(SHORT, trail.budget.seconds), trail.deadline)
            outcome = method(problem, interior.enter(point), inner)
            if outcome.solved:
                return outcome
            if outcome.status is Status.DOMAIN:
                break
            continua += outcome.status is Status.CONTINUUM
            if best is None or outcome.residual < best.residual:
                best = outcome
    if best is None:
        return trail.close(Status.DOMAIN, residual=np.inf)
    # Followed to its end, to say what the best point is.
    return levenberg_marquardt(problem, best.x, trail.renew())


def _attempts(problem: Problem) -> Iterator[tuple[Vector, tuple[Rung, ...]]]:
    """Starts, the most likely ones first, with the methods to try from each."""
    for point in scaled_starts(problem):
        yield point, (newton, dogleg, levenberg_marquardt)
    within_domain = (p for p in spread_starts(problem, CANDIDATES) if np.isfinite(problem.residual(p)).all())
    for number, point in enumerate(itertools.islice(within_domain, STARTS)):
        yield point, (newton, dogleg if number % 4 < 2 else levenberg_marquardt)
