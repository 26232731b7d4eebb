"""Levenberg-Marquardt steps: damped least squares, at home where the Jacobian has no full rank.

References
----------
K. Levenberg, Quart. Appl. Math. 2 (1944), 164-168; D. W. Marquardt, J. SIAM 11 (1963), 431-441; the
parameter for a given radius by Hebden's iteration as in J. J. Moré, Numerical Analysis (ed. G. A. Watson)
(1978), section 5, on the singular values.
"""

from __future__ import annotations

import numpy as np

from eqsheet.solve.factor import TINY
from eqsheet.solve.outcome import Outcome
from eqsheet.solve.problem import Matrix, Problem, Vector
from eqsheet.solve.trail import Trail
from eqsheet.solve.trust_region import descend

# Relative deviation from the radius that is good enough (Moré's sigma).
NEAR_RADIUS = 0.1
# Singular values below this part of the largest are left out of the full step.
RANK_CUT = 1e-12


def levenberg_marquardt(problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """The root that Levenberg-Marquardt steps lead to from `start`, or where they come to rest."""
    return descend(problem, start, trail, damped_least_squares)


def damped_least_squares(f: Vector, a: Matrix, radius: float) -> Vector:
    """The step s (k,) that minimises ``|f + a s|`` among those of norm at most `radius` (to a tenth).

    >>> damped_least_squares(np.array([3.0, 4.0]), np.eye(2), 10.0)
    array([-3., -4.])
    >>> float(np.linalg.norm(damped_least_squares(np.array([3.0, 4.0]), np.eye(2), 1.0))) < 1.11
    True
    """
    left, values, right = np.linalg.svd(a, full_matrices=False)
    target = left.T @ f
    kept = values > RANK_CUT * values[0] if values[0] > 0.0 else values > 0.0
    full = np.where(kept, -target / np.where(kept, values, 1.0), 0.0)
    if float(np.linalg.norm(full)) <= radius:
        return np.asarray(right.T @ full)
    damping = 0.0 if kept.all() else 1e-6 * values[0] ** 2
    for _ in range(30):
        denominator = values**2 + damping
        step = -values * target / np.where(denominator > 0.0, denominator, 1.0)
        length = float(np.linalg.norm(step))
        if abs(length - radius) <= NEAR_RADIUS * radius:
            break
        # Hebden: the reciprocal length is nearly linear in the parameter.
        slope = -float(np.sum(step**2 / np.where(denominator > 0.0, denominator, 1.0))) / max(length, TINY)
        damping = max(damping + (length / radius) * (radius - length) / slope, 1e-3 * damping)
    return np.asarray(right.T @ (step * min(1.0, (1.0 + NEAR_RADIUS) * radius / max(length, TINY))))
