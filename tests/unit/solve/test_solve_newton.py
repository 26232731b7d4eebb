"""Damped Newton: roots to rounding, bounds, domains, singular Jacobians."""

import numpy as np
import pytest
from solve_problems import problem

from eqsheet.solve.newton import newton
from eqsheet.solve.outcome import Status
from eqsheet.solve.trail import Budget, Trail


def run(p, budget=Budget()):  # noqa: B008 - Budget is frozen
    return newton(p, p.start, Trail("newton", p.start, budget))


def test_root_is_reached_to_rounding():
    # x y = 6, x + y = 5 has the roots (2, 3) and (3, 2).
    p = problem(lambda x: [x[0] * x[1] - 6, x[0] + x[1] - 5], lambda x: [[x[1], x[0]], [1, 1]], [1.0, 7.0])
    outcome = run(p)
    assert outcome.status is Status.CONVERGED
    assert outcome.x == pytest.approx([2.0, 3.0], rel=1e-15)
    assert outcome.iterations <= 8


def test_a_start_at_the_root_takes_no_step():
    p = problem(lambda x: [x[0] * x[1] - 6, x[0] + x[1] - 5], lambda x: [[x[1], x[0]], [1, 1]], [2.0, 3.0])
    outcome = run(p)
    assert outcome.status is Status.CONVERGED
    assert outcome.iterations == 0


def test_bounds_are_kept_strictly_at_every_evaluation():
    seen = []
    lower, upper = [0.0, 0.0], [10.0, 4.0]
    p = problem(
        lambda x: [np.log(x[0]) + x[1] - 3, x[0] - x[1] ** 2 + 1e-3],
        lambda x: [[1 / x[0], 1], [1, -2 * x[1]]],
        [9.0, 0.01],
        lower,
        upper,
        seen=seen,
    )
    outcome = run(p)
    assert outcome.status is Status.CONVERGED
    points = np.array(seen)
    assert (points > lower).all()
    assert (points < upper).all()


def test_a_step_that_vanishes_in_floating_point_ends_the_iteration():
    """Terms, slopes and the typical size of the first unknown are at the end of the range of floats."""
    p = problem(
        lambda x: [x[0] + 1e-200, (x[1] - 1.0) * x[0] + 1e-200],
        lambda x: [[1e-20, 0], [x[1], 1e-20]],
        [0.0, 1.0],
        magnitude=[5e-324, 1.0],
        sizes=lambda x: np.full(2, 1e-200),
    )
    with np.errstate(all="ignore"):
        outcome = run(p)
    assert outcome.status is not Status.CONVERGED
    assert np.isfinite(outcome.x).all()


def test_a_start_outside_the_bounds_is_moved_inside():
    seen = []
    p = problem(
        lambda x: [x[0] ** 2 - 4, x[1] - x[0]],
        lambda x: [[2 * x[0], 0], [-1, 1]],
        [-3.0, 20.0],
        [0.0, 0.0],
        [10.0, 10.0],
        seen=seen,
    )
    assert run(p).x == pytest.approx([2.0, 2.0])
    assert (np.array(seen) > 0).all()
    assert (np.array(seen) < 10).all()


def test_a_root_on_a_bound_is_approached_and_said_to_rest_on_it():
    # c (1 + d) = 0 with c >= 0 has c = 0; d = 2 + c.
    p = problem(
        lambda x: [x[0] * (1 + x[1]), x[1] - 2 - x[0]],
        lambda x: [[1 + x[1], x[0]], [-1, 1]],
        [0.7, 1.0],
        [0.0, 0.0],
        [np.inf, np.inf],
    )
    outcome = run(p)
    assert outcome.status is Status.CONVERGED
    assert 0.0 < outcome.x[0] < 1e-14
    assert outcome.on_bound == (0,)


def test_leaving_the_domain_shortens_the_step():
    # The full first step from x = 20 goes far below zero, where ln is not defined.
    p = problem(
        lambda x: [np.log(x[0]) + x[0] / 50 - 0.5, x[1] - x[0] ** 2],
        lambda x: [[1 / x[0] + 0.02, 0], [-2 * x[0], 1]],
        [1000.0, 1.0],
    )
    outcome = run(p)
    assert outcome.status is Status.CONVERGED
    assert np.log(outcome.x[0]) + outcome.x[0] / 50 == pytest.approx(0.5, abs=1e-15)


def test_no_finite_start_is_said():
    p = problem(lambda x: [np.log(x[0]), x[1] - 1], lambda x: [[1 / x[0], 0], [0, 1]], [-1.0, 0.0])
    assert run(p).status is Status.DOMAIN


def test_contradicting_equations_are_singular_with_their_null_vectors():
    # x + y + z = 1 and 2 x + 2 y + 2 z = 3 contradict each other; z is fixed by the third.
    matrix = np.array([[1.0, 1, 1], [2, 2, 2], [0, 0, 1]])
    p = problem(lambda x: matrix @ x - [1, 3, 2], lambda x: matrix, [1.0, 1, 1])
    outcome = run(p)
    assert outcome.status is Status.SINGULAR
    assert np.abs(outcome.null_equations) == pytest.approx([2**-0.5, 2**-0.5, 0.0])
    assert outcome.null_unknowns[2] == pytest.approx(0.0, abs=1e-12)
    assert outcome.null_unknowns[0] == pytest.approx(-outcome.null_unknowns[1])


def test_a_free_combination_is_a_continuum_and_no_solution():
    p = problem(
        lambda x: [x[0] * x[1] - 6, 2 * x[0] * x[1] - 12],
        lambda x: [[x[1], x[0]], [2 * x[1], 2 * x[0]]],
        [1.0, 4.0],
    )
    outcome = run(p)
    assert outcome.status is Status.CONTINUUM
    assert not outcome.solved


def test_a_double_root_is_solved_and_named():
    # x + y = 2 touches x y = 1 at (1, 1).
    p = problem(lambda x: [x[0] + x[1] - 2, x[0] * x[1] - 1], lambda x: [[1, 1], [x[1], x[0]]], [3.0, 0.0])
    outcome = run(p)
    assert outcome.status is Status.DOUBLE
    assert outcome.solved
    assert outcome.x == pytest.approx([1.0, 1.0], abs=1e-7)


def test_no_root_is_never_called_solved():
    for offset in (1.0, 1e-3, 1e-6, 1e-9):
        p = problem(
            lambda x, a=offset: [x[0] ** 2 + a, x[1] - x[0]], lambda x: [[2 * x[0], 0], [-1, 1]], [1.0, 1.0]
        )
        assert not run(p).solved


def test_a_root_at_infinity_is_not_a_root():
    for residual, slope in (
        (lambda v: np.exp(-v), lambda v: -np.exp(-v)),
        (lambda v: 1 / v, lambda v: -1 / v**2),
        (lambda v: 1 + 1 / v - 1, lambda v: -1 / v**2),
    ):
        p = problem(
            lambda x, f=residual: [f(x[0]), x[1] - 1],
            lambda x, d=slope: [[d(x[0]), 0], [0, 1]],
            [1.0, 0.0],
            sizes=lambda x: np.array([1.0, 1.0]),
        )
        assert not run(p).solved


def test_the_step_beside_a_pole_is_not_taken_for_rounding():
    # At x = 1 + 2^-52 the residual 1/(x - 1) is huge, yet small against |J x|.
    p = problem(
        lambda x: [1 / (x[0] - 1), x[1] - 1],
        lambda x: [[-1 / (x[0] - 1) ** 2, 0], [0, 1]],
        [1 + 2.0**-52, 1.0],
    )
    assert not run(p).solved


def test_the_budget_is_kept():
    p = problem(
        lambda x: [np.exp(x[0]) - 1e9, x[1] - x[0]], lambda x: [[np.exp(x[0]), 0], [-1, 1]], [900.0**0.5, 0.0]
    )
    assert run(p, Budget(iterations=2)).status is Status.BUDGET
    assert run(p, Budget(seconds=0.0)).status is Status.BUDGET


def test_history_holds_every_accepted_step():
    p = problem(lambda x: [x[0] * x[1] - 6, x[0] + x[1] - 5], lambda x: [[x[1], x[0]], [1, 1]], [1.0, 7.0])
    outcome = run(p)
    assert len(outcome.history) == outcome.iterations + 1
    assert outcome.history[0].damping == 0.0
    assert all(0.0 < step.damping <= 1.0 for step in outcome.history[1:])
    assert outcome.full.count("damping") == len(outcome.history)


def test_sparse_and_dense_jacobians_give_the_same_root():
    import scipy.sparse as sp

    n = 30

    def residual(x):
        padded = np.concatenate(([0.0], x, [0.0]))
        return (3 - 2 * x) * x - padded[:-2] - 2 * padded[2:] + 1

    def jacobian(x):
        return np.diag(3 - 4 * x) - np.diag(np.ones(n - 1), -1) - 2 * np.diag(np.ones(n - 1), 1)

    dense = problem(residual, jacobian, -np.ones(n))
    from dataclasses import replace

    sparse = replace(dense, linearise=lambda x: (residual(x), sp.csc_matrix(jacobian(x))))
    assert run(sparse).x == pytest.approx(run(dense).x, rel=1e-13)
    assert run(sparse).status is Status.CONVERGED


def test_an_equation_that_loses_its_unknown_at_the_root_leaves_it_free():
    # 3 x exp(y) = 0 says nothing of y once x = 0; on the way there it seems to.
    p = problem(
        lambda x: [x[0], 3 * x[0] * np.exp(x[1])],
        lambda x: [[1, 0], [3 * np.exp(x[1]), 3 * x[0] * np.exp(x[1])]],
        [1.0, 0.9],
    )
    assert run(p).status is Status.CONTINUUM


def test_underflow_is_no_root():
    # exp(-x^2) is zero in doubles from x = 28 on, and nowhere else.
    p = problem(
        lambda x: [np.exp(-(x[0] ** 2)), x[1] - 1],
        lambda x: [[-2 * x[0] * np.exp(-(x[0] ** 2)), 0], [0, 1]],
        [100.0, 0.5],
        sizes=lambda x: np.array([np.exp(-(x[0] ** 2)), 1.0]),
    )
    assert not run(p).solved
