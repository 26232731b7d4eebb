"""The two-dimensional Bratu problem, -Laplace(u) = lambda*exp(u) on the unit square, u = 0 on its edge.

Critical lambda 6.808124423: A. Mohsen, Computers and Mathematics with Applications 67, 2014, 26-33 (from memory).
There lambda, as a
function of the height in the middle, has its largest value, so that it hardly depends on that height, which is
1.391661 (from memory). The worksheet takes the height as known and lambda as unknown.
"""

from __future__ import annotations

import pytest

import eqsheet

WORKSHEET = """\
N = {intervals}
h = 1/N
for i in 0..N:
    u[i, 0] = 0
    u[i, N] = 0
for j in 1..N-1:
    u[0, j] = 0
    u[N, j] = 0
for i in 1..N-1, j in 1..N-1:
    4*u[i, j] - u[i-1, j] - u[i+1, j] - u[i, j-1] - u[i, j+1] = h^2*lambda*exp(u[i, j])
    u[i, j] near 16*1.4*i*h*(1 - i*h)*j*h*(1 - j*h)
u[{middle}, {middle}] = 1.391661
lambda near 6
"""


def critical(intervals: int) -> float:
    """Lambda on a grid."""
    solution = eqsheet.parse(WORKSHEET.format(intervals=intervals, middle=intervals // 2)).solve()
    assert solution.status == "solved", [d.message for d in solution.diagnostics]
    return solution["lambda"].si


def test_critical_lambda() -> None:
    """Errors of the five-point formula go with h^2, h^4, ..., which extrapolation takes away (Richardson 1911)."""
    coarse, middle, fine = (critical(n) for n in (6, 12, 24))
    first, second = (4 * middle - coarse) / 3, (4 * fine - middle) / 3
    assert (16 * second - first) / 15 == pytest.approx(6.808124423, rel=2e-6)
