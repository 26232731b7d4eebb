"""What kind of root a point is: an isolated one, a double one, or one of a continuum."""

from __future__ import annotations

from collections.abc import Iterator
from math import inf

import numpy as np

from eqsheet.solve.factor import TINY, Factor, factorise, pseudo_inverse, smallest_singular_vectors
from eqsheet.solve.order_of_growth import NOISE, grows_by_a_power
from eqsheet.solve.outcome import Status
from eqsheet.solve.problem import Matrix, Problem, Vector
from eqsheet.solve.termination import (
    NEIGHBOURHOOD,
    PROBE,
    ROUNDING,
    SUSPECT_CONDITION,
    ZERO_FLOOR,
    equation_sizes,
    floored,
    scaled_norm,
)

# Sensitivity from which a root is looked at again with the Jacobian at the point itself, of which the last one, one
# correction before it, may know only half the digits.
DOUBTFUL = 1e4
# Order of the largest block that is examined so: it takes dense matrices. A larger one is not believed
# where it is singular.
LARGEST_EXAMINED = 300
# How far off, relative to the size of the unknowns, a root is looked at whose residuals grow too slowly to be told.
FAR = 0.5
# Gauss-Newton steps towards the roots at that distance: few where they converge quadratically, many where an edge
# of the domain lets them come only by halves.
STEPS = 40
# A step that leaves the domain is halved so often.
HALVINGS = 8


def kind_of_root(problem: Problem, x: Vector, scaled: float, sizes: Vector, factor: Factor) -> Status:
    """Whether a point with vanishing residuals is an isolated root, a double one, or one of a continuum.

    Parameters
    ----------
    x : ndarray (n,)
        Strictly inside the bounds.
    scaled : float
        Largest scaled residual there.
    sizes : ndarray (n,)
        What the residuals are judged against.
    factor : Factor
        The Jacobian at x, or one last correction before it.

    Notes
    -----
    Looks along the right singular vector v of the smallest singular value. At distances t and 2t along it the
    residual is made as small as the other directions allow; what is left grows with t^2 at a double root
    and with t at a regular one, and stays at rounding level on a continuum. Where it is lost in rounding at 2t, as with
    t^3 or more, it is followed further off.
    """
    if not _sensitive(factor, _with_floors(problem, x, sizes, factor), DOUBTFUL):
        return Status.CONVERGED
    if problem.n > LARGEST_EXAMINED:
        return Status.CONTINUUM if factor.singular else Status.CONVERGED
    _, jacobian = problem.linearise(x)
    jacobian = _dense(jacobian)
    if np.isfinite(jacobian).all():
        factor = factorise(jacobian, factor.weights)
    # Against the terms: next to a multiple root the slopes of an equation are as small as its value.
    sizes = equation_sizes(problem, x, _dense(factor.matrix) * factor.rows[:, None] / factor.weights)
    if not _sensitive(factor, sizes, SUSPECT_CONDITION):
        return Status.CONVERGED
    reach = np.maximum(np.abs(x), NEIGHBOURHOOD * problem.magnitude)
    units = np.where(sizes > 0.0, sizes, 1.0)
    _, _, direction = smallest_singular_vectors(
        _dense(factor.matrix) * (reach / factor.weights) * (factor.rows / units)[:, None]
    )
    left_over = [least_residuals(problem, x, reach, units, direction, t) for t in (PROBE, 2.0 * PROBE)]
    near, far = (min(pair) for pair in left_over)
    noise = max(NOISE * ROUNDING, 8.0 * scaled)
    if far <= noise:
        distances = _distances(problem, x, reach, direction)
        further = (min(least_residuals(problem, x, reach, units, direction, t)) for t in distances)
        return Status.DOUBLE if grows_by_a_power(further, noise) else Status.CONTINUUM
    if far > 3.0 * near or factor.singular:
        return Status.DOUBLE
    return Status.CONVERGED


def _distances(problem: Problem, x: Vector, reach: Vector, direction: Vector) -> Iterator[float]:
    """Distances that double from that of the examination up to a good part of the unknowns' sizes."""
    moved = reach * np.abs(direction)
    farthest = FAR * float((np.maximum(np.abs(x), problem.magnitude) / np.maximum(moved, TINY)).min())
    distance = 2.0 * PROBE
    while distance <= farthest:
        yield distance
        distance *= 2.0


def _with_floors(problem: Problem, x: Vector, sizes: Vector, factor: Factor) -> Vector:
    """The sizes (n,) with unknowns next to zero taken as large as counts as zero."""
    floor = ZERO_FLOOR * problem.magnitude
    if (np.abs(x) >= floor).all():
        return sizes
    off = abs(factor.matrix) @ (floored(x, problem) / factor.weights)
    return np.asarray(np.maximum(sizes, off * factor.rows))


def _sensitive(factor: Factor, sizes: Vector, limit: float) -> bool:
    """Whether a relative error of an equation, in terms of its size, may move an unknown by `limit` times as much."""
    if factor.singular:
        return True
    if isinstance(factor.inverse, np.ndarray):
        return not np.max(np.abs(factor.inverse * (sizes / factor.rows))) < limit
    return not factor.condition < limit


def least_residuals(
    problem: Problem, x: Vector, reach: Vector, units: Vector, direction: Vector, distance: float
) -> tuple[float, float]:
    """Least scaled residual at `distance` to either side, by Gauss-Newton steps across `direction`."""
    found = []
    for side in (distance, -distance):
        point = next(_points_there(problem, x, reach, units, direction, side), None)
        found.append(inf if point is None else _descended(problem, point, reach, units, direction))
    return found[0], found[1]


def _points_there(
    problem: Problem, x: Vector, reach: Vector, units: Vector, direction: Vector, side: float
) -> Iterator[Vector]:
    """Points inside the domain about the one at `side` along `direction`, that one first.

    Where a curve of roots is an edge of the domain and bends, its tangent leaves the domain, by about the square of
    the distance; the slopes of the equations lead back.
    """
    ahead = x + side * reach * direction
    if _value_at(problem, ahead, units) < inf:
        yield ahead
        return
    _, jacobian = problem.linearise(x)
    rows = _dense(jacobian) * reach / units[:, None]
    lengths = np.linalg.norm(rows, axis=1)
    for row, length in zip(rows, lengths):
        for aside in (4.0 * side * side, -4.0 * side * side) if 0.0 < length < inf else ():
            point = ahead + aside * reach * row / length
            if _value_at(problem, point, units) < inf:
                yield point


def _descended(problem: Problem, point: Vector, reach: Vector, units: Vector, direction: Vector) -> float:
    """Least scaled residual that Gauss-Newton steps across `direction` come to from a point of the domain."""
    across = np.eye(problem.n) - np.outer(direction, direction)
    smallest = inf
    for _ in range(STEPS):
        residual, jacobian = problem.linearise(point)
        jacobian = _dense(jacobian)
        value = _value_at(problem, point, units)
        if not (value < smallest and np.isfinite(jacobian).all()):
            break
        smallest = value
        matrix = (jacobian * reach / units[:, None]) @ across
        step = -reach * (across @ (pseudo_inverse(matrix) @ (residual / units)))
        for _ in range(HALVINGS):
            if _value_at(problem, point + step, units) < inf:
                break
            step = 0.5 * step
        point = point + step
    return smallest


def _value_at(problem: Problem, point: Vector, units: Vector) -> float:
    """Largest scaled residual (inf outside the domain or the bounds)."""
    if not ((problem.lower < point) & (point < problem.upper)).all():
        return inf
    return scaled_norm(problem.residual(point), units)


def _dense(matrix: Matrix) -> Vector:
    return np.asarray(matrix.toarray() if hasattr(matrix, "toarray") else matrix)
