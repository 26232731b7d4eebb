"""Structural analysis of a system given by adjacency lists; plain Python, nothing to import first."""

from __future__ import annotations

from collections.abc import Sequence

from eqsheet.structure.block_triangular import ordered_blocks
from eqsheet.structure.dulmage_mendelsohn import coarse_parts, conflicts, reached, shortfalls
from eqsheet.structure.hopcroft_karp import maximum_matching
from eqsheet.structure.karp_sipser import first_matching
from eqsheet.structure.transversal_basis import leave_out_latest
from eqsheet.structure.verdict import Structure


def analyse(rows: Sequence[Sequence[int]], columns: int) -> Structure:
    """The structural verdict on a system and its blocks in order of solution.

    Parameters
    ----------
    rows : sequence of sequences of int
        Numbers of the columns (unknowns) in each row (equation), from 0, in any order; a number given twice
        counts once.
    columns : int
        How many columns there are.

    Raises
    ------
    ValueError
        If a column number is negative or not below `columns`.

    Notes
    -----
    The result depends on the numbering alone. Parts, blocks, troubles and unmatched rows and columns do not
    depend on the matching found either; only `row_match` and `column_match` inside a block do.
    Time is linear in the entries for systems solved one equation after another, and
    O(entries * sqrt(rows)) for the matching of any other.

    >>> structure = analyse([[0, 1], [1], [1, 2, 3], [2, 3], [1]], 4)
    >>> [(block.rows, block.columns, block.depends) for block in structure.blocks]
    [((1,), (1,), ()), ((0,), (0,), (0,)), ((2, 3), (2, 3), (0,))]
    >>> structure.conflicts
    (Conflict(rows=(1, 4), columns=(1,), excess=1, left_out=(4,)),)
    """
    distinct = [sorted(set(row)) if len(row) > 1 else list(row) for row in rows]
    column_rows: list[list[int]] = [[] for _ in range(columns)]
    for number, row in enumerate(distinct):
        if row and (row[0] < 0 or row[-1] >= columns):
            raise ValueError(f"row {number} has a column outside 0 .. {columns - 1}")
        for column in row:
            column_rows[column].append(number)

    row_match, column_match = maximum_matching(distinct, *first_matching(distinct, column_rows))
    over_rows = reached([r for r, c in enumerate(row_match) if c < 0], distinct, column_match)
    under_columns = reached([c for c, r in enumerate(column_match) if r < 0], column_rows, row_match)
    leave_out_latest(sorted(over_rows), column_rows, row_match, column_match)
    leave_out_latest(sorted(under_columns), distinct, column_match, row_match)

    over, under, well = coarse_parts(over_rows, under_columns, row_match, column_match)
    over_columns = set(over.columns)
    return Structure(
        row_match=tuple(row_match),
        column_match=tuple(column_match),
        over=over,
        under=under,
        well=well,
        unmatched_rows=tuple([r for r in over.rows if row_match[r] < 0]),
        unmatched_columns=tuple([c for c in under.columns if column_match[c] < 0]),
        blocks=ordered_blocks(sorted([*over.columns, *well.columns]), distinct, column_match, over_columns),
        conflicts=conflicts(over, distinct, row_match),
        shortfalls=shortfalls(under, column_rows, column_match),
    )
