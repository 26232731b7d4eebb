"""Following the solution curve of a homotopy from a solved problem to the one asked for, round its turning
points.

References
----------
H. B. Keller, Numerical solution of bifurcation and nonlinear eigenvalue problems, in: Applications of
Bifurcation Theory, ed. P. H. Rabinowitz, Academic Press 1977, 359-384 (arc length as parameter). E. L.
Allgower and K. Georg, Numerical Continuation Methods, Springer 1990, chapters 2, 4 and 6 (tangent from the
null space, corrector of least norm, step control by the contraction). The Newton homotopy is ``F(x) - (1 -
t) F(x0)``; the fixed-point homotopy is ``t F(x) + (1 - t) Q (x - x0)`` with Q the orthogonal polar factor
of the scaled Jacobian at x0, which, unlike the identity, does not depend on the order of the equations.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TypeAlias

import numpy as np

from eqsheet.solve.interior import Interior
from eqsheet.solve.newton import newton
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Problem, Vector
from eqsheet.solve.termination import measured, scaled_norm
from eqsheet.solve.trail import Trail

# (u, t) to (H (n,), dH/du (n, n), dH/dt (n,)); None outside the domain or the bounds.
Homotopy: TypeAlias = Callable[[Vector, float], "tuple[Vector, Vector, Vector] | None"]

FIRST_STEP = 0.05
LEAST_STEP = 1e-7
# In units of the sizes of the unknowns at the start; the curve of a sane problem turns within that.
GREATEST_STEP = 2.0
# Steps along the curve, and how far out it is followed.
MOST_STEPS = 400
FARTHEST = 1e6
# The corrector stops when its step is this small relative to the predictor's, within so many steps, each of
# which must be shorter than the one before (the first: than the predictor) by this factor.
ON_CURVE = 1e-3
CORRECTOR_STEPS = 5
CONTRACTION = 0.5
# Largest angle between successive tangents, as a cosine: beyond it the step may have jumped to another curve.
LEAST_COSINE = 0.8


def newton_homotopy(problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """The root at the end of the curve of ``F(x) = (1 - t) F(x0)``, or the best point on the way."""
    scaled = _Scaled(problem, start)
    if scaled.first is None:
        return trail.close(Status.DOMAIN, scaled.origin, np.inf)
    f0 = scaled.first[0]

    def homotopy(u: Vector, t: float) -> tuple[Vector, Vector, Vector] | None:
        found = scaled.linearise(u)
        return None if found is None else (found[0] - (1.0 - t) * f0, found[1], f0)

    return _follow(problem, scaled, homotopy, trail)


def fixed_point_homotopy(problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """The root at the end of the curve of ``t F(x) + (1 - t) Q (x - x0) = 0``, or the best point on the
    way."""
    scaled = _Scaled(problem, start)
    if scaled.first is None:
        return trail.close(Status.DOMAIN, scaled.origin, np.inf)
    left, _, right = np.linalg.svd(scaled.first[1])
    polar = left @ right

    def homotopy(u: Vector, t: float) -> tuple[Vector, Vector, Vector] | None:
        found = scaled.linearise(u)
        if found is None:
            return None
        f, a = found
        linear = polar @ (u - scaled.u0)
        return t * f + (1.0 - t) * linear, t * a + (1.0 - t) * polar, f - linear

    return _follow(problem, scaled, homotopy, trail)


class _Scaled:
    """The problem in units of the sizes at its start."""

    def __init__(self, problem: Problem, start: Vector) -> None:
        self.problem = problem
        self.interior = Interior(problem)
        self.origin = self.interior.enter(start)
        self.weights = np.maximum(np.abs(self.origin), problem.magnitude)
        self.u0 = self.origin / self.weights
        self.rows = np.ones(problem.n)
        residual, jacobian = problem.linearise(self.origin)
        jacobian = np.asarray(jacobian.toarray() if hasattr(jacobian, "toarray") else jacobian)
        self.first: tuple[Vector, Vector] | None = None
        if np.isfinite(residual).all() and np.isfinite(jacobian).all():
            reach = np.abs(jacobian) @ self.weights
            sizes = np.fmax(problem.sizes(self.origin), reach)
            self.rows = np.maximum(sizes, np.finfo(float).tiny)
            self.first = self.linearise(self.u0)

    def linearise(self, u: Vector) -> tuple[Vector, Vector] | None:
        x = u * self.weights
        if not self.interior.contains(x):
            return None
        residual, jacobian = self.problem.linearise(x)
        jacobian = np.asarray(jacobian.toarray() if hasattr(jacobian, "toarray") else jacobian)
        f, a = residual / self.rows, jacobian * self.weights / self.rows[:, None]
        if not (np.isfinite(f).all() and np.isfinite(a).all()):
            return None
        return f, a


def _follow(problem: Problem, scaled: _Scaled, homotopy: Homotopy, trail: Trail) -> Outcome:
    """Predictor and corrector along the curve; Newton's method wherever it crosses t = 1."""
    point = np.append(scaled.u0, 0.0)
    assert scaled.first is not None
    trail.note(scaled.origin, scaled_norm(scaled.first[0], np.ones(problem.n)), 0.0, -1)
    tangent = _tangent(homotopy, point, np.append(np.zeros(problem.n), 1.0))
    best = (np.inf, scaled.origin)
    length = FIRST_STEP
    while tangent is not None and length >= LEAST_STEP and len(trail.steps) < MOST_STEPS:
        if trail.spent:
            return trail.close(Status.BUDGET, best[1], measured(problem, best[1]))
        corrected = _corrected(homotopy, point + length * tangent, length)
        following = None if corrected is None else _tangent(homotopy, corrected[0], tangent)
        if corrected is None or following is None or float(following @ tangent) < LEAST_COSINE:
            length *= 0.5
            continue
        new, steps = corrected
        if (point[-1] - 1.0) * (new[-1] - 1.0) <= 0.0 and new[-1] != point[-1]:
            part = (1.0 - point[-1]) / (new[-1] - point[-1])
            crossing = (point + part * (new - point))[:-1] * scaled.weights
            outcome = newton(problem, scaled.interior.enter(crossing), trail.renew())
            if outcome.solved:
                return outcome
        point, tangent = new, following
        x = point[:-1] * scaled.weights
        found = scaled.linearise(point[:-1])
        size = scaled_norm(found[0], np.ones(problem.n)) if found is not None else np.inf
        if size < best[0]:
            best = (size, x)
        trail.note(x, size, min(1.0, length), -1)
        if float(np.abs(point).max()) > FARTHEST:
            break
        length = min(
            length * (2.0 if steps <= 2 else 1.2), GREATEST_STEP * max(1.0, float(np.abs(point).max()))
        )
    return trail.close(Status.STALLED, best[1], measured(problem, best[1]))


def _tangent(homotopy: Homotopy, point: Vector, along: Vector) -> Vector | None:
    """Unit tangent (n + 1,) of the curve at a point of it, in the direction of `along`."""
    found = homotopy(point[:-1], float(point[-1]))
    if found is None:
        return None
    _, by_u, by_t = found
    direction: Vector = np.linalg.svd(np.column_stack((by_u, by_t)))[2][-1]
    return direction if float(direction @ along) >= 0.0 else -direction


def _corrected(homotopy: Homotopy, point: Vector, length: float) -> tuple[Vector, int] | None:
    """The point of the curve nearest to `point`, and the corrector steps taken; None where they do not
    contract.

    `length` is that of the predictor, by which a correction is small or not.
    """
    last = length
    for steps in range(1, CORRECTOR_STEPS + 1):
        found = homotopy(point[:-1], float(point[-1]))
        if found is None:
            return None
        value, by_u, by_t = found
        step = np.linalg.lstsq(np.column_stack((by_u, by_t)), -value, rcond=None)[0]
        size = float(np.linalg.norm(step))
        if not size <= CONTRACTION * last:
            return None
        point = point + step
        if size <= ON_CURVE * length:
            return point, steps
        last = size
    return None
