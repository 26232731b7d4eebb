"""Elimination in a band: matrices whose entries lie near the diagonal in a suitable order, as of rods, columns, chains.

References
----------
E. Cuthill, J. McKee: Reducing the bandwidth of sparse symmetric matrices. Proceedings of the 24th National
Conference of the ACM (1969), 157-172.
J. A. George: Computer implementation of the finite element method. Stanford University, STAN-CS-71-208 (1971)
(the same order reversed).

Rows and columns are ordered together, as the two sides of a bipartite graph, so that it does not matter which
equation stands for which unknown.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

Vector = NDArray[np.float64]
Numbers = NDArray[Any]
# Diagonals beside the main one up to which a band is eliminated faster than a general sparse matrix, even where
# most of it is empty.
NARROW = 64
# With so few the order as given is good enough.
NARROW_AS_GIVEN = 6


@dataclass(frozen=True)
class Band:
    """How a matrix is laid out as a band.

    Attributes
    ----------
    n : int
        Order of the matrix.
    rows, columns : ndarray (n,) or None
        Row and column of the matrix at each position, None for the order as given.
    below, above : int
        Diagonals below and above the main one.
    places : ndarray (entries,)
        Place of each entry of the matrix in the band, an array ``(2*below + above + 1, n)`` stored column after
        column, whose first `below` rows are room for what row exchanges fill in.
    """

    n: int
    rows: Numbers | None
    columns: Numbers | None
    below: int
    above: int
    places: Numbers

    @property
    def width(self) -> int:
        """Diagonals beside the main one."""
        return self.below + self.above


class BandFactor:
    """A factorised band matrix A.

    Attributes
    ----------
    pivots : ndarray (n,)
    """

    def __init__(self, band: Band, factor: Vector, exchanges: Numbers) -> None:
        self._band = band
        self._factor = factor
        self._exchanges = exchanges
        self.pivots: Vector = factor[band.width]

    def solve(self, right: Vector) -> Vector:
        """x (n,) with ``A x = right``."""
        return self._solve(right, self._band.rows, self._band.columns, 0)

    def solve_transposed(self, right: Vector) -> Vector:
        """x (n,) with ``A^T x = right``."""
        return self._solve(right, self._band.columns, self._band.rows, 1)

    def _solve(self, right: Vector, taken: Numbers | None, given: Numbers | None, transposed: int) -> Vector:
        from scipy.linalg.lapack import dgbtrs

        band = self._band
        ordered = right if taken is None else right[taken]
        found, _ = dgbtrs(self._factor, band.below, band.above, ordered, self._exchanges, trans=transposed)
        if given is None:
            return np.asarray(found)
        x = np.empty(band.n)
        x[given] = found
        return x


def narrow_band(rows: Numbers, columns: Numbers, n: int) -> Band | None:
    """The band that a matrix fits in, in the order as given or another; None where it is not narrow.

    Parameters
    ----------
    rows, columns : ndarray (entries,)
        Places of the entries.
    n : int
        Order of the matrix, at least 1.
    """
    as_given = _band(rows, columns, n, None, None)
    if as_given is not None and as_given.width <= NARROW_AS_GIVEN:
        return as_given
    reordered = _band(rows, columns, n, *_near_each_other(rows, columns, n))
    bands = [band for band in (as_given, reordered) if band is not None]
    return min(bands, key=lambda band: band.width, default=None)


def factorise_band(band: Band, data: Vector) -> BandFactor | None:
    """The factorised matrix, None where a pivot is exactly zero.

    Parameters
    ----------
    data : ndarray (entries,)
        The entries in the order of ``band.places``.
    """
    from scipy.linalg.lapack import dgbtrf

    stored = np.zeros((2 * band.below + band.above + 1, band.n), order="F")
    stored.reshape(-1, order="F")[band.places] = data
    factor, exchanges, trouble = dgbtrf(stored, band.below, band.above, overwrite_ab=1)
    return BandFactor(band, factor, exchanges) if trouble == 0 else None


def _band(
    rows: Numbers, columns: Numbers, n: int, row_order: Numbers | None, column_order: Numbers | None
) -> Band | None:
    """The band in an order of rows and columns, None where it is not narrow."""
    if row_order is not None and column_order is not None:
        rows, columns = _positions(row_order)[rows], _positions(column_order)[columns]
    beside = rows - columns
    below, above = max(int(beside.max(initial=0)), 0), max(-int(beside.min(initial=0)), 0)
    if below + above > NARROW:
        return None
    height = 2 * below + above + 1
    places = columns.astype(np.int64) * height + (below + above + beside)
    return Band(n, row_order, column_order, below, above, places)


def _near_each_other(rows: Numbers, columns: Numbers, n: int) -> tuple[Numbers, Numbers]:
    """An order of the rows and one of the columns (n,) that bring the entries near the diagonal."""
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import reverse_cuthill_mckee

    graph = coo_array(
        (
            np.ones(2 * len(rows), dtype=np.int8),
            (np.concatenate([rows, columns + n]), np.concatenate([columns + n, rows])),
        ),
        shape=(2 * n, 2 * n),
    ).tocsr()
    order = reverse_cuthill_mckee(graph, symmetric_mode=True)
    return order[order < n], order[order >= n] - n


def _positions(order: Numbers) -> Numbers:
    """Position of each number in an order of all of them."""
    positions = np.empty(len(order), dtype=np.int64)
    positions[order] = np.arange(len(order))
    return positions
