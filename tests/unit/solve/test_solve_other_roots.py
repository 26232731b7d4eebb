"""Further roots: by changes of sign, and by deflation."""

import math

import numpy as np
import pytest
from solve_problems import problem, scalar

from eqsheet.solve.deflation import deflated
from eqsheet.solve.other_roots import other_roots, scalar_roots


def test_all_roots_of_a_cubic_but_the_known_one():
    p = scalar(lambda x: (x - 1) * (x - 2) * (x - 4), lambda x: 3 * x * x - 14 * x + 14, 1.1, 0.0, 10.0)
    assert sorted(float(o.x[0]) for o in scalar_roots(p, [1.0])) == pytest.approx([2.0, 4.0], rel=1e-14)


def test_poles_are_no_roots():
    p = scalar(math.tan, lambda x: 1 + math.tan(x) ** 2, 3.0, 1.0, 9.0)
    assert sorted(float(o.x[0]) for o in scalar_roots(p, [])) == pytest.approx(
        [math.pi, 2 * math.pi], rel=1e-14
    )


def swapped(lower=None, upper=None):
    return problem(
        lambda x: [x[0] * x[1] - 6, x[0] + x[1] - 5],
        lambda x: [[x[1], x[0]], [1, 1]],
        [1.0, 4.5],
        lower,
        upper,
    )


def test_the_other_root_of_a_quadratic_system():
    found = other_roots(swapped(), [np.array([2.0, 3.0])])
    assert len(found) == 1
    assert found[0].x == pytest.approx([3.0, 2.0], rel=1e-14)


def test_roots_outside_the_bounds_are_not_found():
    assert other_roots(swapped([0, 0], [2.5, 10]), [np.array([2.0, 3.0])]) == ()


def test_nine_roots_of_two_cubics():
    # x^3 = 3 x and y^3 = 3 y: every pair of 0 and +-sqrt(3).
    p = problem(
        lambda x: [x[0] ** 3 - 3 * x[0], x[1] ** 3 - 3 * x[1]],
        lambda x: [[3 * x[0] ** 2 - 3, 0], [0, 3 * x[1] ** 2 - 3]],
        [0.2, 0.3],
        magnitude=[1.0, 1.0],
    )
    found = {tuple(np.round(o.x / math.sqrt(3)).astype(int)) for o in other_roots(p, [], most=20)}
    assert found == {(i, j) for i in (-1, 0, 1) for j in (-1, 0, 1)}


def test_the_same_roots_come_in_the_same_order():
    first = [o.x.tolist() for o in other_roots(swapped(), [])]
    assert first == [o.x.tolist() for o in other_roots(swapped(), [])]
    assert len(first) == 2


def test_the_deflated_jacobian_is_the_derivative():
    p = deflated(swapped(), [np.array([2.0, 3.0]), np.array([3.0, 2.0])])
    x = np.array([1.3, 4.4])
    jacobian = p.linearise(x)[1]
    for j in range(2):
        shift = 1e-6 * np.eye(2)[j]
        difference = (p.residual(x + shift) - p.residual(x - shift)) / 2e-6
        assert jacobian[:, j] == pytest.approx(difference, rel=1e-6)


def test_the_deflated_equations_have_no_value_at_the_known_root():
    with np.errstate(invalid="ignore"):
        at_the_root = deflated(swapped(), [np.array([2.0, 3.0])]).residual(np.array([2.0, 3.0]))
    assert not np.isfinite(at_the_root).any()


@pytest.mark.parametrize("gap", [0.1, 0.01, 1e-4])
def test_a_root_next_to_the_known_one_is_found(gap):
    """Both lie between two samples that are taken from a start far off."""
    p = scalar(lambda x: (x - 1.0) * (x - 1.0 - gap), lambda x: 2 * x - 2.0 - gap, 1.77)
    for known, other in ((1.0, 1.0 + gap), (1.0 + gap, 1.0)):
        (found,) = scalar_roots(p, [known])
        assert float(found.x[0]) == pytest.approx(other, rel=1e-11)


def test_roots_next_to_those_found_on_the_way_are_found_too():
    p = scalar(
        lambda x: (x - 1.0) * (x - 1.01) * (x - 1.02),
        lambda x: (x - 1.0) * (x - 1.01) + (x - 1.0) * (x - 1.02) + (x - 1.01) * (x - 1.02),
        5.0,
    )
    assert sorted(float(o.x[0]) for o in scalar_roots(p, [1.02])) == pytest.approx([1.0, 1.01], rel=1e-10)
