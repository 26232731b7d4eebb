"""Augmenting a given matching to the largest."""

from __future__ import annotations

from eqsheet.structure.hopcroft_karp import maximum_matching


def test_start_that_blocks_is_changed_along_an_alternating_path() -> None:
    assert maximum_matching([[0, 1], [0]], [0, -1], [0, -1]) == ([1, 0], [1, 0])


def test_path_through_every_row_is_found_without_recursion() -> None:
    # Row i holds columns i - 1 and i and sits on i - 1; row 0 can only be placed by moving all the others.
    size = 20_000
    rows = [[0], *([i - 1, i] for i in range(1, size))]
    row_match, column_match = maximum_matching(rows, [-1, *range(size - 1)], [*range(1, size), -1])
    assert row_match == column_match == list(range(size))


def test_start_is_left_as_it_was() -> None:
    row_match, column_match = [0, -1], [0, -1]
    maximum_matching([[0, 1], [0]], row_match, column_match)
    assert (row_match, column_match) == ([0, -1], [0, -1])


def test_matched_rows_and_columns_stay_matched() -> None:
    row_match, column_match = maximum_matching([[0], [0, 1], [1]], [-1, 0, 1], [1, 2])
    assert row_match == [-1, 0, 1]
    assert column_match == [1, 2]
