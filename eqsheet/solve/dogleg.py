"""Powell's dogleg: from the steepest descent to the Gauss-Newton step, as far as the trust region allows.

References
----------
M. J. D. Powell, A hybrid method for nonlinear equations, in: Numerical Methods for Nonlinear Algebraic
Equations, ed. P. Rabinowitz, Gordon and Breach 1970, 87-114. Deviation: the Jacobian is exact at every
step, and one without full rank gives the Gauss-Newton step of least norm.
"""

from __future__ import annotations

import numpy as np

from eqsheet.solve.factor import pseudo_inverse
from eqsheet.solve.outcome import Outcome
from eqsheet.solve.problem import Matrix, Problem, Vector
from eqsheet.solve.trail import Trail
from eqsheet.solve.trust_region import descend


def dogleg(problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """The root that dogleg steps lead to from `start`, or where they come to rest."""
    return descend(problem, start, trail, dogleg_step)


def dogleg_step(f: Vector, a: Matrix, radius: float) -> Vector:
    """The step (k,) of norm at most `radius` for residuals f (n,) and Jacobian a (n, k), both scaled.

    >>> dogleg_step(np.array([3.0, 4.0]), np.eye(2), 10.0)
    array([-3., -4.])
    >>> float(np.linalg.norm(dogleg_step(np.array([3.0, 4.0]), np.diag([1.0, 0.1]), 2.0)))
    2.0
    """
    newton = -(pseudo_inverse(a) @ f)
    length = float(np.linalg.norm(newton))
    if length <= radius:
        return np.asarray(newton)
    gradient = a.T @ f
    curvature = float(np.linalg.norm(a @ gradient)) ** 2
    squared = float(gradient @ gradient)
    if curvature == 0.0:
        return np.asarray(newton * (radius / length))
    steepest = -(squared / curvature) * gradient
    short = float(np.linalg.norm(steepest))
    if short >= radius:
        return np.asarray(steepest * (radius / short))
    # Where the line from the steepest-descent point to the Newton point leaves the trust region.
    across = newton - steepest
    p, q, r = float(across @ across), float(steepest @ across), short * short - radius * radius
    if p == 0.0:
        return np.asarray(steepest)
    part = (
        -r / (q + float(np.sqrt(max(q * q - p * r, 0.0))))
        if q > 0.0
        else ((-q + float(np.sqrt(max(q * q - p * r, 0.0)))) / p)
    )
    return np.asarray(steepest + part * across)
