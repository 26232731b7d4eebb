"""Roots at a kink, beyond which there is nothing but roots: ``max(f, 0) = 0`` holds wherever f is negative.

The Jacobian at such a root may be that of the other side, on which the root is an isolated one.
"""

from __future__ import annotations

import numpy as np

from eqsheet.solve.factor import factorise, smallest_singular_vectors
from eqsheet.solve.kind_of_root import least_residuals
from eqsheet.solve.moved_start import GOLDEN
from eqsheet.solve.problem import Problem, ScalarProblem, Vector
from eqsheet.solve.termination import NEIGHBOURHOOD, PROBE, ROUNDING, equation_sizes

# Scaled residual below which a point beside a root is one too.
ALSO_A_ROOT = 64.0 * ROUNDING


def curve_beside(problem: Problem, x: Vector) -> tuple[Vector, Vector] | None:
    """Left and right singular vectors (n,) of the Jacobian on that side of x where a curve of roots begins.

    None where there is no such side. Looks to either side along every unknown, and in one direction across all.

    Parameters
    ----------
    x : ndarray (n,)
        A root.
    """
    reach = np.maximum(np.abs(x), NEIGHBOURHOOD * problem.magnitude)
    across = np.modf(GOLDEN * np.arange(1, problem.n + 1))[0] - 0.5
    sizes = equation_sizes(problem, x, problem.linearise(x)[1])
    units = np.where(sizes > 0.0, sizes, 1.0)
    for direction in (across, *np.eye(problem.n)):
        for side in (0.25 * PROBE, -0.25 * PROBE):
            _, jacobian = problem.linearise(x + side * reach * direction)
            jacobian = np.asarray(jacobian.toarray() if hasattr(jacobian, "toarray") else jacobian)
            if not np.isfinite(jacobian).all():
                continue
            factor = factorise(jacobian, reach)
            if not factor.singular:
                continue
            _, left, right = smallest_singular_vectors(factor.matrix)
            sides = zip(*[least_residuals(problem, x, reach, units, right, t) for t in (PROBE, 2.0 * PROBE)])
            if any(max(near, far) <= ALSO_A_ROOT for near, far in sides):
                return left, right
    return None


def roots_beside(problem: ScalarProblem, x: float) -> bool:
    """As `curve_beside` for one unknown: whether all is root to one side of the root x."""
    reach = max(abs(x), NEIGHBOURHOOD * problem.magnitude)
    size = max(problem.size(x), abs(problem.linearise(x)[1]) * reach)
    for side in (PROBE * reach, -PROBE * reach):
        points = (x + side, x + 2.0 * side)
        if all(problem.lower < p < problem.upper for p in points) and all(
            abs(problem.residual(p)) <= ALSO_A_ROOT * size for p in points
        ):
            return True
    return False
