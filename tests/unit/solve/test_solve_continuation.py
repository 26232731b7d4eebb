"""Homotopies: round turning points to a root that Newton's method does not reach."""

import numpy as np
import pytest
from solve_problems import problem

from eqsheet.solve.continuation import fixed_point_homotopy, newton_homotopy
from eqsheet.solve.newton import newton
from eqsheet.solve.outcome import Status
from eqsheet.solve.trail import Budget, Trail

METHODS = [newton_homotopy, fixed_point_homotopy]


def run(method, p):
    return method(p, p.start, Trail(method.__name__, p.start, Budget()))


def hidden_root(start, lower=None, upper=None, seen=None):
    """x^3 - 3 x = 10 behind the two turning points at -1 and 1, and y = x^2."""
    return problem(
        lambda x: [x[0] ** 3 - 3 * x[0] - 10, x[1] - x[0] ** 2],
        lambda x: [[3 * x[0] ** 2 - 3, 0], [-2 * x[0], 1]],
        start,
        lower,
        upper,
        seen=seen,
    )


def test_newton_alone_does_not_pass_the_turning_point():
    assert not run(newton, hidden_root([-1.5, 1.0])).solved


@pytest.mark.parametrize("method", METHODS)
def test_the_curve_is_followed_round_both_turning_points(method):
    outcome = run(method, hidden_root([-1.5, 1.0]))
    assert outcome.status is Status.CONVERGED
    # Cardano: x = 2.61288793...; the equation itself is the witness.
    assert outcome.x[0] ** 3 - 3 * outcome.x[0] == pytest.approx(10.0, rel=1e-15)
    assert outcome.x[1] == pytest.approx(outcome.x[0] ** 2, rel=1e-15)


@pytest.mark.parametrize("method", METHODS)
def test_bounds_are_kept_strictly(method):
    seen = []
    lower, upper = np.array([-2.0, 0.0]), np.array([3.0, 20.0])
    run(method, hidden_root([-1.5, 1.0], lower, upper, seen))
    assert (np.array(seen) > lower).all()
    assert (np.array(seen) < upper).all()


@pytest.mark.parametrize("method", METHODS)
def test_without_a_root_the_curve_ends_and_nothing_is_claimed(method):
    p = problem(
        lambda x: [x[0] ** 2 + x[1] ** 2 + 1, x[0] - x[1]],
        lambda x: [[2 * x[0], 2 * x[1]], [1, -1]],
        [2.0, 1.0],
    )
    assert not run(method, p).solved


def test_a_start_outside_the_domain_is_said():
    p = problem(lambda x: [np.log(x[0]), x[1]], lambda x: [[1 / x[0], 0], [0, 1]], [-1.0, 1.0])
    assert run(newton_homotopy, p).status is Status.DOMAIN
