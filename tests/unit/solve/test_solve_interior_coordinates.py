"""Coordinates without bounds: there and back, derivatives, and roots over many decades."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from solve_problems import problem

from eqsheet.solve.interior_coordinates import interior_coordinates
from eqsheet.solve.logarithmic import logarithmic_newton
from eqsheet.solve.outcome import Status
from eqsheet.solve.trail import Budget, Trail

LOWER = [0.0, -np.inf, 2.0, -np.inf]
UPPER = [np.inf, 5.0, 3.0, np.inf]


def four():
    """Four unknowns: bounded below, above, on both sides, and not at all."""
    return problem(lambda x: x**2 - 1, lambda x: np.diag(2 * x), [0.5, 4.0, 2.5, 7.0], LOWER, UPPER)


@given(st.tuples(*(st.floats(-30, 30) for _ in range(4))))
def test_there_and_back(y):
    coordinates = interior_coordinates(four())
    y = np.array(y)
    x = coordinates.back(y)
    assert (x > LOWER).all()
    assert (x < UPPER).all()
    again = coordinates.back(coordinates.there(x))
    assert again == pytest.approx(x, rel=1e-12)


@given(st.tuples(*(st.floats(-5, 5) for _ in range(4))))
def test_derivatives_are_those_of_the_new_coordinates(y):
    inner = interior_coordinates(four()).problem
    y = np.array(y)
    jacobian = inner.linearise(y)[1]
    h = 1e-6
    for j in range(4):
        shift = h * np.eye(4)[j]
        difference = (inner.residual(y + shift) - inner.residual(y - shift)) / (2 * h)
        assert jacobian[:, j] == pytest.approx(difference, rel=1e-5, abs=1e-7)


def test_a_root_decades_away_is_reached_in_a_few_steps():
    # Ionic products over eight decades from starts of one; by hand x0^2 = 1e-14 - 1e-15.
    p = problem(
        lambda x: [x[0] * x[1] - 1e-14, x[1] - x[0] - 1e-6 * x[2], x[2] * x[0] - 1e-9],
        lambda x: [[x[1], x[0], 0], [-1, 1, -1e-6], [x[2], 0, x[0]]],
        [1.0, 1.0, 1.0],
        [0.0, 0.0, 0.0],
    )
    outcome = logarithmic_newton(p, p.start, Trail("logarithmic newton", p.start, Budget()))
    assert outcome.status is Status.CONVERGED
    assert outcome.x[0] == pytest.approx(9e-15**0.5, rel=1e-12)
    assert outcome.x[0] * outcome.x[1] == pytest.approx(1e-14, rel=1e-13)
    assert outcome.x[2] * outcome.x[0] == pytest.approx(1e-9, rel=1e-13)
