"""Over-, under- and well-determined parts: the coarse decomposition of Dulmage and Mendelsohn.

References
----------
A. L. Dulmage, N. S. Mendelsohn: Coverings of bipartite graphs. Canadian Journal of Mathematics 10 (1958),
517-534.
A. Pothen, C.-J. Fan: Computing the block triangular form of a sparse matrix. ACM Transactions on Mathematical
Software 16(4) (1990), 303-324.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from eqsheet.structure.verdict import Adjacency, Conflict, Part, Shortfall


def reached(starts: Iterable[int], rows: Adjacency, column_match: Sequence[int]) -> set[int]:
    """Rows on alternating paths from the unmatched rows `starts`, themselves included.

    With the two sides exchanged: columns on alternating paths from unmatched columns.

    Parameters
    ----------
    starts : iterable of int
        Unmatched rows.
    rows : sequence or mapping
        Columns of each row.
    column_match : sequence of int
        Row matched to each column, of a maximum matching (so that no path ends in an unmatched column).
    """
    found = set(starts)
    pending = list(found)
    while pending:
        for column in rows[pending.pop()]:
            partner = column_match[column]
            if partner not in found:
                found.add(partner)
                pending.append(partner)
    return found


def coarse_parts(
    over_rows: Iterable[int],
    under_columns: Iterable[int],
    row_match: Sequence[int],
    column_match: Sequence[int],
) -> tuple[Part, Part, Part]:
    """Over-, under- and well-determined part, from the rows and columns that alternating paths reach.

    Parameters
    ----------
    over_rows : iterable of int
        Rows reached from the unmatched rows; their partners make up the part's columns.
    under_columns : iterable of int
        Columns reached from the unmatched columns; their partners make up the part's rows.
    row_match, column_match : sequence of int
        The maximum matching used.

    Notes
    -----
    The parts do not depend on which maximum matching is used. Rows of the over-determined part have columns
    of that part only; rows of the well-determined part have columns of these two only.
    """
    over = _with_partners(over_rows, row_match)
    columns, rows = _with_partners(under_columns, column_match)
    taken_rows = {*over.rows, *rows}
    taken_columns = {*over.columns, *columns}
    well = Part(
        tuple([r for r in range(len(row_match)) if r not in taken_rows]),
        tuple([c for c in range(len(column_match)) if c not in taken_columns]),
    )
    return over, Part(rows, columns), well


def _with_partners(numbers: Iterable[int], match: Sequence[int]) -> Part:
    own = sorted(numbers)
    return Part(tuple(own), tuple(sorted([match[i] for i in own if match[i] >= 0])))


def conflicts(over: Part, rows: Adjacency, row_match: Sequence[int]) -> tuple[Conflict, ...]:
    """The connected pieces of the over-determined part, ordered by first row.

    Parameters
    ----------
    over : Part
    rows : sequence or mapping
        Columns of each row of the part.
    row_match : sequence of int
        Column matched to each row; an unmatched row is left out.
    """
    found = []
    for piece_rows, piece_columns in connected_pieces(over.rows, over.columns, rows):
        left_out = tuple([r for r in piece_rows if row_match[r] < 0])
        found.append(Conflict(piece_rows, piece_columns, len(left_out), left_out))
    return tuple(found)


def shortfalls(under: Part, column_rows: Adjacency, column_match: Sequence[int]) -> tuple[Shortfall, ...]:
    """The connected pieces of the under-determined part, ordered by first column.

    Parameters
    ----------
    under : Part
    column_rows : sequence or mapping
        Rows of each column of the part.
    column_match : sequence of int
        Row matched to each column; an unmatched column is free.
    """
    found = []
    for piece_columns, piece_rows in connected_pieces(under.columns, under.rows, column_rows):
        free = tuple([c for c in piece_columns if column_match[c] < 0])
        found.append(Shortfall(piece_rows, piece_columns, len(free), free))
    return tuple(found)


def connected_pieces(
    own: Sequence[int], others: Sequence[int], neighbours: Adjacency
) -> list[tuple[tuple[int, ...], tuple[int, ...]]]:
    """Connected components of the bipartite graph on `own` and `others`, ordered by first number of `own`.

    Parameters
    ----------
    own, others : sequence of int
        The two sides, ascending. Every one of `others` has a neighbour in `own`.
    neighbours : sequence or mapping
        Numbers of the other side next to each of `own`; those not in `others` are disregarded.

    >>> connected_pieces([0, 1, 2], [5], {0: [5], 1: [], 2: [5]})
    [((0, 2), (5,)), ((1,), ())]
    """
    back: dict[int, list[int]] = {other: [] for other in others}
    for i in own:
        for other in neighbours[i]:
            if other in back:
                back[other].append(i)
    pieces = []
    seen: set[int] = set()
    for first in own:
        if first in seen:
            continue
        seen.add(first)
        pending = [first]
        members: list[int] = []
        touched: set[int] = set()
        while pending:
            i = pending.pop()
            members.append(i)
            for other in neighbours[i]:
                if other in back and other not in touched:
                    touched.add(other)
                    for j in back[other]:
                        if j not in seen:
                            seen.add(j)
                            pending.append(j)
        pieces.append((tuple(sorted(members)), tuple(sorted(touched))))
    return pieces
