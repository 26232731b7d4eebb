"""The afresh judgement: residuals against sizes and rounding, digits against the condition."""

import numpy as np
import pytest

from eqsheet.solve.verdict import judge

EPS = 2.0**-53


def verdict(matrix, x, residual, sizes=None, bounds=None):
    matrix, x = np.array(matrix, dtype=float), np.array(x, dtype=float)
    n = len(x)
    return judge(
        np.array(residual, dtype=float),
        np.abs(matrix) @ np.abs(x) if sizes is None else np.array(sizes, dtype=float),
        np.zeros(n) if bounds is None else np.array(bounds, dtype=float),
        matrix,
        x,
        np.abs(x),
    )


def test_exact_solution_has_all_digits():
    v = verdict([[2, 0], [0, 3]], [1, 1], [0, 0])
    assert v.solved
    assert v.digits == (15, 15)


def test_a_residual_of_a_millionth_is_not_solved():
    v = verdict([[2, 0], [0, 3]], [1, 1], [0, 1e-6])
    assert not v.solved
    assert v.worst == 1
    assert v.residual == pytest.approx(1e-6 / 3)


def test_a_residual_within_its_running_error_bound_is_solved():
    assert verdict([[1]], [1], [1e-7], sizes=[1], bounds=[2e-7]).solved
    assert not verdict([[1]], [1], [1e-7], sizes=[1], bounds=[0.5e-7]).solved


def test_digits_fall_with_the_condition():
    # Two lines at an angle of 1e-8: an error of 1e-16 moves their crossing by 1e-8.
    v = verdict([[1, 1], [1, 1 + 1e-8]], [1, 1], [0, 0])
    assert v.condition > 1e7
    assert 6 <= min(v.digits) <= 8


def test_the_forward_error_bounds_the_true_error():
    # Hilbert matrix of order 6 with solution of ones, right side rounded: compare with the exact solve of
    # sympy.
    import sympy

    n = 6
    hilbert = np.array([[1 / (i + j + 1) for j in range(n)] for i in range(n)])
    right = hilbert @ np.ones(n)
    x = np.linalg.solve(hilbert, right)
    exact = sympy.Matrix(n, n, lambda i, j: sympy.Rational(float(hilbert[i, j]))).LUsolve(
        sympy.Matrix([sympy.Rational(float(r)) for r in right])
    )
    true_error = np.array([abs(float(sympy.Rational(float(a)) - b)) for a, b in zip(x, exact)])
    v = judge(hilbert @ x - right, right, EPS * n * right, hilbert, x, np.ones(n))
    assert v.solved
    assert (true_error <= v.forward_error).all()


def test_a_singular_jacobian_leaves_no_digits():
    v = verdict([[1, 1], [1, 1]], [1, 1], [0, 0])
    assert v.digits == (0, 0)
    assert v.condition == np.inf


def test_a_residual_that_is_not_finite_is_not_solved():
    v = verdict([[1, 0], [0, 1]], [1, 1], [0, np.nan])
    assert not v.solved
    assert v.worst == 1


@pytest.mark.parametrize("scale", [1e-6, 1e6])
def test_units_do_not_matter(scale):
    matrix = np.array([[1.0, 2.0], [3.0, -1.0]])
    x = np.array([0.3, 7.0])
    residual = np.array([1e-16, 3e-15])
    before = judge(residual, np.abs(matrix) @ x, residual, matrix, x, x)
    scaled = matrix / [scale, 1.0]
    after = judge(
        residual * [1, scale],
        (np.abs(matrix) @ x) * [1, scale],
        residual * [1, scale],
        scaled * [[1], [scale]],
        x * [scale, 1],
        x * [scale, 1],
    )
    assert after.solved == before.solved
    assert after.digits == before.digits
    assert after.condition == pytest.approx(before.condition)
