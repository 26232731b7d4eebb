"""Order of pivots: complete, sparse, and stable."""

from __future__ import annotations

import numpy as np

from eqsheet.solve.pivot_order import THRESHOLD, pivot_order


def test_arrow_is_eliminated_from_its_tips_without_fill() -> None:
    # All unknowns meet in the first: with that pivot first the rest would be full.
    n = 12
    matrix = np.eye(n)
    matrix[0, :] = matrix[:, 0] = 0.5
    found = pivot_order(matrix)
    assert found is not None
    order, operations = found
    assert sorted(i for i, _ in order) == sorted(j for _, j in order) == list(range(n))
    assert order[0] != (0, 0)
    assert operations <= 3 * n


def test_small_entries_are_no_pivots() -> None:
    matrix = np.array([[1e-9, 1.0], [1.0, 1.0]])
    found = pivot_order(matrix)
    assert found is not None
    first = found[0][0]
    assert abs(matrix[first]) >= THRESHOLD


def test_singular_matrix_has_no_order() -> None:
    assert pivot_order(np.array([[1.0, 2.0], [2.0, 4.0]])) is None
    assert pivot_order(np.zeros((2, 2))) is None
