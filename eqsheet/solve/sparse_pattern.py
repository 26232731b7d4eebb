"""Where the entries of a sparse Jacobian stand, and what an elimination makes of that, worked out once.

The steps of an iteration factorise matrices with the same places again and again; a matrix made by
`Pattern.matrix` remembers its pattern.
"""

from __future__ import annotations

from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from eqsheet.solve.band import Band, narrow_band
from eqsheet.solve.problem import Matrix, Vector

Places = NDArray[np.int32]


class Pattern:
    """The places of the entries of a square matrix, column after column.

    Parameters
    ----------
    indices : ndarray (entries,)
        Rows of the entries, ascending within a column and without repetition.
    indptr : ndarray (n + 1,)
        Where each column begins in `indices`, and the end of the last.
    """

    def __init__(self, indices: Places, indptr: Places) -> None:
        self.indices = indices
        self.indptr = indptr
        self.n = len(indptr) - 1

    @cached_property
    def columns(self) -> Places:
        """Column of each entry (entries,)."""
        return np.repeat(np.arange(self.n, dtype=np.int32), np.diff(self.indptr))

    @cached_property
    def on_diagonal(self) -> Places:
        """Numbers of the entries on the diagonal, ascending."""
        return np.flatnonzero(self.indices == self.columns).astype(np.int32)

    @cached_property
    def paired(self) -> bool:
        """Whether entries stand in pairs across the diagonal."""
        turned = self.matrix(np.ones(len(self.indices))).T.tocsc()
        return np.array_equal(self.indptr, turned.indptr) and np.array_equal(self.indices, turned.indices)

    @cached_property
    def band(self) -> Band | None:
        """The narrow band that rows and columns can be ordered to, None where there is none."""
        return narrow_band(self.indices, self.columns, self.n)

    def matrix(self, data: Vector) -> Matrix:
        """The matrix (n, n) with these entries, in compressed sparse columns."""
        from scipy.sparse import csc_matrix

        made = csc_matrix((data, self.indices, self.indptr), shape=(self.n, self.n), copy=False)
        made.pattern = self
        return made


def pattern_of(matrix: Matrix) -> tuple[Pattern, Vector]:
    """The pattern of a sparse matrix and its entries in that order."""
    from scipy.sparse import csc_matrix

    known: Pattern | None = getattr(matrix, "pattern", None)
    if known is not None:
        return known, matrix.data
    own = csc_matrix(matrix)
    if not own.has_canonical_format:
        own = own.copy()
        own.sum_duplicates()
    return Pattern(own.indices, own.indptr), own.data
