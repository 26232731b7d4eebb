"""Safeguarded Newton for one unknown."""

import math

import pytest
from solve_problems import scalar

from eqsheet.solve.ladder import solve_scalar
from eqsheet.solve.outcome import Status
from eqsheet.solve.scalar_newton import scalar_newton
from eqsheet.solve.trail import Budget, Trail


def run(p):
    return scalar_newton(p, p.start, Trail("newton", p.start, Budget()))


@pytest.mark.parametrize("start", [1.0, 10.0, 100.0, 1000.0, 1e-6, 1e6])
def test_logarithm_from_anywhere(start):
    outcome = run(scalar(lambda x: math.log(x) + x / 50 - 0.5, lambda x: 1 / x + 0.02, start))
    assert outcome.status is Status.CONVERGED
    # Newton in 30 digits by hand: x = 1.59731...; here the equation itself is the witness.
    assert math.log(outcome.x[0]) + outcome.x[0] / 50 == pytest.approx(0.5, abs=2e-16)


def test_bounds_are_kept_strictly():
    seen = []
    outcome = run(scalar(lambda x: x * x - 2, lambda x: 2 * x, 0.01, 0.0, 1.5, seen=seen))
    assert outcome.x[0] == pytest.approx(math.sqrt(2), rel=1e-15)
    assert all(0.0 < x < 1.5 for x in seen)


def test_a_root_on_the_bound_rests_there():
    outcome = run(scalar(lambda x: x * (x + 3), lambda x: 2 * x + 3, 2.0, 0.0))
    assert outcome.status is Status.CONVERGED
    assert outcome.on_bound == (0,)


def test_double_root_is_named():
    outcome = run(
        scalar(lambda x: x * x - 2 * x + 1, lambda x: 2 * x - 2, 3.0, size=lambda x: 2 * abs(x) + 1)
    )
    assert outcome.status is Status.DOUBLE
    assert outcome.x[0] == pytest.approx(1.0, abs=1e-7)


def test_without_a_root_it_stalls_at_the_minimum():
    outcome = solve_scalar(scalar(lambda x: x * x + 1, lambda x: 2 * x, 3.0))
    assert not outcome.solved
    assert outcome.x[0] == pytest.approx(0.0, abs=1e-3)


@pytest.mark.parametrize(
    ("residual", "slope"),
    [
        (lambda x: math.exp(-x), lambda x: -math.exp(-x)),
        (lambda x: 1 / x, lambda x: -1 / x**2),
        (lambda x: 1 + 1 / x - 1, lambda x: -1 / x**2),
    ],
)
def test_a_root_at_infinity_is_not_a_root(residual, slope):
    assert not solve_scalar(scalar(residual, slope, 1.0, size=lambda x: 1.0)).solved


def test_stationary_start_is_left_when_the_other_side_is_known():
    # f(0) = -1 with slope 0: Newton has no direction, bracketing finds +1 and -1 (x^4 = 1).
    outcome = solve_scalar(scalar(lambda x: x**4 - 1, lambda x: 4 * x**3, 0.0))
    assert outcome.solved
    assert abs(outcome.x[0]) == pytest.approx(1.0, rel=1e-15)


def test_interrupt_keeps_the_best_point():
    calls = []

    def residual(x):
        calls.append(x)
        if len(calls) > 4:
            raise KeyboardInterrupt
        return math.exp(x) - 1e9

    outcome = solve_scalar(scalar(residual, math.exp, 30.0))
    assert outcome.status is Status.INTERRUPTED
    assert 20.0 < outcome.x[0] < 30.0
