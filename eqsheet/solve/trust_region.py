"""Trust-region descent on the sum of squared residuals; the step strategy comes from `dogleg` or
`levenberg_marquardt`.

Residuals are measured in the row sums of the Jacobian at the start, unknowns by the largest norm their
column of the Jacobian has had, so units have no influence. An unknown that rests near a bound and would be
driven on is held for the step; other steps are cut short of the bounds unknown by unknown. Near a root
`newton` takes over.

References
----------
J. J. Moré, The Levenberg-Marquardt algorithm: implementation and theory, in: Numerical Analysis
(ed. G. A. Watson), Springer 1978 (scaling of the unknowns, update of the radius). T. F. Coleman and
Y. Li, SIAM J. Optim. 6 (1996), 418-445 (strictly feasible steps; the holding of unknowns is a
simplification of their scaling).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from eqsheet.solve.factor import Factor, factorise
from eqsheet.solve.finish import give_up
from eqsheet.solve.interior import Interior
from eqsheet.solve.newton import newton
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Matrix, Problem, Vector
from eqsheet.solve.termination import floored, measured, scaled_norm
from eqsheet.solve.trail import Trail

# (scaled residual f (n,), scaled Jacobian A (n, k), radius) to the step (k,) in the scaled unknowns.
StepStrategy: TypeAlias = Callable[[Vector, Matrix, float], Vector]

# First radius relative to the norm of the scaled start (MINPACK's factor).
FIRST_RADIUS = 100.0
# Ratio of actual to predicted reduction from which a step is taken, the radius kept, and enlarged.
TAKEN, KEPT, ENLARGED = 1e-4, 0.25, 0.75
# Norm of the scaled residuals at which Newton's method is asked to finish.
HAND_OVER = 1e-3
# Relative reduction of the residuals, over `PATIENCE` steps, below which the descent has come to rest.
LEAST_REDUCTION = 1e-8
PATIENCE = 12
# Distance to a bound, relative to the size of the unknown, from which it is held when driven on.
HELD_WITHIN = 2.0**-20
# Largest cosine between the residuals and any column of the Jacobian at which the point is a minimum
# (MINPACK's gtol test, which asks for less after a slow linear convergence).
STATIONARY = 1e-3
# Cosine at which nothing is left to gain.
FLAT = 1e-9
# Radius relative to the first one below which nothing more will come.
LEAST_RADIUS = 1e-14


def descend(problem: Problem, start: Vector, trail: Trail, strategy: StepStrategy) -> Outcome:
    """The root that descent by `strategy` leads to, or the point where it comes to rest."""
    interior = Interior(problem)
    x = interior.enter(start)
    residual, jacobian = problem.linearise(x)
    if not _finite(residual, jacobian):
        return trail.close(Status.DOMAIN, x, np.inf)
    jacobian = _dense(jacobian)
    rows = np.maximum(np.fmax(problem.sizes(x), np.abs(jacobian) @ floored(x, problem)), np.finfo(float).tiny)
    f, a = residual / rows, jacobian / rows[:, None]
    diagonal = _column_norms(a, problem)
    norm = float(np.linalg.norm(f))
    radius = first_radius = FIRST_RADIUS * max(float(np.linalg.norm(diagonal * x)), 1.0)
    earlier = [norm]
    trail.note(x, scaled_norm(residual, rows), 0.0, -1)
    next_hand_over = HAND_OVER
    while True:
        if norm <= next_hand_over:
            outcome = newton(problem, x, trail.renew())
            if outcome.solved or outcome.status is Status.BUDGET:
                return outcome
            next_hand_over = 1e-3 * norm
        if trail.spent:
            return trail.close(Status.BUDGET, x, measured(problem, x))
        free = _free(interior, x, f @ a)
        if not free.any() or radius < LEAST_RADIUS * first_radius or _cosine(f, a, free) <= FLAT:
            break
        step = np.zeros(problem.n)
        step[free] = strategy(f, (a / diagonal)[:, free], radius) / diagonal[free]
        trial, limiting = interior.cut(x, step, 1.0)
        taken = trial - x
        predicted = norm**2 - float(np.linalg.norm(f + a @ taken)) ** 2
        if not predicted > 0.0:
            # The cut has spoilt the step: only a shorter one, which is not cut, can help.
            radius = 0.25 * float(np.linalg.norm(diagonal * taken))
            continue
        new_residual, new_jacobian = problem.linearise(trial)
        new_norm = float(np.linalg.norm(new_residual / rows))
        ratio = (norm**2 - new_norm**2) / predicted if _finite(new_residual, new_jacobian) else -1.0
        length = float(np.linalg.norm(diagonal * taken))
        if not ratio >= KEPT:
            radius = 0.25 * min(length, radius)
        elif ratio >= ENLARGED:
            radius = max(radius, 2.0 * length)
        if not ratio >= TAKEN:
            continue
        x, residual, jacobian, norm = trial, new_residual, _dense(new_jacobian), new_norm
        f, a = residual / rows, jacobian / rows[:, None]
        diagonal = np.maximum(diagonal, _column_norms(a, problem))
        trail.note(x, scaled_norm(residual, rows), min(1.0, ratio), limiting)
        earlier.append(norm)
        if len(earlier) > PATIENCE and earlier[-1 - PATIENCE] - norm < LEAST_REDUCTION * norm:
            break
    stationary = _cosine(f, a, _free(interior, x, f @ a)) <= STATIONARY
    return _at_rest(problem, interior, trail, x, residual, jacobian, stationary)


def _at_rest(
    problem: Problem,
    interior: Interior,
    trail: Trail,
    x: Vector,
    residual: Vector,
    jacobian: Matrix,
    stationary: bool,
) -> Outcome:
    """The outcome where the descent ends short of a root."""
    factor: Factor = factorise(jacobian, floored(x, problem))
    trail.best = x
    outcome = give_up(problem, interior, trail, -factor.weights * factor.solve(residual), factor)
    if stationary and outcome.status is not Status.SINGULAR:
        return replace(outcome, status=Status.MINIMUM)
    return outcome


def _cosine(f: Vector, a: Matrix, free: NDArray[np.bool_]) -> float:
    """Largest cosine of the angle between the residuals and the column of a free unknown."""
    columns = np.linalg.norm(a, axis=0) * float(np.linalg.norm(f))
    cosines = np.abs(f @ a) / np.where(columns > 0.0, columns, 1.0)
    return float(cosines[free].max()) if free.any() else 0.0


def _free(interior: Interior, x: Vector, gradient: Vector) -> NDArray[np.bool_]:
    """Mask (n,) of the unknowns that are not driven onto a bound they rest beside."""
    if not interior.bounded:
        return np.ones(x.size, dtype=bool)
    near = HELD_WITHIN * np.maximum(np.abs(x), interior.magnitude)
    at_lower = (x - interior.lower <= near) & (gradient > 0.0)
    at_upper = (interior.upper - x <= near) & (gradient < 0.0)
    return np.asarray(~(at_lower | at_upper))


def _column_norms(a: Matrix, problem: Problem) -> Vector:
    """Norm (n,) of each column; an unknown without influence is measured by its typical size."""
    norms = np.linalg.norm(a, axis=0)
    return np.where(norms > 0.0, norms, 1.0 / problem.magnitude)


def _dense(jacobian: Matrix) -> Vector:
    return np.asarray(jacobian.toarray() if hasattr(jacobian, "toarray") else jacobian)


def _finite(residual: Vector, jacobian: Matrix) -> bool:
    data = jacobian.data if hasattr(jacobian, "tocsc") else jacobian
    return bool(np.isfinite(residual).all() and np.isfinite(data).all())
