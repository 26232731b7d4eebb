"""A cheap first matching: forced pairs first, by Karp and Sipser's rule."""

from __future__ import annotations

from collections.abc import Sequence


def first_matching(
    rows: Sequence[Sequence[int]], column_rows: Sequence[Sequence[int]]
) -> tuple[list[int], list[int]]:
    """Matching found by pairing rows and columns of degree one first, then the earliest row left.

    A row or column with one neighbour left can be paired with it without loss, so a system that can be
    solved one equation after another is matched completely here, in linear time.

    Parameters
    ----------
    rows : sequence of sequences of int
        Columns of each row, without duplicates.
    column_rows : sequence of sequences of int
        Rows of each column, the same incidence.

    Returns
    -------
    row_match, column_match : list of int
        Partner of each row and of each column, -1 for none; valid, not always maximum.

    References
    ----------
    R. M. Karp, M. Sipser: Maximum matchings in sparse random graphs. 22nd Annual Symposium on Foundations
    of Computer Science (1981), 364-375.

    >>> first_matching([[0, 1], [0]], [[0, 1], [0]])
    ([1, 0], [1, 0])
    """
    row_match = [-1] * len(rows)
    column_match = [-1] * len(column_rows)
    row_degree = [len(row) for row in rows]
    column_degree = [len(column) for column in column_rows]
    # Things of degree one, a column c written as ~c; read from the front while it grows.
    forced = [r for r, degree in enumerate(row_degree) if degree == 1]
    forced += [~c for c, degree in enumerate(column_degree) if degree == 1]
    head = 0
    earliest = 0
    while True:
        if head < len(forced):
            item = forced[head]
            head += 1
            if item >= 0:
                if row_match[item] >= 0 or row_degree[item] != 1:
                    continue
                row = item
                for column in rows[row]:
                    if column_match[column] < 0:
                        break
            else:
                column = ~item
                if column_match[column] >= 0 or column_degree[column] != 1:
                    continue
                for row in column_rows[column]:
                    if row_match[row] < 0:
                        break
        else:
            while earliest < len(rows) and (row_match[earliest] >= 0 or not row_degree[earliest]):
                earliest += 1
            if earliest == len(rows):
                return row_match, column_match
            row = earliest
            column = min((c for c in rows[row] if column_match[c] < 0), key=lambda c: (column_degree[c], c))
        row_match[row] = column
        column_match[column] = row
        for c in rows[row]:
            column_degree[c] -= 1
            if column_degree[c] == 1 and column_match[c] < 0:
                forced.append(~c)
        for r in column_rows[column]:
            row_degree[r] -= 1
            if row_degree[r] == 1 and row_match[r] < 0:
                forced.append(r)
