"""Units do not matter: published problems, unknowns and equations rescaled by random powers of ten."""

import numpy as np
import pytest
from more_garbow_hillstrom import PROBLEMS
from plain_problem import plain_problem
from solver_figures import PATIENT

from eqsheet.solve.ladder import solve_block
from eqsheet.solve.outcome import Status
from eqsheet.solve.problem import Problem

# Largest power of ten, either way.
POWERS = 6


def rescaled(problem, unknowns, equations):
    """The same problem with unknowns and equations in units of their own."""

    def linearise(y):
        residual, jacobian = problem.linearise(y / unknowns)
        return residual * equations, jacobian * equations[:, None] / unknowns

    return Problem(
        problem.n,
        lambda y: problem.residual(y / unknowns) * equations,
        linearise,
        lambda y: problem.sizes(y / unknowns) * equations,
        problem.start * unknowns,
        problem.lower * unknowns,
        problem.upper * unknowns,
        problem.magnitude * unknowns,
    )


@pytest.mark.parametrize("factor", [1, 10])
@pytest.mark.parametrize("published", PROBLEMS, ids=[p.name for p in PROBLEMS])
def test_same_set_solved_same_values_same_iterations(published, factor):
    start = factor * np.array(published.start, dtype=float)
    problem = plain_problem(published.formulas, start, magnitude=np.maximum(np.abs(start), 1.0))
    plain = solve_block(problem, PATIENT)
    generator = np.random.default_rng(published.number)
    unknowns = 10.0 ** generator.integers(-POWERS, POWERS + 1, problem.n)
    equations = 10.0 ** generator.integers(-POWERS, POWERS + 1, problem.n)
    other = solve_block(rescaled(problem, unknowns, equations), PATIENT)
    assert other.solved == plain.solved
    if plain.solved:
        # A double root is known to half the digits only.
        near = 1e-6 if plain.status is Status.DOUBLE else 1e-10
        assert other.x / unknowns == pytest.approx(plain.x, rel=near, abs=near * 1e-3)
        assert other.method == plain.method
        assert abs(other.iterations - plain.iterations) <= 1
