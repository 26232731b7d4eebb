"""The linear solve for large blocks: sparse LU of the scaled Jacobian; imports scipy, so on demand only."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import scipy.sparse as sp
from scipy.sparse.linalg import lsqr, splu

from eqsheet.solve.factor import EQUILIBRATION_ROUNDS, SINGULAR_CONDITION, TINY, Factor
from eqsheet.solve.problem import Matrix, Vector


@dataclass(frozen=True, slots=True)
class SparseInverse:
    """Applies the inverse by ``@``, as a dense inverse does."""

    lu: Any
    left: Vector | None
    right: Vector | None

    def __matmul__(self, right: Vector) -> Vector:
        if self.left is None or self.right is None:
            return np.asarray(self.lu.solve(right))
        return np.asarray(self.right * self.lu.solve(right / self.left))

    def row(self, number: int) -> Vector:
        """One row (n,) of the inverse."""
        unit = np.zeros(self.lu.shape[0])
        unit[number] = 1.0 if self.right is None else self.right[number]
        row = np.asarray(self.lu.solve(unit, trans="T"))
        return row if self.left is None else row / self.left


@dataclass(frozen=True, slots=True)
class SparseLeastSquares:
    """Applies the pseudo-inverse of a singular matrix by ``@`` (LSQR: Paige and Saunders, TOMS 8, 1982)."""

    matrix: Any

    def __matmul__(self, right: Vector) -> Vector:
        return np.asarray(lsqr(self.matrix, right, atol=1e-14, btol=1e-14, iter_lim=500)[0])

    def row(self, number: int) -> Vector:
        """One row (n,) of the pseudo-inverse."""
        unit = np.zeros(self.matrix.shape[0])
        unit[number] = 1.0
        return np.asarray(lsqr(self.matrix.T, unit, atol=1e-14, btol=1e-14, iter_lim=500)[0])


def factorise_sparse(jacobian: Matrix, weights: Vector) -> Factor:
    """As `factor.factorise`; the condition is that of the pivots, a lower estimate."""
    scaled = sp.csc_matrix(jacobian)
    # On the entries themselves: products with diagonal matrices take as long as the factorisation.
    data = scaled.data * np.repeat(weights, np.diff(scaled.indptr))
    rows: Vector = np.bincount(scaled.indices, np.abs(data), scaled.shape[0]).astype(float)
    rows[rows == 0.0] = 1.0
    data /= rows[scaled.indices]
    scaled = sp.csc_matrix((data, scaled.indices, scaled.indptr), shape=scaled.shape)
    ones = np.ones(scaled.shape[0])
    inverse, condition = _inverse(scaled, None, None)
    # The sizes of the unknowns may be far off: scale by what stands in the matrix before giving up, first with the
    # sizes and then without them.
    for start in (ones, 1.0 / weights):
        if condition > SINGULAR_CONDITION:
            left, right = _equilibration(scaled, start)
            inverse, condition = _inverse(scaled, left, right)
    if inverse is None:
        return Factor(scaled, weights, rows, SparseLeastSquares(scaled), np.inf)
    return Factor(scaled, weights, rows, inverse, condition)


def _inverse(matrix: Any, left: Vector | None, right: Vector | None) -> tuple[SparseInverse | None, float]:
    """Inverse of the matrix, found with rows divided by `left`, columns times `right`; its condition."""
    try:
        both = matrix
        if left is not None and right is not None:
            data = matrix.data * np.repeat(right, np.diff(matrix.indptr)) / left[matrix.indices]
            both = sp.csc_matrix((data, matrix.indices, matrix.indptr), shape=matrix.shape)
        lu = splu(both, permc_spec=_ordering(both))
    except RuntimeError:
        # SuperLU's only way to say "exactly singular".
        return None, np.inf
    pivots = np.abs(lu.U.diagonal())
    smallest = float(pivots.min())
    return SparseInverse(lu, left, right), float(pivots.max()) / smallest if smallest > 0.0 else np.inf


def _ordering(matrix: Any) -> str:
    """The ordering of columns that fills in less.

    Where entries stand in pairs across a diagonal that is the largest of its column, as in meshes, minimum degree
    on the sum of the matrix and its transpose leaves about half the entries of the general column ordering. Where
    pivots must leave the diagonal, it leaves many times more.
    """
    diagonal = np.abs(matrix.diagonal())
    if (diagonal[np.repeat(np.arange(len(diagonal)), np.diff(matrix.indptr))] < np.abs(matrix.data)).any():
        return "COLAMD"
    turned = matrix.T.tocsc()
    paired = np.array_equal(matrix.indptr, turned.indptr) and np.array_equal(matrix.indices, turned.indices)
    return "MMD_AT_PLUS_A" if paired else "COLAMD"


def _equilibration(matrix: Any, start: Vector) -> tuple[Vector, Vector]:
    """As in `factor`: divisors of the rows and factors of the columns after which both have sizes near 1."""
    size = abs(matrix)
    columns = start.copy()
    rows = np.maximum(np.asarray((size @ sp.diags(columns)).sum(axis=1)).ravel(), TINY)
    for _ in range(EQUILIBRATION_ROUNDS):
        now = sp.diags(1.0 / rows) @ size @ sp.diags(columns)
        columns /= np.maximum(now.max(axis=0).toarray().ravel(), TINY)
        now = sp.diags(1.0 / rows) @ size @ sp.diags(columns)
        rows *= np.maximum(np.asarray(now.sum(axis=1)).ravel(), TINY)
    return rows, columns


# Shift that keeps a singular matrix factorisable, relative to its rows of sum 1, and the iterations it
# takes: each reduces all other directions by the ratio of the singular values.
SHIFT = 1e-11
ITERATIONS = 6


def smallest_by_inverse_iteration(matrix: Matrix) -> tuple[float, Vector, Vector]:
    """As `factor.smallest_singular_vectors` for a sparse matrix with rows of absolute sum 1.

    Inverse iteration on ``A^T A`` from a fixed start (Golub and Van Loan, Matrix Computations, section 7.6).
    """
    n = matrix.shape[0]
    lu = splu(sp.csc_matrix(matrix + SHIFT * sp.identity(n)))
    # Any fixed vector without symmetry will do.
    right = np.cos(np.arange(1.0, n + 1.0))
    for _ in range(ITERATIONS):
        left = lu.solve(right / np.linalg.norm(right), trans="T")
        left /= np.linalg.norm(left)
        right = lu.solve(left)
    value = 1.0 / float(np.linalg.norm(right))
    return max(value - SHIFT, 0.0), left, right / np.linalg.norm(right)
