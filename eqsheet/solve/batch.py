"""One Newton iteration for many cases of a block at once, each case frozen as it converges.

The damping is that of `newton`, case by case: the natural monotonicity test of Deuflhard (2004), section
3.3, halving the step of the cases that fail it. Cases that do not converge here are for the full solver.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from eqsheet.solve.interior import LEAST_FRACTION
from eqsheet.solve.problem import Vector
from eqsheet.solve.termination import ACCEPTABLE, AT_REST, ROUNDING, ZERO_FLOOR

Mask = NDArray[np.bool_]

# Steps for a sweep; a case that needs more has a trouble that the full solver knows better.
MOST_STEPS = 50
# Halvings of one step; below that the case is left to the full solver.
MOST_HALVINGS = 12
WEIGHT_FLOOR = 0.1


@dataclass(frozen=True)
class BatchProblem:
    """Many cases of n equations in n unknowns.

    Attributes
    ----------
    linearise : callable
        (x (m, n), cases (m,) of int) to residuals (m, n) and Jacobians (m, n, n) of these cases; nan or inf
        outside the domain.
    sizes : callable
        (x (m, n), cases (m,)) to the sizes (m, n) of the equations.
    start : ndarray (cases, n)
    lower, upper, magnitude : ndarray (n,) or (cases, n)
    """

    linearise: Callable[[Vector, NDArray[np.int_]], tuple[Vector, Vector]]
    sizes: Callable[[Vector, NDArray[np.int_]], Vector]
    start: Vector
    lower: Vector
    upper: Vector
    magnitude: Vector


@dataclass(frozen=True)
class BatchOutcome:
    """Where the cases ended.

    Attributes
    ----------
    x : ndarray (cases, n)
    converged : ndarray (cases,) of bool
    residual : ndarray (cases,)
        Largest scaled residual of each case.
    iterations : ndarray (cases,) of int
    """

    x: Vector
    converged: Mask
    residual: Vector
    iterations: NDArray[np.int_]

    @property
    def stragglers(self) -> NDArray[np.int_]:
        """Numbers of the cases that are left to the full solver."""
        return np.flatnonzero(~self.converged)


def solve_batch(problem: BatchProblem) -> BatchOutcome:
    """The cases solved together; those that fail are marked, never raised for."""
    cases, n = problem.start.shape
    lower = np.broadcast_to(problem.lower, (cases, n))
    upper = np.broadcast_to(problem.upper, (cases, n))
    magnitude = np.broadcast_to(problem.magnitude, (cases, n))
    x = _strictly(np.array(problem.start, dtype=float), lower, upper)
    scaled = np.full(cases, np.inf)
    steps = np.zeros(cases, dtype=int)
    converged = np.zeros(cases, dtype=bool)
    active = np.arange(cases)
    with np.errstate(all="ignore"):
        residual, jacobian = problem.linearise(x, active)
        for _ in range(MOST_STEPS):
            finite = np.isfinite(residual).all(axis=1) & np.isfinite(jacobian).all(axis=(1, 2))
            active, residual, jacobian = active[finite], residual[finite], jacobian[finite]
            if not active.size:
                break
            here = x[active]
            floor = np.maximum(np.abs(here), ZERO_FLOOR * magnitude[active])
            weights = np.maximum(np.abs(here), WEIGHT_FLOOR * magnitude[active])
            reach = np.einsum("cij,cj->ci", np.abs(jacobian), floor)
            scaled[active] = _largest(residual, reach)
            inverse, rows = _inverses(jacobian, weights)
            step = -_apply(inverse, residual / rows)
            rest = np.abs(step * weights / floor).max(axis=1)
            done = (scaled[active] <= ROUNDING) | (rest <= AT_REST)
            if done.any():
                self_done = active[done]
                x[self_done], scaled[self_done] = _last_step(
                    problem, x, self_done, (step * weights)[done], lower, upper, jacobian[done], floor[done]
                )
                converged[self_done] = scaled[self_done] <= ACCEPTABLE
                keep = ~done & np.isfinite(rest)
            else:
                keep = np.isfinite(rest)
            active = active[keep]
            if not active.size:
                break
            moved = _damped(
                problem, x, active, step[keep], weights[keep], inverse[keep], rows[keep], lower, upper
            )
            taken, residual, jacobian = moved
            active = active[taken]
            steps[active] += 1
    return BatchOutcome(x, converged, scaled, steps)


def _damped(
    problem: BatchProblem,
    x: Vector,
    active: NDArray[np.int_],
    step: Vector,
    weights: Vector,
    inverse: Vector,
    rows: Vector,
    lower: Vector,
    upper: Vector,
) -> tuple[Mask, Vector, Vector]:
    """Moves x of the active cases in place, each by the largest halved step that passes its test.

    Gives which cases have moved, and their residuals and Jacobians.
    """
    m, n = step.shape
    norm = np.sqrt((step * step).mean(axis=1))
    residual, jacobian = np.empty((m, n)), np.empty((m, n, n))
    taken = np.zeros(m, dtype=bool)
    waiting = np.arange(m)
    damping = 1.0
    for _ in range(MOST_HALVINGS):
        which = active[waiting]
        trial = _cut(x[which], damping * (step * weights)[waiting], lower[which], upper[which], norm[waiting])
        values, slopes = problem.linearise(trial, which)
        correction = _apply(inverse[waiting], values / rows[waiting])
        shrunk = np.sqrt((correction * correction).mean(axis=1)) < norm[waiting]
        good = shrunk & np.isfinite(values).all(axis=1) & np.isfinite(slopes).all(axis=(1, 2))
        passed = waiting[good]
        x[which[good]] = trial[good]
        residual[passed], jacobian[passed] = values[good], slopes[good]
        taken[passed] = True
        waiting = waiting[~good]
        if not waiting.size:
            break
        damping *= 0.5
    return taken, residual[taken], jacobian[taken]


def _last_step(
    problem: BatchProblem,
    x: Vector,
    which: NDArray[np.int_],
    step: Vector,
    lower: Vector,
    upper: Vector,
    jacobian: Vector,
    floor: Vector,
) -> tuple[Vector, Vector]:
    """The points after one more correction where it improves them, and their scaled residuals."""
    here = x[which]
    sizes = np.fmax(problem.sizes(here, which), np.einsum("cij,cj->ci", np.abs(jacobian), floor))
    before = _largest(problem.linearise(here, which)[0], sizes)
    trial = here + step
    inside = np.all((lower[which] < trial) & (trial < upper[which]), axis=1)
    trial = np.where(inside[:, None], trial, here)
    after = _largest(problem.linearise(trial, which)[0], sizes)
    better = after <= before
    return np.where(better[:, None], trial, here), np.where(better, after, before)


def _inverses(jacobian: Vector, weights: Vector) -> tuple[Vector, Vector]:
    """Inverses (m, n, n) of the Jacobians scaled by columns and rows (nan if singular); the rows."""
    rows = np.maximum(np.einsum("cij,cj->ci", np.abs(jacobian), weights), np.finfo(float).tiny)
    matrix = jacobian * weights[:, None, :] / rows[:, :, None]
    try:
        return np.linalg.inv(matrix), rows
    except np.linalg.LinAlgError:
        # numpy refuses the whole stack for one singular matrix: find it by the singular values.
        values = np.linalg.svd(matrix, compute_uv=False)
        regular = values[:, -1] > 1e-14 * values[:, 0]
        inverse = np.full_like(matrix, np.nan)
        inverse[regular] = np.linalg.inv(matrix[regular])
        return inverse, rows


def _apply(matrices: Vector, vectors: Vector) -> Vector:
    """Each matrix times its vector (m, n)."""
    return np.asarray(np.einsum("cij,cj->ci", matrices, vectors))


def _largest(residual: Vector, sizes: Vector) -> Vector:
    """Largest scaled residual (m,) of each case; inf where not finite."""
    scaled = (np.abs(residual) / np.maximum(sizes, np.finfo(float).tiny)).max(axis=1)
    return np.where(scaled < np.inf, scaled, np.inf)


def _cut(x: Vector, step: Vector, lower: Vector, upper: Vector, closeness: Vector) -> Vector:
    """Trial points (m, n), each unknown stopped short of its bounds, as `interior.Interior.cut` does."""
    fraction = np.maximum(LEAST_FRACTION, 1.0 - closeness)[:, None]
    trial = np.minimum(np.maximum(x + step, x - fraction * (x - lower)), x + fraction * (upper - x))
    return _strictly(trial, lower, upper)


def _strictly(x: Vector, lower: Vector, upper: Vector) -> Vector:
    """The points, moved inside where they are on or past a bound."""
    x = np.where(x <= lower, np.nextafter(lower, np.inf), x)
    return np.where(x >= upper, np.nextafter(upper, -np.inf), x)
