"""Units do not matter to the solver: rescaled unknowns and equations give the same iterates to rounding."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from eqsheet.solve.ladder import solve_block
from eqsheet.solve.problem import Problem


def combustion_like(x):
    """Balances and equilibria of the kind chemists write, with a root near (0.1, 3, 20)."""
    a, b, c = x
    residual = np.array([a * b - 0.3, a + b + c - 23.1, c - 66.7 * a * b])
    jacobian = np.array([[b, a, 0.0], [1.0, 1.0, 1.0], [-66.7 * b, -66.7 * a, 1.0]])
    return residual, jacobian


def logarithmic(x):
    """A pump and a valve: leaves the domain of the logarithm on the way."""
    q, h, k = x
    residual = np.array([h - 40.0 + 3.0 * q**2, np.log(k) + q - 2.0, h - k * q])
    jacobian = np.array([[6.0 * q, 1.0, 0.0], [1.0, 0.0, 1.0 / k], [-k, 1.0, -q]])
    return residual, jacobian


def rescaled(function, start, unknowns, equations):
    """The same problem with unknowns and equations in other units."""

    def linearise(y):
        with np.errstate(all="ignore"):
            residual, jacobian = function(y / unknowns)
        return residual * equations, jacobian * equations[:, None] / unknowns

    n = len(start)
    return Problem(
        n,
        lambda y: linearise(y)[0],
        linearise,
        lambda y: np.zeros(n),
        start * unknowns,
        np.zeros(n),
        np.full(n, np.inf),
        start * unknowns,
    )


@pytest.mark.parametrize("function", [combustion_like, logarithmic])
@settings(max_examples=60, deadline=None)
@given(
    powers=st.lists(st.integers(-6, 6), min_size=6, max_size=6),
    start=st.lists(st.floats(0.01, 100.0), min_size=3, max_size=3),
)
def test_rescaling_changes_nothing(function, powers, start):
    start = np.array(start)
    unknowns, equations = 10.0 ** np.array(powers[:3]), 10.0 ** np.array(powers[3:])
    plain = solve_block(rescaled(function, start, np.ones(3), np.ones(3)))
    other = solve_block(rescaled(function, start, unknowns, equations))
    assert other.solved == plain.solved
    if plain.solved:
        assert other.x / unknowns == pytest.approx(plain.x, rel=1e-10)
        assert abs(other.iterations - plain.iterations) <= 1
