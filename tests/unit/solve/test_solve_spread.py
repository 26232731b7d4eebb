"""Spread and moved starts: inside the bounds, deterministic, without symmetry."""

import numpy as np
import pytest
from solve_problems import problem

from eqsheet.solve.ladder import solve_block
from eqsheet.solve.moved_start import MOVE, moved_start
from eqsheet.solve.spread import spread
from eqsheet.solve.spread_starts import spread_starts
from eqsheet.solve.trail import Budget, Trail


def boxed(lower, upper, start):
    n = len(start)
    return problem(lambda x: x, lambda x: np.eye(n), start, lower, upper)


def test_starts_are_strictly_inside_and_the_same_at_every_run():
    p = boxed([0.0, -np.inf, 1e-6, -2.0, -np.inf], [np.inf, 3.0, 1e6, 5.0, np.inf], [1.0, 1.0, 1.0, 1.0, 1.0])
    first = np.array(list(spread_starts(p, 64)))
    assert (first > p.lower).all()
    assert (first < p.upper).all()
    assert (first == np.array(list(spread_starts(p, 64)))).all()


def test_ranges_of_many_decades_are_covered_decade_by_decade():
    p = boxed([1e-6, 0.0], [1e6, 1.0], [1.0, 0.5])
    exponents = np.log10(np.array(list(spread_starts(p, 64)))[:, 0])
    # Sobol's sequence puts as many points into either half.
    assert abs(int((exponents < 0).sum()) - 32) <= 1
    assert exponents.min() < -5
    assert exponents.max() > 5


def test_unbounded_unknowns_are_spread_to_both_sides():
    p = boxed([-np.inf, -np.inf], [np.inf, np.inf], [10.0, 1.0])
    values = np.array(list(spread_starts(p, 64)))[:, 0]
    assert values.min() < -100
    assert values.max() > 100
    assert (np.abs(values) < 10).sum() >= 24


def test_the_moved_start_breaks_every_tie():
    p = boxed([0.0] * 6, [np.inf] * 6, [2.0] * 6)
    moved = moved_start(p)
    assert len(set(moved.tolist())) == 6
    assert np.abs(moved - 2.0).max() <= 2.0 * MOVE


def test_a_root_far_from_the_start_is_found():
    # Newton from 1 runs off along the tail of x exp(-x); the root near 0.1 and 3.6 needs another start.
    p = problem(
        lambda x: [x[0] * np.exp(-x[0]) - 0.0975, x[1] - x[0]],
        lambda x: [[(1 - x[0]) * np.exp(-x[0]), 0], [-1, 1]],
        [40.0, 40.0],
        [0.0, 0.0],
    )
    outcome = spread(p, p.start, Trail("spread starts", p.start, Budget()))
    assert outcome.solved
    assert outcome.x[0] * np.exp(-outcome.x[0]) == pytest.approx(0.0975, rel=1e-14)


def test_equal_starts_of_exchangeable_unknowns_are_solved():
    p = problem(lambda x: [x[0] * x[1] - 6, x[0] + x[1] - 5], lambda x: [[x[1], x[0]], [1, 1]], [1.0, 1.0])
    outcome = solve_block(p)
    assert sorted(outcome.x) == pytest.approx([2.0, 3.0], rel=1e-14)
    assert outcome.attempts
