"""Damped Newton iteration with the natural monotonicity test.

References
----------
P. Deuflhard, Newton Methods for Nonlinear Problems: Affine Invariance and Adaptive Algorithms, Springer
2004, section 3.3.3, algorithm NLEQ-ERR: damping by the norm of the simplified Newton correction, which no
linear transformation of the equations changes. Deviations: steps are cut unknown by unknown at the bounds,
the estimate of the damping compares with the cut step, the weights of the norm keep every unknown at its
own size, and the iteration ends at rounding level.
"""

from __future__ import annotations

from math import sqrt
from typing import NamedTuple

import numpy as np

from eqsheet.solve.damping import (
    LEAST_DAMPING,
    SURE_CONTRACTION,
    corrected_damping,
    predicted_damping,
)
from eqsheet.solve.factor import Factor, factorise
from eqsheet.solve.finish import WEIGHT_FLOOR, finish, give_up
from eqsheet.solve.interior import Interior
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Matrix, Problem, Vector
from eqsheet.solve.termination import (
    AT_REST,
    MULTIPLE,
    ROUNDING,
    SLOW,
    floored,
    last_step_due,
    residual_at,
    residual_by_slopes,
)
from eqsheet.solve.trail import Trail

# Contraction of a quadratic approach.
QUICK = 0.1
# Contraction that shows a root being approached: 1/4 at a double root, 1/2 on the way to infinity.
CONTRACTING = 0.4
# Vectors longer than this are multiplied in threads by the library, which takes longer to start than the product.
THREADED = 10_000
# Norm of the step below which it is looked at unknown by unknown.
NEAR = 1e-6


class Accepted(NamedTuple):
    """A damped step that passed the test.

    Attributes
    ----------
    x : ndarray (n,)
    residual : ndarray (n,)
    jacobian : ndarray (n, n)
    damping : float
    limiting : int
        Unknown that limited the step, -1 if none did.
    contraction : float
        Norm of the simplified correction relative to that of the step.
    correction : ndarray (n,)
        Simplified Newton correction: that of the old Jacobian for the new residual, in the unit of x.
    step : ndarray (n,)
        The full Newton step that was damped, in the unit of x.
    """

    x: Vector
    residual: Vector
    jacobian: Matrix
    damping: float
    limiting: int
    contraction: float
    correction: Vector
    step: Vector


def newton(problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """The root that damped Newton steps lead to from `start`, or where and why they end.

    Parameters
    ----------
    problem : Problem
    start : ndarray (n,)
        Moved strictly inside the bounds first.
    trail : Trail
        Written on the way.
    """
    interior = Interior(problem)
    x = interior.enter(start)
    residual, jacobian = problem.linearise(x)
    if not _finite(residual, jacobian):
        return trail.close(Status.DOMAIN, x, np.inf)
    damping, limiting = 0.0, -1
    last: Accepted | None = None
    last_rest, last_norm, slow_steps = np.inf, np.inf, 0
    while True:
        # On a quadratic approach the next step reaches rounding level anyhow: no need to ask what the terms
        # say.
        quick = last is not None and last.contraction < QUICK
        scaled = (residual_by_slopes if quick else residual_at)(problem, x, residual, jacobian)
        trail.note(x, scaled, damping, limiting)
        trail.contracting = last is not None and last.contraction < CONTRACTING
        weights = np.maximum(np.abs(x), WEIGHT_FLOOR * problem.magnitude)
        # At the root too: only there does the Jacobian tell whether it is an isolated one.
        factor = factorise(jacobian, weights)
        if scaled <= ROUNDING:
            return finish(problem, interior, trail, x, residual, jacobian, factor, slow_steps)
        if trail.spent:
            return trail.close(Status.BUDGET)
        step = -factor.solve(residual)
        norm = _norm(step)
        if norm == 0.0:
            # A step that vanishes in floating point changes nothing.
            return finish(problem, interior, trail, x, residual, jacobian, factor, slow_steps)
        rest = float((np.abs(step * weights) / floored(x, problem)).max()) if norm < NEAR else np.inf
        slow_steps = slow_steps + 1 if MULTIPLE < rest / last_rest < SLOW else 0
        if rest <= AT_REST and (last_step_due(rest, norm / last_norm) or rest > SLOW * last_rest):
            return finish(problem, interior, trail, x, residual, jacobian, factor, slow_steps)
        first = 1.0 if last is None else _predicted_damping(last, step, weights)
        accepted = _first_accepted(problem, interior, x, factor, step, norm, first)
        if accepted is None:
            if rest <= AT_REST:
                return finish(problem, interior, trail, x, residual, jacobian, factor, slow_steps)
            return give_up(problem, interior, trail, step * weights, factor)
        trail.singular = trail.singular or factor.singular
        last, last_rest, last_norm = accepted, rest, norm
        x, residual, jacobian, damping, limiting = accepted[:5]


def _predicted_damping(last: Accepted, step: Vector, weights: Vector) -> float:
    """Damping to begin with, from how well the last Jacobian foretold this step."""
    if last.damping == 1.0 and last.contraction < SURE_CONTRACTION:
        return 1.0
    correction = last.correction / weights
    return predicted_damping(
        last.damping,
        _norm(last.step / weights),
        _norm(correction),
        _norm(correction - step),
        _norm(step),
    )


def _first_accepted(
    problem: Problem,
    interior: Interior,
    x: Vector,
    factor: Factor,
    step: Vector,
    norm: float,
    damping: float,
) -> Accepted | None:
    """The first damped step that the natural monotonicity test accepts, or None where none does."""
    weights = factor.weights
    full = weights * step
    raised = False
    while damping >= LEAST_DAMPING:
        trial, limiting = interior.cut(x, damping * full, norm)
        # The Jacobian at the trial point is asked for with the residual: nearly every first trial is
        # accepted.
        residual, jacobian = problem.linearise(trial)
        if not _finite(residual, jacobian):
            damping *= 0.5
            continue
        correction = -factor.solve(residual)
        contraction = _norm(correction) / norm
        if damping == 1.0 and contraction < SURE_CONTRACTION:
            return Accepted(
                trial, residual, jacobian, damping, limiting, contraction, correction * weights, full
            )
        # Deviation from what the linear model predicts for the step as taken: the nonlinearity along it.
        deviation = _norm(correction - (step - (trial - x) / weights))
        better = corrected_damping(damping, contraction, deviation, norm, limiting >= 0, raised)
        if better != damping:
            raised = raised or better > damping
            damping = better
            continue
        if limiting < 0 and damping < 1.0:
            limiting = int(np.abs(step).argmax())
        return Accepted(trial, residual, jacobian, damping, limiting, contraction, correction * weights, full)
    return None


def _norm(vector: Vector) -> float:
    """Root mean square."""
    if vector.size > THREADED:
        return sqrt(float(np.einsum("i,i", vector, vector)) / vector.size)
    return sqrt(float(np.dot(vector, vector)) / vector.size)


def _finite(residual: Vector, jacobian: Matrix) -> bool:
    """Whether all values are finite (a sum is, if and only if all its terms are)."""
    data = jacobian.data if hasattr(jacobian, "tocsc") else jacobian
    total = float(np.add.reduce(residual)) + float(np.add.reduce(data, axis=None))
    return total - total == 0.0
