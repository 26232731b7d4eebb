"""Which rows to leave out: the greedy basis of the transversal matroid.

The sets of rows that some matching covers are the independent sets of a matroid, so there is one choice of
covered rows that prefers earlier rows throughout, whatever matching one starts from. The functions serve
columns equally, with the two sides exchanged.

References
----------
J. Edmonds, D. R. Fulkerson: Transversals and matroid partition. Journal of Research of the National Bureau of
Standards 69B (1965), 147-153 (the matroid).
J. Edmonds: Matroids and the greedy algorithm. Mathematical Programming 1 (1971), 127-136 (the greedy basis).
"""

from __future__ import annotations

from collections.abc import Sequence

from eqsheet.structure.verdict import Adjacency


def leave_out_latest(
    rows: Sequence[int], column_rows: Adjacency, row_match: list[int], column_match: list[int]
) -> None:
    """Change a maximum matching so that the unmatched among `rows` are the latest possible.

    Parameters
    ----------
    rows : sequence of int
        Rows of the over-determined part, ascending.
    column_rows : sequence or mapping
        Rows of each column (at least of the columns of the over-determined part).
    row_match, column_match : list of int
        A maximum matching; changed in place, size and matched columns stay.

    Notes
    -----
    From the latest row on, each matched row gives up its column if an unmatched, earlier row can do
    instead, by an alternating path. Rows seen in a search that failed can never be on a later path, so all
    failures together take linear time; each success leaves one row out for good.
    """
    waiting = {row for row in rows if row_match[row] < 0}
    exhausted: set[int] = set()
    for row in reversed(rows):
        if not waiting:
            return
        if row in waiting:
            waiting.remove(row)
            continue
        if row in exhausted:
            continue
        towards = {row: row}
        substitute = _find_substitute(row, column_rows, row_match, waiting, exhausted, towards)
        if substitute < 0:
            exhausted.update(towards)
            continue
        waiting.remove(substitute)
        while substitute != row:
            following = towards[substitute]
            column = row_match[following]
            row_match[substitute] = column
            column_match[column] = substitute
            substitute = following
        row_match[row] = -1


def _find_substitute(
    row: int,
    column_rows: Adjacency,
    row_match: Sequence[int],
    waiting: set[int],
    exhausted: set[int],
    towards: dict[int, int],
) -> int:
    """A waiting row with an alternating path to `row`, or -1; `towards` gets each row's next on the path."""
    pending = [row]
    # Breadth first, which finds a near substitute soon where there are many; the list grows while it is read.
    for last in pending:
        for earlier in column_rows[row_match[last]]:
            if earlier in towards or earlier in exhausted:
                continue
            towards[earlier] = last
            if earlier in waiting:
                return earlier
            if row_match[earlier] >= 0:
                pending.append(earlier)
    return -1


def circuit(row: int, rows: Adjacency, column_match: Sequence[int]) -> tuple[int, ...]:
    """Rows of which any one can be left out in place of the unmatched `row`, itself included, ascending.

    They are the smallest over-determined set of `row` and matched rows: one row more than columns, and with
    any one row left out a complete matching.

    Parameters
    ----------
    row : int
        An unmatched row.
    rows : sequence or mapping
        Columns of each row.
    column_match : sequence of int
        Row matched to each column, of a maximum matching.

    >>> circuit(2, [[0], [0, 1], [1]], [0, 1])
    (0, 1, 2)
    """
    found = {row}
    pending = [row]
    while pending:
        for column in rows[pending.pop()]:
            partner = column_match[column]
            if partner not in found:
                found.add(partner)
                pending.append(partner)
    return tuple(sorted(found))
