"""Facts of failure as indices."""

import numpy as np
import pytest
from solve_problems import problem

from eqsheet.solve.explain import explain
from eqsheet.solve.ladder import solve_block
from eqsheet.solve.outcome import Outcome, Status


def facts_at(p, x):
    return explain(p, Outcome(Status.STALLED, np.array(x, dtype=float), 1.0, 0, "newton"))


def test_the_worst_equation_comes_first():
    p = problem(lambda x: [x[0] - 1, x[1] - 5, x[2] - 2], lambda x: np.eye(3), [1.0, 1.0, 1.9])
    facts = facts_at(p, p.start)
    assert [i for i, _ in facts.worst] == [1, 2]
    assert facts.worst[0][1] == pytest.approx(4.0)


def test_a_local_minimum_is_called_that():
    # (x^2 + 1) has its least residual at 0; y follows.
    p = problem(lambda x: [x[0] ** 2 + 1, x[1] - x[0] - 2], lambda x: [[2 * x[0], 0], [-1, 1]], [3.0, 1.0])
    facts = facts_at(p, [0.0, 2.0])
    assert facts.local_minimum
    assert facts.worst[0][0] == 0


def test_away_from_the_minimum_it_is_not():
    p = problem(lambda x: [x[0] ** 2 + 1, x[1] - x[0] - 2], lambda x: [[2 * x[0], 0], [-1, 1]], [3.0, 1.0])
    assert not facts_at(p, [1.0, 3.0]).local_minimum


def test_dependent_equations_and_the_free_combination_are_named():
    # Equations 0 and 2 are proportional; unknowns 0 and 1 enter them only as their sum.
    matrix = np.array([[1.0, 1, 0], [0, 0, 1], [2, 2, 0]])
    p = problem(lambda x: matrix @ x - [1, 1, 3], lambda x: matrix, [1.0, 1.0, 1.0])
    facts = facts_at(p, [0.5, 0.5, 1.0])
    assert {i for i, _ in facts.dependent_equations} == {0, 2}
    assert {i for i, _ in facts.free_unknowns} == {0, 1}
    assert facts.free_unknowns[0][1] == pytest.approx(1.0)
    assert facts.free_unknowns[1][1] == pytest.approx(-1.0)


def test_a_pressed_bound_names_the_side_and_the_equation_that_pushes():
    # x + y = 1 and x - y = 5 want y = -2, the second equation more than the first.
    matrix = np.array([[1.0, 1], [1, -1]])
    p = problem(lambda x: matrix @ x - [1, 5], lambda x: matrix, [1.0, 1.0], [0, 0], [10, 10])
    outcome = solve_block(p)
    assert not outcome.solved
    facts = explain(p, outcome)
    assert [(unknown, side) for unknown, side, _ in facts.pressed] == [(1, -1)]


def test_the_first_equation_without_a_value_is_named():
    p = problem(lambda x: [x[0] - 1, np.log(x[1])], lambda x: [[1, 0], [0, 1 / x[1]]], [1.0, -1.0])
    assert facts_at(p, [1.0, -1.0]).not_finite == 1
