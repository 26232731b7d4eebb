"""Equations with known roots taken out: what is left has only the others.

References
----------
K. M. Brown and W. B. Gearhart, Deflation techniques for the calculation of further solutions of a nonlinear
system, Numer. Math. 16 (1971), 334-342; the shifted operator ``1/|x - r|^2 + 1``, which leaves the
equations alone far away, is that of P. E. Farrell, A. Birkisson and S. W. Funke, SIAM J. Sci. Comput. 37
(2015), A2026-A2045. Distances are measured in the sizes of the unknowns.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from eqsheet.solve.problem import Matrix, Problem, Vector


def deflated(problem: Problem, roots: Sequence[Vector]) -> Problem:
    """The problem ``m(x) F(x) = 0`` with ``m`` the product of ``1/|(x - r)/w|^2 + 1`` over the roots r.

    Its residuals are not finite at the roots themselves. The Jacobian is dense.
    """
    known = [(root, np.maximum(np.abs(root), problem.magnitude)) for root in roots]

    def factor(x: Vector) -> tuple[float, Vector]:
        """m (a number) and its gradient divided by m (n,)."""
        product, gradient = 1.0, np.zeros(problem.n)
        for root, size in known:
            distance = (x - root) / size
            squared = float(distance @ distance)
            if squared == 0.0:
                return np.inf, gradient
            product *= 1.0 / squared + 1.0
            gradient -= 2.0 * distance / size / (squared * (1.0 + squared))
        return product, gradient

    def residual(x: Vector) -> Vector:
        product, _ = factor(x)
        return np.asarray(product * problem.residual(x))

    def linearise(x: Vector) -> tuple[Vector, Matrix]:
        product, gradient = factor(x)
        values, jacobian = problem.linearise(x)
        jacobian = np.asarray(jacobian.toarray() if hasattr(jacobian, "toarray") else jacobian)
        return product * values, product * (jacobian + np.outer(values, gradient))

    def sizes(x: Vector) -> Vector:
        product, _ = factor(x)
        return np.asarray(product * problem.sizes(x))

    return replace(problem, residual=residual, linearise=linearise, sizes=sizes, written=None)
