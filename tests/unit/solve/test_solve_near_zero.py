"""Roots with unknowns next to zero: told as zero, as small as they are, or as none, whatever the typical sizes."""

from __future__ import annotations

import math

import numpy as np
import pytest
from solve_problems import problem, scalar

from eqsheet.solve.interior import Interior
from eqsheet.solve.ladder import solve_block, solve_scalar
from eqsheet.solve.newton import newton
from eqsheet.solve.outcome import Status
from eqsheet.solve.trail import Budget, Trail

FAR_TOO_LARGE = 1e60


def chain(magnitude: float):
    """``x = 0.3, y = x^2 + 1`` between unknowns said to be of any size."""
    return problem(
        lambda x: [x[0] - 0.3, x[1] - x[0] ** 2 - 1],
        lambda x: [[1, 0], [-2 * x[0], 1]],
        [1.0, 1.0],
        magnitude=[magnitude, magnitude],
        sizes=lambda x: np.array([max(abs(x[0]), 0.3), max(abs(x[1]), x[0] ** 2, 1)]),
    )


def test_a_typical_size_far_too_large_excuses_nothing() -> None:
    """By floors of 1e54 every point would do."""
    wrong = np.array([0.7, 5.0])
    block = chain(FAR_TOO_LARGE)
    outcome = newton(block, wrong, Trail("newton", wrong, Budget(iterations=0)))
    assert not outcome.solved or outcome.x == pytest.approx([0.3, 1.09], rel=1e-12)
    assert Interior(block).contains(outcome.x)


def test_a_root_is_found_where_the_typical_size_is_far_too_large() -> None:
    outcome = solve_block(chain(FAR_TOO_LARGE))
    assert outcome.status is Status.CONVERGED
    assert outcome.x == pytest.approx([0.3, 1.09], rel=1e-14)


def test_an_unknown_that_is_nothing_but_rounding_is_zero() -> None:
    """``x + y = 1, sin x = y - 1`` has x = 0."""
    outcome = solve_block(
        problem(
            lambda x: [x[0] + x[1] ** 3 - 1, np.sin(x[0]) * x[1] - 3 * x[0]],
            lambda x: [[1, 3 * x[1] ** 2], [np.cos(x[0]) * x[1] - 3, np.sin(x[0])]],
            [0.7, 2.0],
            sizes=lambda x: np.array([max(abs(x[0]), abs(x[1]) ** 3, 1), 3 * abs(x[0])]),
        )
    )
    assert outcome.solved
    assert abs(outcome.x[0]) <= 1e-16
    assert outcome.x[1] == pytest.approx(1.0, rel=1e-15)


def test_a_small_unknown_that_the_equations_tell_keeps_its_digits() -> None:
    """``ln x + y = -299, y^3 = 1``: x = exp(-300)."""
    outcome = solve_block(
        problem(
            lambda x: [(math.log(x[0]) if x[0] > 0 else math.nan) + x[1] + 299, x[1] ** 3 - 1],
            lambda x: [[1 / x[0], 1], [0, 3 * x[1] ** 2]],
            [1.0, 2.0],
            lower=[0.0, -np.inf],
            sizes=lambda x: np.array([max(abs(math.log(x[0])), abs(x[1]), 299), max(abs(x[1]) ** 3, 1)]),
        )
    )
    assert outcome.solved
    assert outcome.x[0] == pytest.approx(math.exp(-300), rel=1e-12)


MULTIPLE_AT_ZERO = [
    (lambda x: x - math.sin(x), lambda x: 1 - math.cos(x), abs),
    (lambda x: x * abs(x), lambda x: 2 * abs(x), lambda x: x * x),
    (lambda x: x**3 + x**5, lambda x: 3 * x**2 + 5 * x**4, lambda x: max(abs(x) ** 3, abs(x) ** 5)),
    (lambda x: math.tan(x) - x, lambda x: math.tan(x) ** 2, lambda x: max(abs(x), abs(math.tan(x)))),
    (lambda x: math.exp(x) - 1 - x, lambda x: math.exp(x) - 1, lambda x: max(math.exp(x), 1.0)),
    (lambda x: x - 1 + math.exp(-x), lambda x: 1 - math.exp(-x), lambda x: max(math.exp(-x), 1.0)),
]


@pytest.mark.parametrize("residual, slope, size", MULTIPLE_AT_ZERO)
@pytest.mark.parametrize("start", [0.5, 1e-3])
@pytest.mark.parametrize("lower", [-math.inf, 0.0])
def test_a_multiple_root_at_zero_is_zero_and_told_as_multiple(residual, slope, size, start, lower) -> None:
    outcome = solve_scalar(scalar(residual, slope, start, lower=lower, upper=1.0, magnitude=start, size=size))
    assert outcome.status is Status.DOUBLE
    assert outcome.x[0] == 0.0


def test_a_multiple_root_at_zero_of_two_equations() -> None:
    """``x^2 + y^2 = 0, x = y``, and ``x - y = sin x, y^2 + x y = 0``, whose residuals grow with the third power."""
    for residual, jacobian, sizes in (
        (
            lambda x: [x[0] ** 2 + x[1] ** 2, x[0] - x[1]],
            lambda x: [[2 * x[0], 2 * x[1]], [1, -1]],
            lambda x: np.array([max(x[0] ** 2, x[1] ** 2), max(abs(x[0]), abs(x[1]))]),
        ),
        (
            lambda x: [x[0] - x[1] - np.sin(x[0]), x[1] ** 2 + x[0] * x[1]],
            lambda x: [[1 - np.cos(x[0]), -1], [x[1], 2 * x[1] + x[0]]],
            lambda x: np.array([max(abs(x[0]), abs(x[1])), max(x[1] ** 2, abs(x[0] * x[1]))]),
        ),
    ):
        outcome = solve_block(problem(residual, jacobian, [1.0, 0.4], sizes=sizes))
        assert outcome.status is Status.DOUBLE
        assert outcome.x == pytest.approx([0.0, 0.0], abs=1e-6)


def test_a_dead_band_about_zero_is_no_multiple_root() -> None:
    def residual(x: float) -> float:
        return max(x - 0.01, 0.0) - max(-0.01 - x, 0.0)

    outcome = solve_scalar(
        scalar(residual, lambda x: float(abs(x) > 0.01), 1.0, size=lambda x: max(abs(x), 0.01))
    )
    assert outcome.status is Status.CONTINUUM


def test_a_second_root_beside_zero_is_not_drawn_to_it() -> None:
    outcome = solve_scalar(
        scalar(
            lambda x: x * (x - 1e-9), lambda x: 2 * x - 1e-9, 1.0, size=lambda x: max(x * x, abs(x) * 1e-9)
        )
    )
    assert outcome.status is Status.CONVERGED
    assert outcome.x[0] == pytest.approx(1e-9, rel=1e-12)


@pytest.mark.parametrize("start", [math.pi / 2, 1.5])
def test_a_pole_is_no_root_though_slopes_are_largest_there(start: float) -> None:
    """``tan x = x``: beside the pole a change of x in its last digits makes any residual."""
    outcome = solve_scalar(
        scalar(
            lambda x: math.tan(x) - x,
            lambda x: math.tan(x) ** 2,
            start,
            lower=1.0,
            upper=2.0,
            size=lambda x: max((1 + math.tan(x) ** 2) * abs(x), abs(x)),
        )
    )
    assert not outcome.solved
