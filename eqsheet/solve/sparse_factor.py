"""The linear solve for large blocks: LU of the scaled Jacobian, in a band where there is a narrow one, else sparse.

Imports scipy, so it is imported on demand only.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import scipy.sparse as sp
from scipy.sparse.linalg import lsqr, splu

from eqsheet.solve.band import BandFactor, factorise_band
from eqsheet.solve.factor import EQUILIBRATION_ROUNDS, SINGULAR_CONDITION, TINY, Factor
from eqsheet.solve.problem import Matrix, Vector
from eqsheet.solve.sparse_pattern import Pattern, pattern_of


class GeneralFactor:
    """A sparse matrix A factorised by SuperLU.

    Raises
    ------
    RuntimeError
        From the constructor, where the matrix is exactly singular.
    """

    def __init__(self, pattern: Pattern, data: Vector) -> None:
        self._lu = splu(pattern.matrix(data), permc_spec=_ordering(pattern, data))
        self.pivots: Vector = self._lu.U.diagonal()

    def solve(self, right: Vector) -> Vector:
        """x (n,) with ``A x = right``."""
        return np.asarray(self._lu.solve(right))

    def solve_transposed(self, right: Vector) -> Vector:
        """x (n,) with ``A^T x = right``."""
        return np.asarray(self._lu.solve(right, trans="T"))


@dataclass(frozen=True, slots=True)
class SparseInverse:
    """Applies the inverse by ``@``, as a dense inverse does.

    Attributes
    ----------
    factor : BandFactor or GeneralFactor
        Of the matrix with its rows divided by `left` and its columns multiplied by `right`.
    left, right : ndarray (n,) or None
    """

    factor: BandFactor | GeneralFactor
    left: Vector | None
    right: Vector | None

    def __matmul__(self, right: Vector) -> Vector:
        if self.left is None or self.right is None:
            return self.factor.solve(right)
        return np.asarray(self.right * self.factor.solve(right / self.left))

    def row(self, number: int) -> Vector:
        """One row (n,) of the inverse."""
        unit = np.zeros(len(self.factor.pivots))
        unit[number] = 1.0 if self.right is None else self.right[number]
        row = self.factor.solve_transposed(unit)
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
    pattern, data = pattern_of(jacobian)
    # On the entries themselves: products with diagonal matrices take as long as the factorisation.
    data = data * weights[pattern.columns]
    rows: Vector = np.bincount(pattern.indices, np.abs(data), pattern.n).astype(float, copy=False)
    rows[rows == 0.0] = 1.0
    data /= rows[pattern.indices]
    scaled = pattern.matrix(data)
    inverse, condition = _inverse(pattern, data, None, None)
    # The sizes of the unknowns may be far off: scale by what stands in the matrix before giving up, first with the
    # sizes and then without them.
    for start in (np.ones(pattern.n), 1.0 / weights):
        if condition > SINGULAR_CONDITION:
            left, right = _equilibration(pattern, data, start)
            inverse, condition = _inverse(pattern, data, left, right)
    if inverse is None:
        return Factor(scaled, weights, rows, SparseLeastSquares(scaled), np.inf)
    return Factor(scaled, weights, rows, inverse, condition)


def _inverse(
    pattern: Pattern, data: Vector, left: Vector | None, right: Vector | None
) -> tuple[SparseInverse | None, float]:
    """Inverse of the matrix, found with rows divided by `left`, columns times `right`; its condition."""
    if left is not None and right is not None:
        data = data * right[pattern.columns] / left[pattern.indices]
    factor = _eliminated(pattern, data)
    if factor is None:
        return None, np.inf
    pivots = np.abs(factor.pivots)
    smallest = float(pivots.min())
    condition = float(pivots.max()) / smallest if smallest > 0.0 else np.inf
    return SparseInverse(factor, left, right), condition


def _eliminated(pattern: Pattern, data: Vector) -> BandFactor | GeneralFactor | None:
    """The factorised matrix, None where it is exactly singular."""
    if pattern.band is not None:
        return factorise_band(pattern.band, data)
    try:
        return GeneralFactor(pattern, data)
    except RuntimeError:
        # SuperLU's only way to say "exactly singular".
        return None


def _ordering(pattern: Pattern, data: Vector) -> str:
    """The ordering of columns that fills in less.

    Where entries stand in pairs across a diagonal that is the largest of its column, as in meshes, minimum degree
    on the sum of the matrix and its transpose leaves about half the entries of the general column ordering. Where
    pivots must leave the diagonal, it leaves many times more.
    """
    sizes = np.abs(data)
    diagonal = np.zeros(pattern.n)
    diagonal[pattern.indices[pattern.on_diagonal]] = sizes[pattern.on_diagonal]
    if (diagonal[pattern.columns] < sizes).any():
        return "COLAMD"
    return "MMD_AT_PLUS_A" if pattern.paired else "COLAMD"


def _equilibration(pattern: Pattern, data: Vector, start: Vector) -> tuple[Vector, Vector]:
    """As in `factor`: divisors of the rows and factors of the columns after which both have sizes near 1."""
    size, n = np.abs(data), pattern.n
    columns = start.copy()
    rows = np.maximum(np.bincount(pattern.indices, size * columns[pattern.columns], n), TINY)
    for _ in range(EQUILIBRATION_ROUNDS):
        # An empty row or column keeps its scale.
        peaks = np.zeros(n)
        np.maximum.at(peaks, pattern.columns, size * columns[pattern.columns] / rows[pattern.indices])
        columns /= np.where(peaks > 0.0, peaks, 1.0)
        scaled = size * columns[pattern.columns] / rows[pattern.indices]
        sums = np.bincount(pattern.indices, scaled, n)
        rows *= np.where(sums > 0.0, sums, 1.0)
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
