"""Large problems of Moré, Garbow and Hillstrom (ACM TOMS 7, 1981, 17-41) as families.

Numbers 28 (discrete boundary value, p. 26) and 30 (Broyden tridiagonal, p. 27), from their standard starts. The second
calculation is Newton's method on a banded matrix (scipy), written here from the published formulas.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from scipy.linalg import solve_banded

import eqsheet

Vector = np.ndarray[Any, Any]

BROYDEN = """\
n = {n}
x[0] = 0
x[n+1] = 0
for i in 1..n:
    (3 - 2*x[i])*x[i] - x[i-1] - 2*x[i+1] + 1 = 0
    x[i] near -1
"""

BOUNDARY_VALUE = """\
n = {n}
h = 1/(n + 1)
x[0] = 0
x[n+1] = 0
for i in 1..n:
    t[i] = i*h
    2*x[i] - x[i-1] - x[i+1] + h^2*(x[i] + t[i] + 1)^3/2 = 0
    x[i] near t[i]*(t[i] - 1)
"""


def newton(residual: Callable[[Vector], tuple[Vector, Vector]], x: Vector) -> Vector:
    """Newton's method with a tridiagonal Jacobian in scipy's diagonal form."""
    for _ in range(60):
        value, bands = residual(x)
        step = solve_banded((1, 1), bands, value)
        x = x - step
        if abs(step).max() <= 1e-15 * max(1.0, abs(x).max()):
            break
    return x


def broyden(n: int) -> Vector:
    def residual(x: Vector) -> tuple[Vector, Vector]:
        wide = np.concatenate(([0.0], x, [0.0]))
        bands = np.zeros((3, n))
        bands[0, 1:], bands[1], bands[2, :-1] = -2, 3 - 4 * x, -1
        return (3 - 2 * x) * x - wide[:-2] - 2 * wide[2:] + 1, bands

    return newton(residual, np.full(n, -1.0))


def boundary_value(n: int) -> Vector:
    h = 1 / (n + 1)
    t = np.arange(1, n + 1) * h

    def residual(x: Vector) -> tuple[Vector, Vector]:
        wide = np.concatenate(([0.0], x, [0.0]))
        bands = np.zeros((3, n))
        bands[0, 1:], bands[1], bands[2, :-1] = -1, 2 + 1.5 * h**2 * (x + t + 1) ** 2, -1
        return 2 * x - wide[:-2] - wide[2:] + h**2 * (x + t + 1) ** 3 / 2, bands

    return newton(residual, t * (t - 1))


@pytest.mark.parametrize(
    ("text", "reference", "n"),
    [
        (BROYDEN, broyden, 10),
        (BROYDEN, broyden, 500),
        (BOUNDARY_VALUE, boundary_value, 10),
        (BOUNDARY_VALUE, boundary_value, 500),
    ],
    ids=["broyden 10", "broyden 500", "boundary value 10", "boundary value 500"],
)
def test_family_against_banded_newton(text: str, reference: Callable[[int], Vector], n: int) -> None:
    solution = eqsheet.parse(text.format(n=n)).solve()
    assert solution.status == "solved", [d.message for d in solution.diagnostics]
    found = np.array([solution[f"x[{i}]"].si for i in range(1, n + 1)])
    expected = reference(n)
    assert abs(found - expected).max() <= 1e-10 * abs(expected).max()
