"""Dogleg and Levenberg-Marquardt: their steps, and where the descents end."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from solve_problems import problem

from eqsheet.solve.dogleg import dogleg, dogleg_step
from eqsheet.solve.levenberg_marquardt import damped_least_squares, levenberg_marquardt
from eqsheet.solve.outcome import Status
from eqsheet.solve.trail import Budget, Trail

METHODS = [dogleg, levenberg_marquardt]
NUMBERS = st.floats(-10, 10).filter(lambda v: abs(v) > 1e-3)


def run(method, p):
    return method(p, p.start, Trail(method.__name__, p.start, Budget()))


@given(
    f=st.tuples(NUMBERS, NUMBERS),
    entries=st.tuples(NUMBERS, NUMBERS, NUMBERS, NUMBERS),
    radius=st.floats(0.01, 100),
)
@pytest.mark.parametrize("strategy", [dogleg_step, damped_least_squares])
def test_steps_stay_in_the_region_and_reduce_the_model(strategy, f, entries, radius):
    f, a = np.array(f), np.array(entries).reshape(2, 2)
    step = strategy(f, a, radius)
    assert np.linalg.norm(step) <= 1.11 * radius
    assert np.linalg.norm(f + a @ step) < np.linalg.norm(f)


@given(
    f=st.tuples(NUMBERS, NUMBERS),
    entries=st.tuples(NUMBERS, NUMBERS, NUMBERS, NUMBERS),
    radius=st.floats(0.01, 1),
)
def test_the_damped_step_is_no_worse_than_any_other_in_the_region(f, entries, radius):
    f, a = np.array(f), np.array(entries).reshape(2, 2)
    step = damped_least_squares(f, a, radius)
    achieved = np.linalg.norm(f + a @ step)
    angles = np.linspace(0, 2 * np.pi, 73)
    for part in (0.3, 0.6, 0.9):
        around = part * radius * np.array([np.cos(angles), np.sin(angles)])
        assert achieved <= np.linalg.norm(f[:, None] + a @ around, axis=0).min() * (1 + 1e-9)


@pytest.mark.parametrize("method", METHODS)
def test_a_root_is_reached_to_rounding(method):
    p = problem(
        lambda x: [10 * (x[1] - x[0] ** 2), 1 - x[0]], lambda x: [[-20 * x[0], 10], [-1, 0]], [-1.2, 1.0]
    )
    outcome = run(method, p)
    assert outcome.status is Status.CONVERGED
    assert outcome.x == pytest.approx([1.0, 1.0], rel=1e-15)


@pytest.mark.parametrize("method", METHODS)
def test_a_minimum_without_a_root_is_called_that(method):
    # x^2 + y^2 = 1 and x + y = 3 do not meet; by symmetry the sum of squares is least at x = y.
    p = problem(
        lambda x: [x[0] ** 2 + x[1] ** 2 - 1, x[0] + x[1] - 3],
        lambda x: [[2 * x[0], 2 * x[1]], [1, 1]],
        [2.0, 0.5],
    )
    outcome = run(method, p)
    assert outcome.status in (Status.MINIMUM, Status.SINGULAR)
    assert outcome.x[0] == pytest.approx(outcome.x[1], rel=1e-3)


@pytest.mark.parametrize("method", METHODS)
def test_bounds_are_kept_strictly(method):
    seen = []
    lower, upper = np.array([0.0, 0.5]), np.array([0.9, 3.0])
    # The root (1, 1) lies outside: the descent ends against the upper bound of x.
    p = problem(
        lambda x: [10 * (x[1] - x[0] ** 2), 1 - x[0]],
        lambda x: [[-20 * x[0], 10], [-1, 0]],
        [0.1, 2.5],
        lower,
        upper,
        seen=seen,
    )
    outcome = run(method, p)
    assert not outcome.solved
    assert outcome.x[0] == pytest.approx(0.9, rel=1e-3)
    assert (np.array(seen) > lower).all()
    assert (np.array(seen) < upper).all()


@pytest.mark.parametrize("method", METHODS)
def test_a_singular_start_is_left(method):
    # The Jacobian has rank 1 at every point with x = y.
    p = problem(lambda x: [x[0] * x[1] - 6, x[0] + x[1] - 5], lambda x: [[x[1], x[0]], [1, 1]], [1.0, 1.001])
    assert sorted(run(method, p).x) == pytest.approx([2.0, 3.0])
