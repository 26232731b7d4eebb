"""The verdict from index arrays."""

from __future__ import annotations

import numpy as np
import pytest

from eqsheet.structure.analyse_sparse import analyse_sparse
from eqsheet.structure.verdict import Block, Conflict, Shortfall


def test_unsorted_and_repeated_entries_count_once() -> None:
    indptr, indices = np.array([0, 3, 4, 6]), np.array([2, 0, 2, 0, 1, 0])
    structure = analyse_sparse(indptr, indices, 3)
    assert structure.blocks == (
        Block((1,), (0,), (), "well"),
        Block((2,), (1,), (0,), "well"),
        Block((0,), (2,), (0,), "well"),
    )
    assert indices.tolist() == [2, 0, 2, 0, 1, 0]


def test_troubles_hold_plain_integers() -> None:
    structure = analyse_sparse(np.array([0, 1, 2, 4]), np.array([0, 0, 1, 2]), 3)
    assert structure.conflicts == (Conflict((0, 1), (0,), 1, (1,)),)
    assert structure.shortfalls == (Shortfall((2,), (1, 2), 1, (2,)),)
    numbers = [*structure.row_match, *structure.column_match, *structure.over.rows, *structure.blocks[0].rows]
    assert {type(number) for number in numbers} == {int}


@pytest.mark.parametrize("column", [-1, 2])
def test_column_out_of_range_is_refused(column: int) -> None:
    with pytest.raises(ValueError, match="outside"):
        analyse_sparse(np.array([0, 1]), np.array([column]), 2)
