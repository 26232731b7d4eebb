"""The square problems of Moré, Garbow and Hillstrom, with their published starts.

Source: J. J. Moré, B. S. Garbow, K. E. Hillstrom, Testing unconstrained optimization software, ACM
Transactions on Mathematical Software 7 (1981), 17-41, section 3; numbers below are the paper's. Problems
with m >= n free are taken with m = n. Problem 11 is printed there with a misprint (its own solution (50,
25, 1.5) is none); it is taken as ``exp(-|y_i - x_2|^x_3 / x_1) - t_i``, which has that solution.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass


@dataclass(frozen=True)
class Published:
    """One problem.

    Attributes
    ----------
    number : int
        In the paper.
    name : str
    formulas : callable
        (list of n numbers, module of functions) to the list of n residuals.
    start : tuple of float
        Published start.
    has_root : bool
        Whether the residuals vanish somewhere, by the paper.
    """

    number: int
    name: str
    formulas: Callable
    start: tuple[float, ...]
    has_root: bool = True


def rosenbrock(x, m):
    return [10 * (x[1] - x[0] ** 2), 1 - x[0]]


def freudenstein_roth(x, m):
    return [
        -13 + x[0] + ((5 - x[1]) * x[1] - 2) * x[1],
        -29 + x[0] + ((x[1] + 1) * x[1] - 14) * x[1],
    ]


def powell_badly_scaled(x, m):
    return [10000 * x[0] * x[1] - 1, m.exp(-x[0]) + m.exp(-x[1]) - 10001 / (0 * x[0] + 10000)]


def helical_valley(x, m):
    turn = m.atan(x[1] / x[0]) / (2 * m.pi) + (0.5 if real(x[0]) < 0 else 0)
    return [10 * (x[2] - 10 * turn), 10 * (m.sqrt(x[0] ** 2 + x[1] ** 2) - 1), x[2]]


def real(number):
    """The real part, also of numbers of another kind and of arrays, which hold one real part many times."""
    part = getattr(number, "real", getattr(number, "value", number))
    return part.flat[0] if hasattr(part, "flat") else part


def size_of(number):
    """|number|, analytic on either side of zero."""
    return -number if real(number) < 0 else number


def gulf(x, m):
    residuals = []
    for i in range(1, 4):
        t = (0 * x[0] + i) / 100
        y = 25 + (-50 * m.log(t)) ** ((0 * x[0] + 2) / 3)
        residuals.append(m.exp(-(size_of(y - x[1]) ** x[2]) / x[0]) - t)
    return residuals


def box_3d(x, m):
    residuals = []
    for i in range(1, 4):
        t = (0 * x[0] + i) / 10
        residuals.append(m.exp(-t * x[0]) - m.exp(-t * x[1]) - x[2] * (m.exp(-t) - m.exp(-10 * t)))
    return residuals


def powell_singular(x, m):
    residuals = []
    for k in range(0, len(x), 4):
        a, b, c, d = x[k : k + 4]
        residuals += [
            a + 10 * b,
            m.sqrt(0 * a + 5) * (c - d),
            (b - 2 * c) ** 2,
            m.sqrt(0 * a + 10) * (a - d) ** 2,
        ]
    return residuals


def biggs_exp6(x, m):
    residuals = []
    for i in range(1, 7):
        t = (0 * x[0] + i) / 10
        y = m.exp(-t) - 5 * m.exp(-10 * t) + 3 * m.exp(-4 * t)
        residuals.append(x[2] * m.exp(-t * x[0]) - x[3] * m.exp(-t * x[1]) + x[5] * m.exp(-t * x[4]) - y)
    return residuals


def extended_rosenbrock(x, m):
    residuals = []
    for k in range(0, len(x), 2):
        residuals += rosenbrock(x[k : k + 2], m)
    return residuals


def trigonometric(x, m):
    n = len(x)
    cosines = [m.cos(v) for v in x]
    total = sum(cosines)
    return [n - total + (i + 1) * (1 - cosines[i]) - m.sin(x[i]) for i in range(n)]


def brown_almost_linear(x, m):
    n = len(x)
    total = sum(x)
    product = 1
    for v in x:
        product = product * v
    return [x[i] + total - (n + 1) for i in range(n - 1)] + [product - 1]


def discrete_boundary_value(x, m):
    n = len(x)
    h = (0 * x[0] + 1) / (n + 1)
    padded = [0, *x, 0]
    return [
        2 * padded[i] - padded[i - 1] - padded[i + 1] + h**2 * (padded[i] + i * h + 1) ** 3 / 2
        for i in range(1, n + 1)
    ]


def discrete_integral(x, m):
    n = len(x)
    h = (0 * x[0] + 1) / (n + 1)
    cubes = [(x[j] + (j + 1) * h + 1) ** 3 for j in range(n)]
    residuals = []
    for i in range(n):
        t = (i + 1) * h
        low = sum((j + 1) * h * cubes[j] for j in range(i + 1))
        high = sum((1 - (j + 1) * h) * cubes[j] for j in range(i + 1, n))
        residuals.append(x[i] + h * ((1 - t) * low + t * high) / 2)
    return residuals


def broyden_tridiagonal(x, m):
    padded = [0, *x, 0]
    return [
        (3 - 2 * padded[i]) * padded[i] - padded[i - 1] - 2 * padded[i + 1] + 1 for i in range(1, len(x) + 1)
    ]


def broyden_banded(x, m):
    n = len(x)
    residuals = []
    for i in range(n):
        band = [j for j in range(max(0, i - 5), min(n, i + 2)) if j != i]
        residuals.append(x[i] * (2 + 5 * x[i] ** 2) + 1 - sum(x[j] * (1 + x[j]) for j in band))
    return residuals


def linear_full_rank(x, m):
    n = len(x)
    total = sum(x)
    return [x[i] - 2 * total / n - 1 for i in range(n)]


def linear_rank_one(x, m):
    n = len(x)
    total = sum((j + 1) * x[j] for j in range(n))
    return [(i + 1) * total - 1 for i in range(n)]


def linear_rank_one_zeros(x, m):
    n = len(x)
    total = sum((j + 1) * x[j] for j in range(1, n - 1))
    return [0 * x[0] - 1] + [i * total - 1 for i in range(1, n - 1)] + [0 * x[0] - 1]


def chebyquad(x, m):
    n = len(x)
    sums = [0] * n
    for v in x:
        y = 2 * v - 1
        before, now = 1, y
        for i in range(n):
            sums[i] = sums[i] + now
            before, now = now, 2 * y * now - before
    residuals = []
    for i in range(1, n + 1):
        integral = 0 if i % 2 else (0 * x[0] - 1) / (i * i - 1)
        residuals.append(sums[i - 1] / n - integral)
    return residuals


def equal_parts(n):
    """(1, 2, ..., n) / (n + 1)."""
    return tuple((j + 1) / (n + 1) for j in range(n))


PROBLEMS = (
    Published(1, "Rosenbrock", rosenbrock, (-1.2, 1)),
    Published(2, "Freudenstein and Roth", freudenstein_roth, (0.5, -2)),
    Published(3, "Powell badly scaled", powell_badly_scaled, (0, 1)),
    Published(7, "Helical valley", helical_valley, (-1, 0, 0)),
    Published(11, "Gulf", gulf, (5, 2.5, 0.15)),
    Published(12, "Box three-dimensional", box_3d, (0, 10, 20)),
    Published(13, "Powell singular", powell_singular, (3, -1, 0, 1)),
    Published(18, "Biggs EXP6", biggs_exp6, (1, 2, 1, 1, 1, 1)),
    Published(21, "Extended Rosenbrock", extended_rosenbrock, (-1.2, 1) * 5),
    Published(22, "Extended Powell singular", powell_singular, (3, -1, 0, 1) * 3),
    Published(26, "Trigonometric", trigonometric, (0.1,) * 10),
    Published(27, "Brown almost-linear", brown_almost_linear, (0.5,) * 10),
    Published(
        28,
        "Discrete boundary value",
        discrete_boundary_value,
        tuple(t * (t - 1) for t in equal_parts(10)),
    ),
    Published(
        29, "Discrete integral equation", discrete_integral, tuple(t * (t - 1) for t in equal_parts(10))
    ),
    Published(30, "Broyden tridiagonal", broyden_tridiagonal, (-1,) * 10),
    Published(31, "Broyden banded", broyden_banded, (-1,) * 10),
    Published(32, "Linear, full rank", linear_full_rank, (1,) * 10),
    Published(33, "Linear, rank 1", linear_rank_one, (1,) * 10, has_root=False),
    Published(34, "Linear, rank 1, zeros", linear_rank_one_zeros, (1,) * 10, has_root=False),
    Published(35, "Chebyquad", chebyquad, equal_parts(8), has_root=False),
)
