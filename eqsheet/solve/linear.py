"""A linear block in one step, with one step of iterative refinement.

Reference: N. J. Higham, Accuracy and Stability of Numerical Algorithms, 2nd ed., SIAM 2002, chapter 12
(fixed precision refinement makes a factorisation's error small row by row).
"""

from __future__ import annotations

import numpy as np

from eqsheet.solve.factor import factorise, smallest_singular_vectors
from eqsheet.solve.interior import Interior
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Problem, Vector
from eqsheet.solve.termination import ACCEPTABLE, equation_sizes, floored, scaled_norm
from eqsheet.solve.trail import Trail

# How far past a bound, relative to the typical size, a solution counts as resting on it.
PAST_BOUND = 1e-12


def linear_step(problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """The solution of equations that are linear in their unknowns.

    Statuses: CONVERGED; SINGULAR or CONTINUUM (contradicting or repeating equations) with the null vectors;
    HELD where the only solution lies outside the bounds, and x is that solution; STALLED where the
    equations were not linear after all; DOMAIN where they are not finite at `start`.
    """
    interior = Interior(problem)
    x = interior.enter(start)
    residual, jacobian = problem.linearise(x)
    if not (np.isfinite(residual).all() and np.isfinite(abs(jacobian).sum())):
        return trail.close(Status.DOMAIN, x, np.inf)
    weights = floored(x, problem)
    trail.note(x, scaled_norm(residual, equation_sizes(problem, x, jacobian)), 0.0, -1)
    factor = factorise(jacobian, problem.magnitude)
    # From zero, where the right sides stand alone: from anywhere else the step is a difference, whose rounding would
    # drown the unknowns that are many decades smaller than their start.
    origin = np.zeros(problem.n)
    at_origin = problem.residual(origin)
    if np.isfinite(at_origin).all():
        x, residual = origin, at_origin
    for _ in range(2):
        x = x - problem.magnitude * factor.solve(residual)
        residual = problem.residual(x)
        weights = np.maximum(weights, np.abs(x))
    sizes = np.fmax(problem.sizes(x), abs(jacobian) @ weights)
    scaled = scaled_norm(residual, sizes)
    trail.note(x, scaled, 1.0, -1)
    if factor.singular:
        _, left, right = smallest_singular_vectors(factor.matrix)
        status = Status.CONTINUUM if scaled <= ACCEPTABLE else Status.SINGULAR
        return trail.close(status, x, scaled, (), tuple(left.tolist()), tuple(right.tolist()))
    if not scaled <= ACCEPTABLE:
        return trail.close(Status.STALLED, x, scaled)
    slack = PAST_BOUND * problem.magnitude
    outside = (x < problem.lower - slack) | (x > problem.upper + slack)
    if outside.any():
        return trail.close(Status.HELD, x, scaled, tuple(int(i) for i in np.flatnonzero(outside)))
    x = np.minimum(np.maximum(x, problem.lower), problem.upper)
    return trail.close(Status.CONVERGED, x, scaled, interior.resting(x))
