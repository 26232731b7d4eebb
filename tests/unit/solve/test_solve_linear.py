"""The linear step: one step to rounding, and what it says of singular and bounded cases."""

import numpy as np
import pytest
from solve_problems import problem

from eqsheet.solve.linear import linear_step
from eqsheet.solve.outcome import Status
from eqsheet.solve.trail import Budget, Trail


def solve(matrix, right, lower=None, upper=None):
    matrix, right = np.array(matrix, dtype=float), np.array(right, dtype=float)
    p = problem(lambda x: matrix @ x - right, lambda x: matrix, np.ones(len(right)), lower, upper)
    return linear_step(p, p.start, Trail("linear", p.start, Budget()))


def test_badly_scaled_rows_and_columns_do_no_harm():
    # x = (1e-9, 2, 3e9) by construction.
    matrix = np.array([[1e12, 2e3, 1e-9], [3e-6, 1e-15, 2e-24], [1e10, 1.0, 3e-9]])
    outcome = solve(matrix, matrix @ [1e-9, 2.0, 3e9])
    assert outcome.status is Status.CONVERGED
    assert outcome.x == pytest.approx([1e-9, 2.0, 3e9], rel=1e-12)


def test_contradicting_equations():
    outcome = solve([[1, 1], [1, 1]], [1, 2])
    assert outcome.status is Status.SINGULAR
    assert np.abs(outcome.null_equations) == pytest.approx([0.5**0.5, 0.5**0.5])


def test_repeating_equations():
    outcome = solve([[1, 1], [2, 2]], [1, 2])
    assert outcome.status is Status.CONTINUUM
    assert outcome.null_unknowns[0] == pytest.approx(-outcome.null_unknowns[1])


def test_a_solution_outside_the_bounds_is_given_and_named():
    outcome = solve([[1, 1], [1, -1]], [1, 5], [0, 0], [10, 10])
    assert outcome.status is Status.HELD
    assert outcome.x == pytest.approx([3, -2])
    assert outcome.on_bound == (1,)


def test_a_solution_on_a_bound():
    outcome = solve([[1, 1], [1, -1]], [0.3, 0.3], [0, 0], [10, 10])
    assert outcome.status is Status.CONVERGED
    assert outcome.x[0] == pytest.approx(0.3)
    assert 0.0 <= outcome.x[1] < 1e-15
    assert outcome.on_bound == (1,)


def test_equations_that_are_not_linear_are_noticed():
    p = problem(lambda x: [x[0] ** 3 - 8, x[1] - x[0]], lambda x: [[3 * x[0] ** 2, 0], [-1, 1]], [1.0, 1.0])
    assert linear_step(p, p.start, Trail("linear", p.start, Budget())).status is Status.STALLED
