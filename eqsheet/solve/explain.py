"""Facts about a failed block, as indices and numbers; the caller has the names."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from eqsheet.solve.factor import Factor, factorise, smallest_singular_vectors
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Matrix, Problem, Vector
from eqsheet.solve.termination import equation_sizes, floored

# Equations named as worst.
MOST_NAMED = 5
# Part of the largest entry of a singular vector from which an equation or unknown counts as taking part.
TAKES_PART = 0.1
# Smallest singular value, relative to the largest, below which the equations are called dependent at a point.
NEAR_DEPENDENT = 1e-8
# A residual vector whose part in the range of the scaled Jacobian is smaller than this part of it is at a
# minimum: to first order no step reduces it.
STATIONARY = 1e-4


@dataclass(frozen=True, slots=True)
class Facts:
    """Why a block is not solved, at the best point found.

    Attributes
    ----------
    worst : tuple of (int, float)
        Equations with the largest scaled residuals, largest first, with those residuals.
    not_finite : int
        First equation whose residual is not finite, -1 if all are.
    pressed : tuple of (int, int, int)
        Unknowns at or pushed past a bound: (unknown, side -1 lower or +1 upper, equation that pushes
        hardest).
    dependent_equations, free_unknowns : tuple of (int, float)
        Participants of the smallest singular vectors, largest share first, with signed shares; empty where
        the Jacobian is well conditioned.
    local_minimum : bool
        The residuals are not zero, and to first order no step within the bounds makes their scaled norm
        smaller.
    """

    worst: tuple[tuple[int, float], ...]
    not_finite: int
    pressed: tuple[tuple[int, int, int], ...]
    dependent_equations: tuple[tuple[int, float], ...]
    free_unknowns: tuple[tuple[int, float], ...]
    local_minimum: bool


def explain(problem: Problem, outcome: Outcome) -> Facts:
    """The facts at ``outcome.x``."""
    x = outcome.x
    residual, jacobian = problem.linearise(x)
    bad = np.flatnonzero(~np.isfinite(residual + jacobian @ np.ones(problem.n)))
    if bad.size:
        return Facts((), int(bad[0]), (), (), (), False)
    sizes = equation_sizes(problem, x, jacobian)
    scaled = np.abs(residual) / np.where(sizes > 0.0, sizes, 1.0)
    order = np.argsort(-scaled, kind="stable")[:MOST_NAMED]
    worst = tuple((int(i), float(scaled[i])) for i in order if scaled[i] > 0.0)

    weights = floored(x, problem)
    factor = factorise(jacobian, weights)
    step = -factor.solve(residual) * weights
    pressed = _pressed(problem, x, step, residual, factor)
    relative, left, right = smallest_singular_vectors(factor.matrix)
    dependent = relative < NEAR_DEPENDENT
    return Facts(
        worst,
        -1,
        pressed,
        _participants(left) if dependent else (),
        _participants(right) if dependent else (),
        outcome.status is Status.MINIMUM
        or _at_minimum(problem, x, residual / np.where(sizes > 0.0, sizes, 1.0), jacobian, weights, sizes),
    )


def _pressed(
    problem: Problem, x: Vector, step: Vector, residual: Vector, factor: Factor
) -> tuple[tuple[int, int, int], ...]:
    """Unknowns that the step carries to or past a bound, with the equation that contributes most to that."""
    found = []
    for side, bound in ((-1, problem.lower), (1, problem.upper)):
        for unknown in np.flatnonzero(side * (x + step - bound) >= 0.0):
            pushes = -factor.inverse_row(int(unknown)) * residual * side
            found.append((int(unknown), side, int(pushes.argmax())))
    return tuple(sorted(found))


def _participants(vector: Vector) -> tuple[tuple[int, float], ...]:
    """Entries that matter, largest first; the largest is made positive."""
    share = vector / vector[np.abs(vector).argmax()]
    order = np.argsort(-np.abs(share), kind="stable")
    return tuple((int(i), float(share[i])) for i in order if abs(share[i]) >= TAKES_PART)


def _at_minimum(
    problem: Problem, x: Vector, scaled: Vector, jacobian: Matrix, weights: Vector, sizes: Vector
) -> bool:
    """Whether the gradient of the squared scaled residuals vanishes, bounds that hold it back allowed for."""
    norm = float(np.linalg.norm(scaled))
    if norm <= 1e-10:
        return False
    units = np.where(sizes > 0.0, sizes, 1.0)[:, None]
    if hasattr(jacobian, "multiply"):
        matrix = jacobian.multiply(weights).multiply(1.0 / units)
        columns = np.sqrt(np.asarray(matrix.multiply(matrix).sum(axis=0)).ravel())
    else:
        matrix = jacobian * weights / units
        columns = np.linalg.norm(matrix, axis=0)
    gradient = matrix.T @ scaled
    near_lower = x - problem.lower <= 1e-6 * problem.magnitude
    near_upper = problem.upper - x <= 1e-6 * problem.magnitude
    gradient = np.where(near_lower, np.minimum(gradient, 0.0), gradient)
    gradient = np.where(near_upper, np.maximum(gradient, 0.0), gradient)
    steepest = np.abs(gradient) / np.where(columns > 0.0, columns, 1.0)
    return bool(steepest.max() <= STATIONARY * norm)
