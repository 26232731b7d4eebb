"""Roots with unknowns next to zero, judged without the floor that usually stands for the size of these unknowns.

A root at zero has no relative accuracy, so no unknown counts as smaller than a part of its typical size (`floored`).
That size comes from the start. Where the start was far too large, every number a worksheet is about lies below the
floor, and what is measured by it would pass anywhere. So a point with unknowns below it is no root unless the
equations hold there as the unknowns are, or with those unknowns exactly zero.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from eqsheet.solve.factor import TINY, Factor
from eqsheet.solve.interior import Interior
from eqsheet.solve.problem import Problem, Vector
from eqsheet.solve.termination import (
    ACCEPTABLE,
    ROUNDING,
    ZERO_FLOOR,
    confirmed,
    equation_sizes,
    jacobian_sizes,
    scaled_norm,
)

# Error of an unknown, relative to itself, from which on it is not told from zero.
UNSETTLED = 1e-2
# Corrections for unknowns that the iteration has brought no nearer than their floor.
MOST_CORRECTIONS = 12


def below_floor(problem: Problem, x: Vector) -> NDArray[np.bool_]:
    """Which unknowns (n,) are smaller than the part of their typical size that counts as zero."""
    return np.asarray(np.abs(x) < ZERO_FLOOR * problem.magnitude)


def own_magnitudes(problem: Problem, x: Vector) -> Problem:
    """The problem with each unknown of x as large as it is; those that are zero keep their typical size."""
    return replace(problem, magnitude=np.where(x != 0.0, np.abs(x), problem.magnitude))


def root_as_it_is(problem: Problem, interior: Interior, x: Vector, factor: Factor) -> Vector | None:
    """The root (n,) at x, or with unknowns below their floor set to zero; None where neither is one.

    Parameters
    ----------
    x : ndarray (n,)
        A root if unknowns are measured by their floors.
    factor : Factor
        Of the Jacobian at x or next to it.
    """
    small = below_floor(problem, x)
    for point in _candidates(problem, interior, x, small, factor):
        if _holds(problem, point):
            return point
    return None


def _candidates(
    problem: Problem, interior: Interior, x: Vector, small: NDArray[np.bool_], factor: Factor
) -> Iterator[Vector]:
    """Points to be judged: what settles the small unknowns at more than zero goes first."""
    zero = np.where(small, 0.0, x)
    allowed = bool(((problem.lower <= zero) & (zero <= problem.upper)).all())
    settled = _settled(problem, x, small, factor)
    if allowed and not settled:
        yield zero
    yield _corrected(problem, interior, x, factor)
    if allowed and settled:
        yield zero


def _settled(problem: Problem, x: Vector, small: NDArray[np.bool_], factor: Factor) -> bool:
    """Whether the rounding of the equations leaves the small unknowns a good part of their own size."""
    if factor.singular or not isinstance(factor.inverse, np.ndarray):
        return False
    rounding = ROUNDING * problem.sizes(x) / factor.rows
    error = factor.weights * (np.abs(factor.inverse) @ rounding)
    return bool((error[small] <= UNSETTLED * np.abs(x[small])).all())


def _corrected(problem: Problem, interior: Interior, x: Vector, factor: Factor) -> Vector:
    """The point after corrections, as long as they bring the equations nearer to holding by their own sizes."""
    smallest = _scaled(problem, x)
    for _ in range(MOST_CORRECTIONS):
        if smallest <= ROUNDING:
            break
        step = -factor.weights * factor.solve(problem.residual(x))
        trial, _ = interior.cut(x, step, 0.0)
        scaled = _scaled(problem, trial)
        if not scaled < 0.5 * smallest:
            break
        x, smallest = trial, scaled
    return x


def _scaled(problem: Problem, x: Vector) -> float:
    """Largest residual by the sizes of terms and slopes at x as it is; inf outside the domain."""
    residual, jacobian = problem.linearise(x)
    return scaled_norm(residual, np.fmax(problem.sizes(x), jacobian_sizes(x, jacobian)))


def _holds(problem: Problem, x: Vector) -> bool:
    """Whether x is a root with no unknown taken as larger than it is."""
    bare = replace(problem, magnitude=np.maximum(np.abs(x), TINY))
    residual, jacobian = bare.linearise(x)
    if scaled_norm(residual, equation_sizes(bare, x, jacobian)) > ACCEPTABLE:
        return False
    return confirmed(bare, x, residual, jacobian)
