"""The same problem in coordinates that know no bounds: logarithms of the distances to them.

A positive unknown is solved in its logarithm, which is also the cure for unknowns that span many decades.
Equations keep their form and their sizes.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from eqsheet.solve.interior import Interior
from eqsheet.solve.problem import Matrix, Problem, Vector

# Coordinates are logarithms, so one is a factor of e: their typical size.
ONE_FOLD = 1.0


@dataclass(frozen=True)
class InteriorCoordinates:
    """A problem and the way back.

    Attributes
    ----------
    problem : Problem
        In y, without bounds.
    original : Problem
        In x.
    """

    problem: Problem
    original: Problem

    def back(self, y: Vector) -> Vector:
        """x (n,) of y (n,), strictly inside the bounds."""
        return _to_x(self.original, y)

    def there(self, x: Vector) -> Vector:
        """y (n,) of x (n,)."""
        return _to_y(self.original, x)


def interior_coordinates(problem: Problem) -> InteriorCoordinates:
    """The problem in ``ln(x - lower)``, ``-ln(upper - x)``, the logit between two bounds, and x itself
    without any."""
    start = Interior(problem).enter(problem.start)

    def residual(y: Vector) -> Vector:
        return problem.residual(_to_x(problem, y))

    def linearise(y: Vector) -> tuple[Vector, Matrix]:
        values, jacobian = problem.linearise(_to_x(problem, y))
        slopes = _slopes(problem, y)
        if hasattr(jacobian, "tocsc"):
            return values, jacobian.multiply(slopes).tocsc()
        return values, jacobian * slopes

    def sizes(y: Vector) -> Vector:
        return problem.sizes(_to_x(problem, y))

    free = ~(_has_lower(problem) | _has_upper(problem))
    unbounded = np.full(problem.n, np.inf)
    inner = Problem(
        problem.n,
        residual,
        linearise,
        sizes,
        _to_y(problem, start),
        -unbounded,
        unbounded,
        np.where(free, problem.magnitude, ONE_FOLD),
    )
    return InteriorCoordinates(inner, problem)


def _has_lower(problem: Problem) -> NDArray[np.bool_]:
    return np.asarray(problem.lower > -np.inf)


def _has_upper(problem: Problem) -> NDArray[np.bool_]:
    return np.asarray(problem.upper < np.inf)


def _to_y(problem: Problem, x: Vector) -> Vector:
    has_lower, has_upper = _has_lower(problem), _has_upper(problem)
    unit = problem.magnitude
    above = np.log(np.where(has_lower, (x - problem.lower) / unit, 1.0))
    below = np.log(np.where(has_upper, (problem.upper - x) / unit, 1.0))
    return np.where(has_lower | has_upper, above - below, x)


def _to_x(problem: Problem, y: Vector) -> Vector:
    has_lower, has_upper = _has_lower(problem), _has_upper(problem)
    unit = problem.magnitude
    with np.errstate(over="ignore", invalid="ignore"):
        growth = np.exp(np.where(has_lower | has_upper, y, 0.0))
        low = problem.lower + unit * growth
        high = problem.upper - unit / growth
        width = np.where(has_lower & has_upper, problem.upper - problem.lower, 1.0)
        # Measured from the nearer bound, so that a small distance keeps its digits.
        between = np.where(
            y < 0.0, problem.lower + width * (growth / (1.0 + growth)), problem.upper - width / (1.0 + growth)
        )
    x = np.where(has_lower & has_upper, between, np.where(has_lower, low, np.where(has_upper, high, y)))
    x = np.where(x <= problem.lower, np.nextafter(problem.lower, np.inf), x)
    return np.where(x >= problem.upper, np.nextafter(problem.upper, -np.inf), x)


def _slopes(problem: Problem, y: Vector) -> Vector:
    """dx/dy (n,)."""
    has_lower, has_upper = _has_lower(problem), _has_upper(problem)
    unit = problem.magnitude
    with np.errstate(over="ignore", invalid="ignore"):
        growth = np.exp(np.where(has_lower | has_upper, y, 0.0))
        width = np.where(has_lower & has_upper, problem.upper - problem.lower, 1.0)
        between = width * (growth / (1.0 + growth)) / (1.0 + growth)
    return np.where(
        has_lower & has_upper,
        between,
        np.where(has_lower, unit * growth, np.where(has_upper, unit / growth, 1.0)),
    )
