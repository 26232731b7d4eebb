"""An order of pivots for a small sparse matrix that keeps few numbers and loses few digits.

References
----------
H. M. Markowitz, The elimination form of the inverse and its application to linear programming, Management Science
3, 1957; threshold pivoting: I. S. Duff, A. M. Erisman and J. K. Reid, Direct Methods for Sparse Matrices, 2nd
edition, 2017, section 5.2 and chapter 10.
"""

from __future__ import annotations

from eqsheet.solve.problem import Matrix

# A pivot is at least this part of the largest entry of its row. Smaller means fewer numbers, larger more digits.
THRESHOLD = 0.1


def pivot_order(matrix: Matrix) -> tuple[tuple[tuple[int, int], ...], int] | None:
    """Row and column of each pivot in turn, and the multiplications that the elimination takes.

    Parameters
    ----------
    matrix : ndarray (n, n)
        Rows and columns scaled, so that sizes of entries compare.

    Returns
    -------
    tuple or None
        None where no order has pivots that are not zero.

    Notes
    -----
    The pivot of the least Markowitz count (entries left in its row less one, times those in its column less one) is
    taken next, among those the larger; ties go to the first row and column.
    """
    rows = [{j: v for j, v in enumerate(row) if v != 0.0} for row in matrix.tolist()]
    columns: list[set[int]] = [set() for _ in rows]
    for i, row in enumerate(rows):
        for j in row:
            columns[j].add(i)
    left = set(range(len(rows)))
    order: list[tuple[int, int]] = []
    operations = 0
    while left:
        chosen = _cheapest(rows, columns, left)
        if chosen is None:
            return None
        count, i, j = chosen
        operations += count + len(rows[i])
        order.append((i, j))
        left.discard(i)
        pivot = rows[i].pop(j)
        for k in rows[i]:
            columns[k].discard(i)
        columns[j].discard(i)
        for below in columns[j]:
            multiplier = rows[below].pop(j) / pivot
            for k, entry in rows[i].items():
                # An entry that cancels here need not cancel elsewhere: it stays one.
                rows[below][k] = rows[below].get(k, 0.0) - multiplier * entry
                columns[k].add(below)
    return tuple(order), operations


def _cheapest(
    rows: list[dict[int, float]], columns: list[set[int]], left: set[int]
) -> tuple[int, int, int] | None:
    """Markowitz count, row and column of the next pivot."""
    best: tuple[int, float, int, int] | None = None
    for i in sorted(left):
        row = rows[i]
        largest = max(map(abs, row.values()), default=0.0)
        for j, value in row.items():
            size = abs(value)
            if size > 0.0 and size >= THRESHOLD * largest:
                candidate = (len(row) - 1) * (len(columns[j]) - 1), -size / largest, i, j
                if best is None or candidate < best:
                    best = candidate
    return None if best is None else (best[0], best[2], best[3])
