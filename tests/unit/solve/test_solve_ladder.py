"""The ladder: which rung solves, what is kept, budgets and interrupts; and runs that have no answer."""

import time

import numpy as np
import pytest
from solve_problems import problem

from eqsheet.solve.ladder import solve_block
from eqsheet.solve.outcome import Status
from eqsheet.solve.trail import Budget


def circle_and_line(distance, start=(1.0, 0.3)):
    """x^2 + y^2 = 1 and x + y = distance: two roots below sqrt(2), none above."""
    return problem(
        lambda x: [x[0] ** 2 + x[1] ** 2 - 1, x[0] + x[1] - distance],
        lambda x: [[2 * x[0], 2 * x[1]], [1, 1]],
        start,
        sizes=lambda x: np.array([max(x[0] ** 2, x[1] ** 2, 1.0), max(abs(x[0]), abs(x[1]), distance)]),
    )


def test_where_newton_works_nothing_else_is_tried():
    outcome = solve_block(circle_and_line(1.2))
    assert outcome.status is Status.CONVERGED
    assert outcome.method == "newton"
    assert outcome.attempts == ()


def test_every_attempt_is_kept():
    outcome = solve_block(circle_and_line(2.0))
    assert not outcome.solved
    methods = [outcome.method, *(attempt.method for attempt in outcome.attempts)]
    assert {"newton", "dogleg", "levenberg-marquardt", "newton homotopy", "spread starts"} <= set(methods)
    assert all(method in outcome.full for method in methods)


@pytest.mark.parametrize("gap", [1.0, 1e-2, 1e-4, 1e-6])
def test_no_root_is_never_called_solved(gap):
    outcome = solve_block(circle_and_line(2**0.5 + gap))
    assert not outcome.solved
    assert outcome.x == pytest.approx([0.7, 0.7], abs=0.3 * max(gap, 0.05) + 0.02)


def random_noise(x):
    """A residual that is nothing but noise of its argument."""
    return np.array([np.sin(1e8 * x[0]) + 2.0, np.cos(1e8 * x[1]) - 2.0])


ADVERSARIAL = {
    "no root": problem(
        lambda x: [np.exp(x[0]) + 1, x[1] - 1], lambda x: [[np.exp(x[0]), 0], [0, 1]], [1.0, 2.0]
    ),
    "root at infinity": problem(
        lambda x: [np.exp(-x[0]) * x[1], x[1] - 1],
        lambda x: [[-np.exp(-x[0]) * x[1], np.exp(-x[0])], [0, 1]],
        [1.0, 2.0],
    ),
    "continuum": problem(
        lambda x: [x[0] - x[1], np.sin(x[0] - x[1])],
        lambda x: [[1, -1], [np.cos(x[0] - x[1]), -np.cos(x[0] - x[1])]],
        [1.0, 2.0],
    ),
    "singular everywhere": problem(
        lambda x: [x[0] + x[1] - 1, (x[0] + x[1]) ** 2 - 4],
        lambda x: [[1, 1], [2 * (x[0] + x[1]), 2 * (x[0] + x[1])]],
        [1.0, 2.0],
    ),
    "noise": problem(
        random_noise, lambda x: np.diag([1e8 * np.cos(1e8 * x[0]), -1e8 * np.sin(1e8 * x[1])]), [1.0, 2.0]
    ),
    "nowhere defined": problem(lambda x: [np.nan, x[0]], lambda x: [[np.nan, 0], [1, 0]], [1.0, 2.0]),
    "constant": problem(lambda x: [1.0, 2.0], lambda x: np.zeros((2, 2)), [1.0, 2.0]),
    "jump": problem(
        lambda x: [1.0 if x[0] > x[1] else -1.0, x[0] - 1], lambda x: [[0, 0], [1, 0]], [1.0, 2.0]
    ),
    "overflow": problem(
        lambda x: [np.exp(np.exp(x[0])) + 1, x[1]],
        lambda x: [[np.exp(x[0] + np.exp(x[0])), 0], [0, 1]],
        [5.0, 2.0],
    ),
}


@pytest.mark.parametrize("name", ADVERSARIAL)
def test_the_unanswerable_ends_in_time_and_claims_nothing(name):
    begin = time.perf_counter()
    outcome = solve_block(ADVERSARIAL[name], Budget(seconds=5.0))
    assert not outcome.solved
    assert time.perf_counter() - begin < 6.0


def test_a_continuum_is_named():
    assert solve_block(ADVERSARIAL["continuum"]).status is Status.CONTINUUM


def test_the_time_allowed_is_kept():
    def slow(x):
        time.sleep(0.01)
        return [x[0] ** 2 + x[1] ** 2 + 1, x[0] - x[1] ** 3]

    p = problem(slow, lambda x: [[2 * x[0], 2 * x[1]], [1, -3 * x[1] ** 2]], [1.0, 2.0])
    begin = time.perf_counter()
    outcome = solve_block(p, Budget(seconds=0.3))
    assert not outcome.solved
    assert time.perf_counter() - begin < 0.6


def test_an_interrupt_keeps_the_best_point():
    calls = []

    def residual(x):
        calls.append(x)
        if len(calls) > 6:
            raise KeyboardInterrupt
        return [np.exp(x[0]) - 1e9, x[1] - x[0]]

    p = problem(residual, lambda x: [[np.exp(x[0]), 0], [-1, 1]], [30.0, 1.0])
    outcome = solve_block(p)
    assert outcome.status is Status.INTERRUPTED
    assert 20.7 < outcome.x[0] < 29.0


def test_a_root_between_the_bounds_is_preferred_to_one_on_a_bound():
    # No flow at all solves q = 4 sqrt(q) h and h = 1 - q / 8 as well; wanted is q = 16 h^2.
    p = problem(
        lambda x: [x[0] - 4 * np.sqrt(x[0]) * x[1], x[1] - 1 + x[0] / 8],
        lambda x: [[1 - 2 * x[1] / np.sqrt(x[0]), -4 * np.sqrt(x[0])], [1 / 8, 1]],
        [1e-4, 1.0],
        [0.0, 0.0],
    )
    outcome = solve_block(p)
    assert outcome.status is Status.CONVERGED
    # By hand: q = 16 (1 - q/8)^2, or q^2 - 20 q + 64 = 0, so q = 4.
    assert outcome.x == pytest.approx([4.0, 0.5], rel=1e-13)


def test_a_root_on_a_bound_is_kept_where_there_is_no_other():
    p = problem(
        lambda x: [x[0] * (1 + x[1]), x[1] - 2 - x[0]],
        lambda x: [[1 + x[1], x[0]], [-1, 1]],
        [0.7, 1.0],
        [0.0, 0.0],
    )
    outcome = solve_block(p)
    assert outcome.status is Status.CONVERGED
    assert outcome.on_bound == (0,)
