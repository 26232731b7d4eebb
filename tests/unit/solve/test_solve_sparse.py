"""Sparse blocks: the same answers as dense ones, singular vectors, and facts of failure."""

from dataclasses import replace

import numpy as np
import pytest
import scipy.sparse as sp
from solve_problems import problem

from eqsheet.solve.explain import explain
from eqsheet.solve.factor import factorise, smallest_singular_vectors
from eqsheet.solve.ladder import solve_block
from eqsheet.solve.outcome import Status


def banded(n):
    rng = np.random.default_rng(3)
    return sp.diags(
        [rng.uniform(-1, 1, n - 1), rng.uniform(3, 4, n), rng.uniform(-1, 1, n - 1)], [-1, 0, 1]
    ).tocsc()


def test_solve_rows_and_condition_agree_with_dense():
    matrix = banded(40)
    weights = np.linspace(0.1, 10, 40)
    right = np.cos(np.arange(40.0))
    sparse, dense = factorise(matrix, weights), factorise(matrix.toarray(), weights)
    assert sparse.solve(right) == pytest.approx(dense.solve(right), rel=1e-12)
    assert sparse.inverse_row(7) == pytest.approx(dense.inverse_row(7), rel=1e-10, abs=1e-14)
    assert not sparse.singular


def test_null_vectors_of_a_sparse_singular_matrix():
    # A chain of differences closed to a ring: the constant vector is free.
    n = 50
    matrix = sp.diags([-np.ones(n), np.ones(n - 1)], [0, 1]).tolil()
    matrix[n - 1, 0] = 1.0
    smallest, left, right = smallest_singular_vectors(matrix.tocsc() / 2.0)
    assert smallest < 1e-9
    assert np.abs(right) == pytest.approx(np.full(n, n**-0.5), rel=1e-6)
    assert np.abs(left) == pytest.approx(np.full(n, n**-0.5), rel=1e-6)


def heated_rod(n, source):
    """Conduction with a reaction: T'' + source * exp(T) = 0 on a grid; no solution above a critical
    source."""
    h2 = 1.0 / (n + 1) ** 2

    def residual(x):
        padded = np.concatenate(([0.0], x, [0.0]))
        return padded[:-2] - 2 * padded[1:-1] + padded[2:] + h2 * source * np.exp(x)

    def jacobian(x):
        return sp.diags([np.ones(n - 1), -2 + h2 * source * np.exp(x), np.ones(n - 1)], [-1, 0, 1]).tocsc()

    dense = problem(residual, lambda x: np.eye(n), np.full(n, 0.1), magnitude=np.ones(n))
    return replace(dense, linearise=lambda x: (residual(x), jacobian(x)))


def test_a_large_block_is_solved():
    # Bratu's problem in one dimension: 3.5138307 is the critical source, and the peak at a source of 1 is
    # 0.14053921 (from memory, both to be found in every text on it).
    outcome = solve_block(heated_rod(2001, 1.0))
    assert outcome.status is Status.CONVERGED
    assert outcome.x.max() == pytest.approx(0.14053921, abs=1e-6)


def test_a_large_block_without_a_solution_ends_with_facts():
    p = heated_rod(1001, 4.0)
    outcome = solve_block(p)
    assert not outcome.solved
    facts = explain(p, outcome)
    assert facts.not_finite == -1
    assert facts.worst
