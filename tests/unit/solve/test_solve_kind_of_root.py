"""Roots that are not isolated are told from double ones and single ones, also where slopes hide it."""

from __future__ import annotations

import numpy as np
import pytest
from solve_problems import problem

from eqsheet.solve.ladder import solve_block
from eqsheet.solve.outcome import Status
from eqsheet.solve.problem import Problem


def repeated_by_a_power(power: float, start: tuple[float, float]) -> Problem:
    """``f = x - y^2 = 0`` and ``f^power = 0``, whose slopes vanish where f does; no value below f = 0 at half powers."""

    def f(x):
        return x[0] - x[1] ** 2

    return problem(
        lambda x: [f(x), f(x) ** power],
        lambda x: [[1, -2 * x[1]], [power * f(x) ** (power - 1), -2 * x[1] * power * f(x) ** (power - 1)]],
        start,
        sizes=lambda x: np.array([max(abs(x[0]), x[1] ** 2), max(abs(x[0]), x[1] ** 2) ** power]),
    )


@pytest.mark.parametrize("power", [2.0, 3.0, 1.5])
@pytest.mark.parametrize("start", [(1.0, 0.5), (5.0, 2.0)])
def test_an_equation_repeated_by_a_power_leaves_a_curve(power: float, start: tuple[float, float]) -> None:
    assert solve_block(repeated_by_a_power(power, start)).status is Status.CONTINUUM


def test_an_unknown_gone_to_nothing_that_frees_the_other_is_no_isolated_root() -> None:
    """``y (2 x - y - 2) = 0, y (x - sin y) = 0``: Newton runs onto y = 0, where x does not matter."""
    outcome = solve_block(
        problem(
            lambda x: [x[1] * (2 * x[0] - x[1] - 2), x[1] * (x[0] - np.sin(x[1]))],
            lambda x: [
                [2 * x[1], 2 * x[0] - 2 * x[1] - 2],
                [x[1], x[0] - np.sin(x[1]) - x[1] * np.cos(x[1])],
            ],
            [5.0, 1.0],
            sizes=lambda x: np.array(
                [abs(x[1]) * max(abs(2 * x[0]), abs(x[1]), 2), abs(x[1]) * max(abs(x[0]), abs(np.sin(x[1])))]
            ),
        )
    )
    for attempt in (*outcome.attempts, outcome):
        assert abs(attempt.x[1]) > 1e-6 or not attempt.solved


def test_a_double_root_is_still_told_as_one() -> None:
    """A parabola and its tangent touch at (1, 1)."""
    outcome = solve_block(
        problem(
            lambda x: [x[1] - x[0] ** 2, x[1] - 2 * x[0] + 1],
            lambda x: [[-2 * x[0], 1], [-2, 1]],
            [3.0, 2.0],
            sizes=lambda x: np.array([max(abs(x[1]), x[0] ** 2), max(abs(x[1]), abs(2 * x[0]), 1)]),
        )
    )
    assert outcome.status is Status.DOUBLE
    assert outcome.x == pytest.approx([1.0, 1.0], abs=1e-6)


def test_a_single_root_at_the_edge_of_the_domain_is_believed() -> None:
    """``h^1.5 = q, q = 0`` has the one root zero, and no value below."""
    outcome = solve_block(
        problem(
            lambda x: [x[0] ** 1.5 - x[1], x[1] + 1e-3 * x[0]],
            lambda x: [[1.5 * x[0] ** 0.5, -1], [1e-3, 1]],
            [1.0, 1.0],
            sizes=lambda x: np.array([max(x[0] ** 1.5, abs(x[1])), max(abs(x[1]), 1e-3 * abs(x[0]))]),
        )
    )
    assert outcome.solved
    assert outcome.x == pytest.approx([0.0, 0.0], abs=1e-9)
