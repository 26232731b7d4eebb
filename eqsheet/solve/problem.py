"""What a block is to the solver: callables, a start, bounds and typical sizes."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

Vector: TypeAlias = NDArray[np.float64]
# Dense (n, n) array, or a scipy.sparse matrix of that shape for large blocks. scipy is not imported for its
# sake.
Matrix: TypeAlias = Any
Floats: TypeAlias = Sequence[float]


@dataclass(frozen=True, slots=True)
class WrittenStep:
    """The Newton step of a small block as code of its own in plain floats, with the same pivots every time.

    Both may raise ArithmeticError or ValueError, outside the domain or at a pivot that is zero.

    Attributes
    ----------
    step : callable
        x, n floats, and `arguments` to the residuals r, the step ``-J^-1 r``, and the numbers of the elimination.
    correction : callable
        Residuals, an empty tuple and the numbers of the elimination to the step of the same Jacobian.
    arguments : sequence of float
        What else the equations take.
    """

    step: Callable[[Floats, Floats], tuple[Floats, Floats, Floats]]
    correction: Callable[[Floats, tuple[()], Floats], Floats]
    arguments: Floats = ()


@dataclass(frozen=True)
class Problem:
    """n simultaneous equations in n unknowns.

    Attributes
    ----------
    n : int
        Number of equations and of unknowns.
    residual : callable
        x (n,) to the residuals (n,), left minus right side, unscaled. Outside its domain an equation gives
        nan or inf; it never raises.
    linearise : callable
        x (n,) to residuals (n,) and Jacobian (n, n), row per equation; the Jacobian may be a scipy.sparse
        matrix.
    sizes : callable
        x (n,) to the size (n,) of each equation at x: that of its largest term, in the unit of the
        residual; zero where nothing is known.
    start : ndarray (n,)
    lower, upper : ndarray (n,)
        Bounds, infinite where there are none; ``lower < upper``. Points are evaluated strictly between them.
    magnitude : ndarray (n,)
        Typical size of each unknown, > 0, in the unknown's own unit. Results do not depend on the units
        chosen only if this does.
    written : WrittenStep or None
        The Newton step in plain floats, for a block that is solved again and again; None where there is none.
    """

    n: int
    residual: Callable[[Vector], Vector]
    linearise: Callable[[Vector], tuple[Vector, Matrix]]
    sizes: Callable[[Vector], Vector]
    start: Vector
    lower: Vector
    upper: Vector
    magnitude: Vector
    written: WrittenStep | None = None


@dataclass(frozen=True, slots=True)
class ScalarProblem:
    """One equation in one unknown, in plain floats.

    Attributes
    ----------
    residual : callable
        x to the residual; nan or inf outside its domain, never raises.
    linearise : callable
        x to (residual, derivative).
    size : callable
        x to the size of the largest term of the equation, >= 0.
    start, lower, upper, magnitude : float
        As in `Problem`.
    """

    residual: Callable[[float], float]
    linearise: Callable[[float], tuple[float, float]]
    size: Callable[[float], float]
    start: float
    lower: float
    upper: float
    magnitude: float


def as_scalar(problem: Problem) -> ScalarProblem:
    """The same problem in plain floats.

    Raises
    ------
    ValueError
        If the problem has more than one unknown.
    """
    if problem.n != 1:
        raise ValueError(f"one unknown expected, not {problem.n}")

    def residual(x: float) -> float:
        return float(problem.residual(np.array([x]))[0])

    def linearise(x: float) -> tuple[float, float]:
        values, jacobian = problem.linearise(np.array([x]))
        return float(values[0]), float(jacobian[0, 0])

    def size(x: float) -> float:
        return float(problem.sizes(np.array([x]))[0])

    return ScalarProblem(
        residual,
        linearise,
        size,
        float(problem.start[0]),
        float(problem.lower[0]),
        float(problem.upper[0]),
        float(problem.magnitude[0]),
    )
