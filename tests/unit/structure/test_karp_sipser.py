"""The first matching by forced pairs."""

from __future__ import annotations

from eqsheet.structure.karp_sipser import first_matching


def test_chain_of_forced_rows_is_matched_completely() -> None:
    rows = [[0, 1, 2, 3], [0, 1], [0], [1, 2]]
    row_match, _ = first_matching(rows, [[0, 1, 2], [0, 1, 3], [0, 3], [0]])
    assert row_match == [3, 1, 0, 2]


def test_column_with_one_row_is_forced_too() -> None:
    # Column 2 occurs in row 0 alone, so row 0 must not take column 0 or 1.
    row_match, _ = first_matching([[0, 1, 2], [0, 1], [0, 1]], [[0, 1, 2], [0, 1, 2], [0]])
    assert row_match[0] == 2


def test_without_forced_pairs_the_earliest_row_takes_the_rarest_column() -> None:
    rows = [[0, 1], [0, 2], [0, 1, 2]]
    row_match, column_match = first_matching(rows, [[0, 1, 2], [0, 2], [1, 2]])
    assert row_match == [1, 0, 2]
    assert column_match == [1, 0, 2]


def test_empty_rows_and_columns_stay_alone() -> None:
    assert first_matching([[], [1]], [[], [1]]) == ([-1, 1], [-1, 1])
