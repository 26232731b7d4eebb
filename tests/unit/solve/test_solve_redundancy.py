"""Equations that depend on each other everywhere are told early, and no others are taken for such."""

from __future__ import annotations

import numpy as np
import pytest
from solve_problems import problem

from eqsheet.solve.fallbacks import LAST, fallbacks
from eqsheet.solve.ladder import solve_block
from eqsheet.solve.outcome import Status
from eqsheet.solve.problem import Problem
from eqsheet.solve.redundancy import redundant


def product_and_its_square() -> Problem:
    return problem(
        lambda x: [x[0] * x[1] - 4, x[0] ** 2 * x[1] ** 2 - 16],
        lambda x: [[x[1], x[0]], [2 * x[0] * x[1] ** 2, 2 * x[0] ** 2 * x[1]]],
        [1.0, 3.0],
    )


def one_factor_in_common(start: tuple[float, float]) -> Problem:
    """``x (y - 1) = 0, x (x + y - 3) = 0``: every point with x = 0, and (2, 1)."""
    return problem(
        lambda x: [x[0] * (x[1] - 1), x[0] * (x[0] + x[1] - 3)],
        lambda x: [[x[1] - 1, x[0]], [2 * x[0] + x[1] - 3, x[0]]],
        start,
    )


def multiple_by_a_function() -> Problem:
    """``f = x + y - 1`` and ``f (x - 3)``: of less rank only where f is zero, which is all of the solution."""
    return problem(
        lambda x: [x[0] + x[1] - 1, (x[0] + x[1] - 1) * (x[0] - 3)],
        lambda x: [[1, 1], [x[0] - 3 + x[0] + x[1] - 1, x[0] - 3]],
        [5.0, 4.0],
    )


def test_one_equation_in_other_words_is_redundant() -> None:
    assert redundant(product_and_its_square())


def test_what_is_singular_at_its_root_alone_is_not_redundant() -> None:
    assert not redundant(
        problem(lambda x: [x[0] ** 2, x[1] ** 2], lambda x: [[2 * x[0], 0], [0, 2 * x[1]]], [0.0, 0.0])
    )
    assert not redundant(multiple_by_a_function())


def test_functions_gone_flat_say_nothing() -> None:
    flat = problem(
        lambda x: [np.exp(-1e5 * abs(x[0])) - 0.5, x[1] - x[0]],
        lambda x: [[-1e5 * np.sign(x[0]) * np.exp(-1e5 * abs(x[0])), 0], [-1, 1]],
        [1.0, 1.0],
    )
    assert not redundant(flat)


def test_a_redundant_block_is_given_up_after_few_attempts() -> None:
    outcome = solve_block(product_and_its_square())
    assert outcome.status is Status.CONTINUUM
    assert len(outcome.attempts) <= 2


def test_on_a_curve_of_roots_only_other_starts_are_tried() -> None:
    outcome = solve_block(multiple_by_a_function())
    assert outcome.status is Status.CONTINUUM
    methods = [attempt.method for attempt in (*outcome.attempts, outcome)]
    assert sorted(methods) == sorted(["newton", "newton, start moved", LAST])


@pytest.mark.parametrize("start", [(0.01, 5.0), (-1.0, 40.0), (1e-3, -7.0)])
def test_an_isolated_root_beside_a_curve_of_roots_is_found(start: tuple[float, float]) -> None:
    outcome = solve_block(one_factor_in_common(start))
    assert outcome.status is Status.CONVERGED
    assert outcome.x == pytest.approx([2.0, 1.0], rel=1e-12)


def test_nothing_more_than_the_best_point_is_looked_for_where_there_is_proven_to_be_no_root() -> None:
    none = problem(
        lambda x: [x[0] ** 2 + x[1] ** 2 + 1, x[0] - x[1] - 0.5],
        lambda x: [[2 * x[0], 2 * x[1]], [1, -1]],
        [3.0, 1.0],
    )
    assert LAST in [name for name, _ in fallbacks(none)]
    outcome = solve_block(none, hopeless=lambda: True)
    assert not outcome.solved
    assert len(outcome.attempts) <= 2
    # Nearest in the least-squares sense of scaled equations: on the line, close to its point nearest to zero.
    assert outcome.x == pytest.approx([0.25, -0.25], abs=0.1)


def test_a_proof_is_asked_for_only_where_newton_fails() -> None:
    def never() -> bool:
        raise AssertionError

    sound = problem(lambda x: [x[0] - 1, x[1] - 2], lambda x: np.eye(2), [0.0, 0.0])
    assert solve_block(sound, hopeless=never).solved


def test_two_sides_that_meet_only_at_infinity_have_no_curve_of_roots() -> None:
    """``x y = 1, y = exp(-x) - 1/x``: along x to infinity y falls below any size that counts as zero."""
    outcome = solve_block(
        problem(
            lambda x: [x[0] * x[1] - 1, x[1] - np.exp(-x[0]) + 1 / x[0]],
            lambda x: [[x[1], x[0]], [np.exp(-x[0]) - 1 / x[0] ** 2, 1]],
            [2.0, 0.5],
            [0.1, -np.inf],
            sizes=lambda x: np.array(
                [max(abs(x[0] * x[1]), 1.0), max(abs(x[1]), np.exp(-x[0]), abs(1 / x[0]))]
            ),
        )
    )
    attempts = (*outcome.attempts, outcome)
    assert not any(attempt.solved or attempt.status is Status.CONTINUUM for attempt in attempts)
