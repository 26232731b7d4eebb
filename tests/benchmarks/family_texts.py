"""Worksheets with large families, and the same problems solved by hand with numpy and scipy."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy import sparse
from scipy.sparse.linalg import splu

Vector = NDArray[np.float64]


def tridiagonal(n: int) -> str:
    """The boundary value problem T'' = T^3 + 1 on n inner points."""
    return f"""
N = {n}
h = 1/(N+1)
for i in 1..N:
    (T[i+1] - 2*T[i] + T[i-1])/h^2 = T[i]^3 + 1
    T[i] near 0.1
T[0] = 0
T[N+1] = 1
"""


def tridiagonal_by_hand(n: int) -> Vector:
    """The same, (n,)."""
    h = 1.0 / (n + 1)
    off = np.ones(n - 1) / h**2

    def linearise(t: Vector) -> tuple[Vector, Any]:
        left, right = np.concatenate([[0.0], t[:-1]]), np.concatenate([t[1:], [1.0]])
        residual = (right - 2.0 * t + left) / h**2 - t**3 - 1.0
        jacobian = sparse.diags([off, -2.0 / h**2 - 3.0 * t**2, off], [-1, 0, 1], format="csc")
        return residual, jacobian

    return newton_by_hand(linearise, np.full(n, 0.1))


def bratu(n: int) -> str:
    """The two-dimensional Bratu problem, parameter 1, on n by n inner points."""
    return f"""
N = {n}
h = 1/(N+1)
for i in 1..N, j in 1..N:
    u[i-1, j] + u[i+1, j] + u[i, j-1] + u[i, j+1] - 4*u[i, j] + h^2*exp(u[i, j]) = 0
    u[i, j] near 0.05
for i in 1..N:
    u[i, 0] = 0
    u[i, N+1] = 0
    u[0, i] = 0
    u[N+1, i] = 0
"""


def bratu_by_hand(n: int) -> Vector:
    """The same, (n*n,) with the second index fastest."""
    h = 1.0 / (n + 1)
    line = sparse.diags([np.ones(n - 1), -2.0 * np.ones(n), np.ones(n - 1)], [-1, 0, 1])
    laplace = sparse.csc_matrix(sparse.kron(line, sparse.identity(n)) + sparse.kron(sparse.identity(n), line))

    def linearise(u: Vector) -> tuple[Vector, Any]:
        source = h**2 * np.exp(u)
        return laplace @ u + source, sparse.csc_matrix(laplace + sparse.diags(source))

    return newton_by_hand(linearise, np.full(n * n, 0.05))


def newton_by_hand(linearise: Callable[[Vector], tuple[Vector, Any]], start: Vector) -> Vector:
    """What one writes who knows how: undamped Newton with a sparse factorisation."""
    x = start
    for _ in range(50):
        residual, jacobian = linearise(x)
        step = splu(jacobian).solve(residual)
        x = x - step
        if np.abs(step).max() <= 1e-10 * np.abs(x).max():
            break
    return x


def chain(n: int) -> str:
    """Each member in closed form from the one before."""
    return f"""
N = {n}
x[0] = 1
for i in 1..N:
    x[i] = 0.5*x[i-1] + 1/(1 + x[i-1]^2)
"""


def cascade(stages: int) -> str:
    """A counter-current absorber with a curved equilibrium line, stage by stage."""
    return f"""
N = {stages}
L = 1.4 mol/s
V = 1 mol/s
x[0] = 0.001
y[N+1] = 0.12
for i in 1..N:
    L*(x[i] - x[i-1]) = V*(y[i+1] - y[i])
    y[i] = 1.1*x[i]/(1 + 0.1*x[i])
    x[i] near 0.05
    y[i] near 0.05
"""
