"""Which row is left out, and what it competes with."""

from __future__ import annotations

from eqsheet.structure.transversal_basis import circuit, leave_out_latest


def test_latest_row_of_a_contested_column_is_left_out() -> None:
    row_match, column_match = [-1, -1, 0], [2]
    leave_out_latest([0, 1, 2], [[0, 1, 2]], row_match, column_match)
    assert row_match == [0, -1, -1]
    assert column_match == [0]


def test_exchange_runs_along_a_chain() -> None:
    # Row 0 is unmatched; rows 1 and 2 each shift by one column so that row 2 falls out.
    rows = [[0], [0, 1], [1]]
    row_match, column_match = [-1, 0, 1], [1, 2]
    leave_out_latest([0, 1, 2], [[0, 1], [1, 2]], row_match, column_match)
    assert row_match == [0, 1, -1]
    assert all(row_match[row] in rows[row] for row in (0, 1))
    assert column_match == [0, 1]


def test_late_row_that_nothing_can_replace_stays() -> None:
    row_match, column_match = [0, -1, 1], [0, 2]
    leave_out_latest([0, 1, 2], [[0, 1], [2]], row_match, column_match)
    assert row_match == [0, -1, 1]


def test_circuit_leaves_out_rows_that_compete_elsewhere() -> None:
    # Rows 0 and 1 fight over column 0, rows 2 and 3 over column 1, which row 3 shares with column 0.
    rows = [[0], [0], [1], [0, 1]]
    assert circuit(1, rows, [0, 2]) == (0, 1)
    assert circuit(3, rows, [0, 2]) == (0, 2, 3)
