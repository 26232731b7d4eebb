"""Edges of the domain near by, from starts over six decades; every root checked at 50 digits."""

import numpy as np
import pytest
from domain_edges import EDGES
from plain_problem import plain_problem
from solver_figures import RESIDUAL, SINGLE, distance_to_root, residual_at_50_digits

from eqsheet.solve.ladder import solve_block
from eqsheet.solve.trail import Budget

STARTS = 13


def starts(size):
    """Starts over six decades round the order of magnitude, each unknown by a factor of its own."""
    generator = np.random.default_rng(0)
    if len(size) == 1:
        return np.array(size) * 10.0 ** np.linspace(-3, 3, STARTS)[:, None]
    return np.array(size) * 10.0 ** generator.uniform(-3, 3, (STARTS, len(size)))


@pytest.mark.parametrize("edge", EDGES, ids=[e.name for e in EDGES])
def test_solved_from_every_start(edge):
    for start in starts(edge.size):
        problem = plain_problem(edge.formulas, start, lower=edge.lower)
        outcome = solve_block(problem, Budget(seconds=60.0))
        assert outcome.solved, (start, outcome.full)
        assert residual_at_50_digits(edge.formulas, outcome.x, problem) <= RESIDUAL
        if not outcome.on_bound:
            assert distance_to_root(edge.formulas, outcome.x) <= SINGLE


@pytest.mark.parametrize("start", [1.0, 10.0, 100.0, 1000.0])
def test_the_logarithm_and_the_line(start):
    """ln(x) + x/50 = 0.5 has one root: x = 50 W(exp(0.5)/50) with Lambert's W."""
    from scipy.special import lambertw

    formulas = EDGES[1].formulas
    outcome = solve_block(plain_problem(formulas, [start]))
    assert outcome.x[0] == pytest.approx(50 * lambertw(np.exp(0.5) / 50).real, rel=1e-14)
