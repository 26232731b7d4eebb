"""Elimination in a band: found in any order of rows and columns, and the same answers as a dense solve."""

import numpy as np
import pytest
import scipy.sparse as sp

from eqsheet.solve.band import NARROW, Band, factorise_band, narrow_band
from eqsheet.solve.factor import factorise
from eqsheet.solve.sparse_factor import SparseInverse
from eqsheet.solve.sparse_pattern import Pattern, pattern_of


def stages(n, seed=1):
    """Coupled stages with two unknowns each, the unknowns of one kind numbered before those of the other."""
    rng = np.random.default_rng(seed)
    neighbours = sp.diags([np.ones(n - 1), np.ones(n), np.ones(n - 1)], [-1, 0, 1])
    pattern = sp.kron(np.ones((2, 2)), neighbours).tocsc()
    pattern.data = rng.uniform(0.5, 1.5, len(pattern.data))
    return sp.csc_matrix(pattern + 4.0 * sp.identity(2 * n))


def band_of(matrix):
    pattern, data = pattern_of(matrix)
    return pattern.band, data


def test_numbering_by_kind_hides_no_band():
    band, data = band_of(stages(300))
    assert isinstance(band, Band)
    assert band.width <= 12
    right = np.sin(np.arange(600.0))
    factor = factorise_band(band, data)
    dense = stages(300).toarray()
    assert factor.solve(right) == pytest.approx(np.linalg.solve(dense, right), rel=1e-11)
    assert factor.solve_transposed(right) == pytest.approx(np.linalg.solve(dense.T, right), rel=1e-11)


def test_rows_in_another_order_than_their_unknowns_hide_no_band():
    rng = np.random.default_rng(5)
    chain = stages(200)[rng.permutation(400)][:, rng.permutation(400)].tocsc()
    band, data = band_of(chain)
    assert band.width <= 16
    right = np.cos(np.arange(400.0))
    assert chain @ factorise_band(band, data).solve(right) == pytest.approx(right, abs=1e-12)


def test_rows_are_exchanged_where_the_diagonal_is_zero():
    n = 101
    matrix = sp.diags([np.ones(n - 1), np.zeros(n), np.ones(n - 1)], [-1, 0, 1]).tolil()
    matrix[0, 0] = 1.0
    matrix = matrix.tocsc()
    band, data = band_of(matrix)
    right = np.arange(1.0, n + 1.0)
    assert matrix @ factorise_band(band, data).solve(right) == pytest.approx(right, rel=1e-12)


def test_a_pivot_of_zero_gives_no_factor():
    n = 80
    matrix = sp.diags([np.ones(n - 1), np.ones(n)], [-1, 0]).tolil()
    matrix[n - 1] = 0.0
    matrix[n - 1, 0] = 0.0
    matrix = sp.csc_matrix(matrix)
    band, data = band_of(matrix)
    assert factorise_band(band, data) is None
    assert factorise(matrix, np.ones(n)).singular


def test_a_mesh_has_no_narrow_band():
    n = NARROW + 10
    line = sp.diags([np.ones(n - 1), np.ones(n - 1)], [-1, 1])
    mesh = sp.csc_matrix(
        sp.kron(line, sp.identity(n)) + sp.kron(sp.identity(n), line) + 5 * sp.identity(n * n)
    )
    assert pattern_of(mesh)[0].band is None
    right = np.ones(n * n)
    assert mesh @ factorise(mesh, np.ones(n * n)).solve(right) == pytest.approx(right, rel=1e-12)


def test_a_factor_of_a_band_tells_condition_and_rows_as_a_dense_one():
    matrix = stages(40)
    weights = np.linspace(0.1, 10.0, 80)
    banded, dense = factorise(matrix, weights), factorise(matrix.toarray(), weights)
    assert isinstance(banded.inverse, SparseInverse)
    assert banded.inverse_row(33) == pytest.approx(dense.inverse_row(33), rel=1e-10, abs=1e-14)
    assert 1.0 <= banded.condition <= 10.0 * dense.condition


def test_matrices_of_one_pattern_share_what_is_found_of_it():
    pattern = Pattern(np.array([0, 1, 0, 1], dtype=np.int32), np.array([0, 2, 4], dtype=np.int32))
    first, second = pattern.matrix(np.arange(4.0)), pattern.matrix(np.arange(4.0) + 1.0)
    assert pattern_of(first)[0] is pattern_of(second)[0] is pattern
    assert second.toarray().tolist() == [[1.0, 3.0], [2.0, 4.0]]


def test_entries_given_twice_are_added_up():
    twice = sp.csc_matrix((np.array([1.0, 2.0, 4.0]), np.array([0, 0, 1]), np.array([0, 2, 3])), shape=(2, 2))
    pattern, data = pattern_of(twice)
    assert pattern.matrix(data).toarray().tolist() == [[3.0, 0.0], [0.0, 4.0]]
    assert len(twice.data) == 3


def test_the_narrower_order_is_taken():
    # As given the band has 2*20 diagonals beside the main one; a chain in steps of 20 is narrower in its own order.
    n = 200
    matrix = sp.diags([np.ones(n - 20), 3.0 * np.ones(n), np.ones(n - 20)], [-20, 0, 20]).tocoo()
    band = narrow_band(matrix.row, matrix.col, n)
    assert band.width <= 4
