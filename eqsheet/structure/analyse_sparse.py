"""Structural analysis of a large system given by index arrays, mostly in compiled code."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import numpy.typing as npt

from eqsheet.structure.array_sequence import as_sequence
from eqsheet.structure.block_triangular import topological_order
from eqsheet.structure.dulmage_mendelsohn import conflicts, shortfalls
from eqsheet.structure.transversal_basis import leave_out_latest
from eqsheet.structure.verdict import Block, Part, Structure

Indices = npt.NDArray[np.int32] | npt.NDArray[np.int64]


def analyse_sparse(indptr: Indices, indices: Indices, columns: int) -> Structure:
    """The structural verdict on a system and its blocks in order of solution, equal to `analyse.analyse`'s.

    Only `row_match` and `column_match` inside a block may differ from what `analyse` finds.

    Parameters
    ----------
    indptr : array of int, shape (rows + 1,)
        Start of each row in `indices`, and the end of the last.
    indices : array of int, shape (entries,)
        Numbers of the columns (unknowns) of each row (equation), from 0, in any order; a number given twice
        in a row counts once. Neither array is changed.
    columns : int
        How many columns there are.

    Raises
    ------
    ValueError
        If a column number is negative or not below `columns`.

    Notes
    -----
    Worth its start-up time (scipy is imported here) from some ten thousand rows on. Where parts are over- or
    under-determined, these parts alone are treated as `analyse` does.
    """
    from scipy.sparse import csr_array
    from scipy.sparse.csgraph import maximum_bipartite_matching

    if len(indices) and (indices.min() < 0 or indices.max() >= columns):
        raise ValueError(f"a row has a column outside 0 .. {columns - 1}")
    # Copies: the entries of each row are sorted and rid of duplicates in place.
    incidence = csr_array(
        (np.ones(len(indices), dtype=np.float64), indices.copy(), indptr.copy()),
        shape=(len(indptr) - 1, columns),
    )
    incidence.sum_duplicates()
    matched_column = maximum_bipartite_matching(incidence, perm_type="column")
    matched_row = _inverse(matched_column, columns)
    over_rows: list[int] = []
    under_columns: list[int] = []
    row_lists: dict[int, Sequence[int]] = {}
    column_lists: dict[int, Sequence[int]] = {}
    if (matched_column < 0).any() or (matched_row < 0).any():
        row_match: list[int] = matched_column.tolist()
        column_match: list[int] = matched_row.tolist()
        if -1 in row_match:
            over_rows = _reached(incidence, matched_row, np.flatnonzero(matched_column < 0))
            row_lists = _lists(incidence, over_rows)
            over_columns = sorted([row_match[r] for r in over_rows if row_match[r] >= 0])
            leave_out_latest(over_rows, _exchanged(over_columns, row_lists), row_match, column_match)
        if -1 in column_match:
            transposed = incidence.T.tocsr()
            under_columns = _reached(transposed, matched_column, np.flatnonzero(matched_row < 0))
            column_lists = _lists(transposed, under_columns)
            under_rows = sorted([column_match[c] for c in under_columns if column_match[c] >= 0])
            leave_out_latest(under_columns, _exchanged(under_rows, column_lists), column_match, row_match)
        matched_column = np.array(row_match, dtype=np.intp)
        matched_row = np.array(column_match, dtype=np.intp)

    over = Part(*_with_partners(over_rows, matched_column))
    columns_under, rows_under = _with_partners(under_columns, matched_row)
    under = Part(rows_under, columns_under)
    well = Part(
        _all_but(len(matched_column), over.rows, under.rows), _all_but(columns, over.columns, under.columns)
    )
    row_matches, column_matches = as_sequence(matched_column), as_sequence(matched_row)
    return Structure(
        row_match=row_matches,
        column_match=column_matches,
        over=over,
        under=under,
        well=well,
        unmatched_rows=tuple([r for r in over.rows if row_matches[r] < 0]),
        unmatched_columns=tuple([c for c in under.columns if column_matches[c] < 0]),
        blocks=_ordered_blocks(
            incidence, matched_column, matched_row, np.array(under.rows, dtype=np.intp), set(over.columns)
        ),
        conflicts=conflicts(over, row_lists, row_matches),
        shortfalls=shortfalls(under, column_lists, column_matches),
    )


def _with_partners(numbers: Sequence[int], match: npt.NDArray[Any]) -> tuple[Sequence[int], Sequence[int]]:
    """Rows and the columns matched to them, or the reverse, ascending; see `dulmage_mendelsohn.coarse_parts`."""
    partners = match[np.array(numbers, dtype=np.intp)]
    return as_sequence(np.array(numbers, dtype=np.intp)), as_sequence(np.sort(partners[partners >= 0]))


def _all_but(count: int, *others: Sequence[int]) -> Sequence[int]:
    """The numbers below `count` that are in none of the others, ascending."""
    left = np.ones(count, dtype=bool)
    for numbers in others:
        left[np.array(numbers, dtype=np.intp)] = False
    return as_sequence(np.flatnonzero(left))


def _inverse(match: npt.NDArray[Any], size: int) -> npt.NDArray[Any]:
    """The matching seen from the other side, which has `size` numbers."""
    inverse = np.full(size, -1, dtype=match.dtype)
    matched = np.flatnonzero(match >= 0)
    inverse[match[matched]] = matched
    return inverse


def _reached(incidence: Any, column_match: npt.NDArray[Any], starts: npt.NDArray[Any]) -> list[int]:
    """Rows on alternating paths from the unmatched rows `starts`, ascending.

    As `dulmage_mendelsohn.reached`, on a csr_array of rows and columns.
    """
    from scipy.sparse import csr_array
    from scipy.sparse.csgraph import breadth_first_order

    rows = incidence.shape[0]
    partner = column_match[incidence.indices]
    present = np.concatenate([[0], np.cumsum(partner >= 0)])
    # One more node, with an edge to each start, so that a single search finds what any of them reaches.
    ends = np.concatenate([partner[partner >= 0], starts])
    graph = csr_array(
        (np.ones(len(ends)), ends, np.append(present[incidence.indptr], len(ends))),
        shape=(rows + 1, rows + 1),
    )
    order = breadth_first_order(graph, rows, directed=True, return_predecessors=False)
    found: list[int] = np.sort(order[order < rows]).tolist()
    return found


def _lists(incidence: Any, rows: Sequence[int]) -> dict[int, Sequence[int]]:
    """Columns of each of `rows` of a csr_array."""
    part = incidence[rows]
    starts, columns = part.indptr.tolist(), part.indices.tolist()
    return {row: columns[starts[i] : starts[i + 1]] for i, row in enumerate(rows)}


def _exchanged(columns: Sequence[int], rows: dict[int, Sequence[int]]) -> dict[int, list[int]]:
    """Rows of each of `columns`, from the columns of each row; other columns are left out."""
    exchanged: dict[int, list[int]] = {column: [] for column in columns}
    for row, its_columns in rows.items():
        for column in its_columns:
            if column in exchanged:
                exchanged[column].append(row)
    return exchanged


def _ordered_blocks(
    incidence: Any,
    row_match: npt.NDArray[Any],
    column_match: npt.NDArray[Any],
    under_rows: npt.NDArray[Any],
    over_columns: set[int],
) -> tuple[Block, ...]:
    """Blocks in order of solution; see `block_triangular.ordered_blocks`. `incidence` is a csr_array."""
    from scipy.sparse import csr_array
    from scipy.sparse.csgraph import connected_components

    columns = len(column_match)
    solving = row_match >= 0
    solving[under_rows] = False
    entry_row = np.repeat(np.arange(len(row_match)), np.diff(incidence.indptr))
    used = solving[entry_row]
    column, needed = row_match[entry_row[used]], incidence.indices[used]
    graph = csr_array((np.ones(len(column)), (column, needed)), shape=(columns, columns))
    count, label = connected_components(graph, directed=True, connection="strong")

    solved = np.sort(row_match[solving])
    # Components of the columns that are not solved for are single and drop out here.
    by_label = solved[np.argsort(label[solved], kind="stable")]
    labels, starts = np.unique(label[by_label], return_index=True)
    number = np.full(count, -1)
    number[labels] = np.arange(len(labels))

    block, needed_block = number[label[column]], number[label[needed]]
    between = block != needed_block
    edges = np.unique(block[between].astype(np.int64) * max(count, 1) + needed_block[between])
    edge_starts = np.searchsorted(edges // max(count, 1), np.arange(len(labels) + 1)).tolist()
    edge_ends = (edges % max(count, 1)).tolist()
    depends = [edge_ends[edge_starts[i] : edge_starts[i + 1]] for i in range(len(labels))]

    firsts = by_label[starts].tolist()
    order = topological_order(firsts, depends)
    place = [0] * len(order)
    for position, i in enumerate(order):
        place[i] = position
    bounds = [*starts.tolist(), len(by_label)]
    row_of_first = column_match[firsts].tolist()
    blocks = []
    for i in order:
        first = firsts[i]
        rows: Sequence[int] = (row_of_first[i],)
        its_columns: Sequence[int] = (first,)
        if bounds[i + 1] - bounds[i] > 1:
            members = by_label[bounds[i] : bounds[i + 1]]
            rows, its_columns = as_sequence(np.sort(column_match[members])), as_sequence(members)
        after = tuple(sorted([place[j] for j in depends[i]])) if depends[i] else ()
        blocks.append(Block(rows, its_columns, after, "over" if first in over_columns else "well"))
    return tuple(blocks)
