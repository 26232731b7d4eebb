"""Many cases at once: the same roots as one by one, stragglers marked, bounds kept."""

import numpy as np
import pytest

from eqsheet.solve.batch import BatchProblem, solve_batch
from eqsheet.solve.ladder import solve_block
from eqsheet.solve.problem import Problem


def pump_and_pipe(count, seen=None):
    """Flow and head of a pump on a pipe, for `count` pipes; the last unknown is the friction factor."""
    resistance = np.geomspace(1e-2, 1e4, count)

    def linearise(x, cases):
        if seen is not None:
            seen.append(x.copy())
        q, h, f = x.T
        r = resistance[cases]
        residual = np.column_stack((h - 40 + 3 * q**2, h - r * f * q**2, 1 / np.sqrt(f) - 6 - np.log(q + 1)))
        jacobian = np.zeros((len(cases), 3, 3))
        jacobian[:, 0, 0], jacobian[:, 0, 1] = 6 * q, 1
        jacobian[:, 1, 0], jacobian[:, 1, 1], jacobian[:, 1, 2] = -2 * r * f * q, 1, -r * q**2
        jacobian[:, 2, 0], jacobian[:, 2, 2] = -1 / (q + 1), -0.5 * f**-1.5
        return residual, jacobian

    def sizes(x, cases):
        return np.full((len(cases), 3), 6.0)

    start = np.tile([1.0, 20.0, 0.02], (count, 1))
    return BatchProblem(linearise, sizes, start, np.zeros(3), np.full(3, np.inf), np.array([1.0, 20.0, 0.02]))


def one_case(batch, case):
    which = np.array([case])

    def linearise(x):
        with np.errstate(all="ignore"):
            residual, jacobian = batch.linearise(x[None, :], which)
        return residual[0], jacobian[0]

    return Problem(
        3,
        lambda x: linearise(x)[0],
        linearise,
        lambda x: np.full(3, 6.0),
        batch.start[case],
        batch.lower,
        batch.upper,
        batch.magnitude,
    )


def test_every_case_agrees_with_the_full_solver():
    batch = pump_and_pipe(200)
    outcome = solve_batch(batch)
    assert outcome.converged.all()
    assert outcome.stragglers.size == 0
    for case in range(0, 200, 11):
        assert outcome.x[case] == pytest.approx(solve_block(one_case(batch, case)).x, rel=1e-12)


def test_bounds_are_kept_strictly():
    seen = []
    solve_batch(pump_and_pipe(50, seen))
    assert all((x > 0).all() for x in seen)


def test_cases_without_a_root_are_left_and_do_not_disturb_the_others():
    right = np.array([4.0, -4.0, 9.0, 0.25])

    def linearise(x, cases):
        return x**2 - right[cases][:, None], 2 * x[:, :, None]

    batch = BatchProblem(
        linearise,
        lambda x, cases: np.ones((len(cases), 1)),
        np.ones((4, 1)),
        np.array([-np.inf]),
        np.array([np.inf]),
        np.ones(1),
    )
    outcome = solve_batch(batch)
    assert outcome.stragglers.tolist() == [1]
    assert outcome.x[[0, 2, 3], 0] == pytest.approx([2.0, 3.0, 0.5], rel=1e-15)


def test_a_singular_case_does_not_disturb_the_others():
    def linearise(x, cases):
        jacobian = np.ones((len(cases), 2, 2))
        jacobian[:, 1, 1] = np.where(cases == 1, 1.0, -1.0)
        return np.einsum("cij,cj->ci", jacobian, x) - [3.0, 1.0], jacobian

    batch = BatchProblem(
        linearise,
        lambda x, cases: np.ones((len(cases), 2)),
        np.full((3, 2), 7.0),
        np.full(2, -np.inf),
        np.full(2, np.inf),
        np.ones(2),
    )
    outcome = solve_batch(batch)
    assert outcome.stragglers.tolist() == [1]
    assert outcome.x[[0, 2]] == pytest.approx(np.array([[2.0, 1.0], [2.0, 1.0]]))


def test_starts_outside_the_domain_are_left():
    def linearise(x, cases):
        with np.errstate(all="ignore"):
            return np.log(x) - 1, 1 / x[:, :, None]

    batch = BatchProblem(
        linearise,
        lambda x, cases: np.ones((len(cases), 1)),
        np.array([[1.0], [-1.0], [50.0]]),
        np.array([-np.inf]),
        np.array([np.inf]),
        np.ones(1),
    )
    outcome = solve_batch(batch)
    assert outcome.stragglers.tolist() == [1]
    assert outcome.x[[0, 2], 0] == pytest.approx([np.e, np.e], rel=1e-15)
