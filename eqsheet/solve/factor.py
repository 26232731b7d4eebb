"""The linear solve: a Jacobian scaled, factorised once, and applied to many right sides; its null vectors."""

from __future__ import annotations

from dataclasses import dataclass
from math import sqrt

import numpy as np

from eqsheet.solve.problem import Matrix, Vector

# Condition number of the scaled Jacobian beyond which a Newton step has no digit left (1/eps is 4.5e15,
# less one digit for the elimination and one for the scaling).
SINGULAR_CONDITION = 1e14
# Rounds of rows and columns in turn, taken only where a matrix looks singular. A chain of stages needs more than
# one; a frame whose unknowns are scaled by up to 1e6 either way needs more than ten.
EQUILIBRATION_ROUNDS = 20
# Stands in for the size of an empty row.
TINY = float(np.finfo(float).tiny)


@dataclass(frozen=True, slots=True)
class Factor:
    """The scaled Jacobian ``A = J diag(w) / rows`` of a block, ready to solve with.

    Attributes
    ----------
    matrix : ndarray (n, n)
        A; every row has the absolute sum 1.
    weights : ndarray (n,)
        w, the unit of each unknown.
    rows : ndarray (n,)
        Absolute row sums of ``J diag(w)``: the natural unit of each equation.
    inverse : ndarray (n, n)
        Inverse of A, or its pseudo-inverse of reduced rank where A is numerically singular.
    condition : float
        Estimate of the condition number of A, the Frobenius norm of its inverse (the maximum norm of A
        itself is 1 by the scaling of the rows); inf where A is numerically singular.
    """

    matrix: Matrix
    weights: Vector
    rows: Vector
    inverse: Matrix
    condition: float

    @property
    def singular(self) -> bool:
        """Whether A has no full numerical rank."""
        return self.condition > SINGULAR_CONDITION

    def solve(self, residual: Vector) -> Vector:
        """u (n,) with ``A u = residual/rows`` (of least norm where A is singular): a step in units of w."""
        return np.asarray(self.inverse @ (residual / self.rows))

    def inverse_row(self, unknown: int) -> Vector:
        """How one unknown, in units of w, answers to each equation (n,): a row of the inverse Jacobian."""
        if isinstance(self.inverse, np.ndarray):
            return np.asarray(self.inverse[unknown] / self.rows)
        return np.asarray(self.inverse.row(unknown) / self.rows)


def factorise(jacobian: Matrix, weights: Vector) -> Factor:
    """The factorised Jacobian in units of `weights`.

    Parameters
    ----------
    jacobian : ndarray (n, n) or scipy.sparse matrix
        Finite.
    weights : ndarray (n,)
        Size of each unknown, > 0.

    Notes
    -----
    Rows are scaled to the absolute sum 1 (row equilibration in the maximum norm: van der Sluis, Condition
    numbers and equilibration of matrices, Numer. Math. 14, 1969), so neither the unit of an equation nor
    that of an unknown has any influence beyond rounding. For a dense block of a few unknowns the explicit
    inverse is the fastest way to several right sides; the iteration around it corrects its rounding.
    """
    if hasattr(jacobian, "tocsc"):
        from eqsheet.solve.sparse_factor import factorise_sparse

        return factorise_sparse(jacobian, weights)
    rows = np.maximum(np.dot(np.abs(jacobian), weights), TINY)
    matrix = jacobian * weights
    matrix /= rows[:, None]
    inverse, condition = _inverse(matrix)
    # The sizes of the unknowns may be far off: scale by what stands in the matrix before giving up, first with the
    # sizes and then without them.
    for power in (0.0, -1.0):
        if condition <= SINGULAR_CONDITION:
            break
        left, right = _equilibration(matrix, weights**power)
        inverse, condition = _inverse(matrix * right / left[:, None])
        inverse = inverse * right[:, None] / left
    if condition > SINGULAR_CONDITION:
        return Factor(matrix, weights, rows, pseudo_inverse(matrix), np.inf)
    return Factor(matrix, weights, rows, inverse, condition)


def _equilibration(matrix: Matrix, start: Vector) -> tuple[Vector, Vector]:
    """Divisors of the rows and factors of the columns, from those of `start`, after which both have sizes near 1.

    The rows end with the absolute sum 1, as without this.
    """
    size = np.abs(matrix)
    columns = start.copy()
    rows = np.maximum((size * columns).sum(axis=1), TINY)
    for _ in range(EQUILIBRATION_ROUNDS):
        # An empty row or column keeps its scale.
        peaks = (size * columns / rows[:, None]).max(axis=0)
        columns /= np.where(peaks > 0.0, peaks, 1.0)
        sums = (size * columns / rows[:, None]).sum(axis=1)
        rows *= np.where(sums > 0.0, sums, 1.0)
    return rows, columns


def _inverse(matrix: Matrix) -> tuple[Matrix, float]:
    """Inverse and condition estimate; zeros and inf where there is none."""
    try:
        inverse = np.linalg.inv(matrix)
    except np.linalg.LinAlgError:
        return np.zeros_like(matrix), np.inf
    condition = sqrt(float(np.vdot(inverse, inverse)))
    return (inverse, condition) if condition < np.inf else (np.zeros_like(matrix), np.inf)


def pseudo_inverse(matrix: Matrix) -> Matrix:
    """Moore-Penrose inverse (n, n) of a scaled matrix, singular values below 1e-12 of the largest left out.

    The cut stands two digits above `SINGULAR_CONDITION`, so that what is left out is never noise divided by
    noise.
    """
    if not np.isfinite(matrix).all():
        # Overflow in the scaling: no direction to be had here.
        return np.zeros_like(matrix).T
    return np.linalg.pinv(matrix, rcond=1e-12)


def smallest_singular_vectors(matrix: Matrix) -> tuple[float, Vector, Vector]:
    """Smallest singular value relative to the largest, with its left (n,) and right (n,) singular vectors."""
    if hasattr(matrix, "tocsc"):
        from eqsheet.solve.sparse_factor import smallest_by_inverse_iteration

        return smallest_by_inverse_iteration(matrix)
    if not np.isfinite(matrix).all():
        return 0.0, np.zeros(matrix.shape[0]), np.zeros(matrix.shape[0])
    left, values, right = np.linalg.svd(matrix)
    largest = values[0]
    return (float(values[-1] / largest) if largest > 0.0 else 0.0), left[:, -1], right[-1]
