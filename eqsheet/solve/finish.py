"""The end of an iteration: the last correction, and the judgement of the point."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from eqsheet.solve.factor import Factor, factorise, smallest_singular_vectors
from eqsheet.solve.interior import Interior
from eqsheet.solve.kind_of_root import DOUBTFUL, kind_of_root
from eqsheet.solve.near_zero import below_floor, own_magnitudes, root_as_it_is
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Matrix, Problem, Vector
from eqsheet.solve.termination import (
    ACCEPTABLE,
    MULTIPLE_AFTER,
    SURE,
    at_rest,
    confirmed,
    equation_sizes,
    jacobian_sizes,
    scaled_norm,
    sizes_really_there,
    underflown,
)
from eqsheet.solve.trail import Trail

# The norm of the damping weighs no unknown against less than this part of its typical size.
WEIGHT_FLOOR = 0.1
# A number times this, less the difference of the two, has the last 16 of its 53 bits rounded away (T. J. Dekker, A
# floating-point technique for extending the available precision, Numer. Math. 18, 1971): eleven digits stay, and one
# step of Newton's method doubles them.
SPLITTER = 2.0**16 + 1.0
# Entries of the inverse of the scaled Jacobian below which a root is a single one: sizes of residuals by the Jacobian
# are no larger than its rows, so nothing is amplified further than this.
SURELY_SINGLE = 0.5 * DOUBTFUL


class _Rest(NamedTuple):
    """A point where an iteration has come to rest.

    Attributes
    ----------
    x, residual : ndarray (n,)
    jacobian : ndarray (n, n)
        At x, or one last correction before it.
    factor : Factor
        Of that Jacobian.
    scaled : float
        Largest residual relative to `sizes`.
    sizes : ndarray (n,)
        ``sum_j |J_ij| |x_j|``.
    """

    x: Vector
    residual: Vector
    jacobian: Matrix
    factor: Factor
    scaled: float
    sizes: Vector


def finish(
    problem: Problem,
    interior: Interior,
    trail: Trail,
    x: Vector,
    residual: Vector,
    jacobian: Matrix,
    factor: Factor,
    slow_steps: int,
) -> Outcome:
    """One more correction if it improves the residuals, then the judgement of the point.

    Parameters
    ----------
    x, residual, jacobian : ndarray
        The point where the iteration has come to rest, residuals (n,) and Jacobian (n, n) there.
    factor : Factor
        Of that Jacobian.
    slow_steps : int
        How many of the last steps near the root were not much shorter than the one before, which betrays a
        multiple root that row scaling hides from the condition number.
    """
    rest = None if hasattr(jacobian, "tocsc") else _from_rounded_point(problem, interior, x)
    if rest is None:
        rest = _corrected(problem, interior, x, residual, jacobian, factor)
    return _concluded(problem, interior, trail, rest, slow_steps)


def finish_plainly(
    problem: Problem, interior: Interior, trail: Trail, x: Vector, slow_steps: int
) -> Outcome | None:
    """As `finish`, None where the point is not as near to a root as a plain way leads."""
    rest = _from_rounded_point(problem, interior, x)
    return None if rest is None else _concluded(problem, interior, trail, rest, slow_steps)


def _from_rounded_point(problem: Problem, interior: Interior, x: Vector) -> _Rest | None:
    """One more correction from x rounded to some digits; None where it does not end at rounding level.

    Ways that meet at a root differ in their last digits. From the rounded point all of them go on alike, so that
    the way, and with it guesses, scales and the order of lines, leaves no trace in the result.
    """
    high = SPLITTER * x
    near = high - (high - x)
    if not interior.holds(near.tolist()):
        return None
    residual, jacobian = problem.linearise(near)
    # The size of the unknowns, none of which counts as less than a part of its typical size.
    factor = factorise(jacobian, np.maximum(np.abs(near), WEIGHT_FLOOR * problem.magnitude))
    polished = near - factor.weights * factor.solve(residual)
    if not interior.holds(polished.tolist()):
        return None
    residual = problem.residual(polished)
    sizes = jacobian_sizes(polished, jacobian)
    scaled = scaled_norm(residual, sizes)
    return _Rest(polished, residual, jacobian, factor, scaled, sizes) if scaled <= SURE else None


def _corrected(
    problem: Problem, interior: Interior, x: Vector, residual: Vector, jacobian: Matrix, factor: Factor
) -> _Rest:
    """One more correction if it improves the residuals."""
    sizes = jacobian_sizes(x, jacobian)
    polished, cut = interior.cut(x, -factor.weights * factor.solve(residual), 0.0)
    if cut < 0 and residual.any():
        improved = problem.residual(polished)
        if scaled_norm(improved, sizes) <= scaled_norm(residual, sizes):
            x, residual = polished, improved
    return _Rest(x, residual, jacobian, factor, scaled_norm(residual, sizes), sizes)


def _concluded(problem: Problem, interior: Interior, trail: Trail, rest: _Rest, slow_steps: int) -> Outcome:
    """The judgement of a point."""
    x, residual, jacobian, factor, scaled, sizes = rest
    sure = trail.contracting and scaled <= SURE
    if not sure:
        sizes = equation_sizes(problem, x, jacobian)
        scaled = scaled_norm(residual, sizes)
    believed = scaled <= ACCEPTABLE and (sure or confirmed(problem, x, residual, jacobian))
    if believed and not sure and below_floor(problem, x).any():
        root = root_as_it_is(problem, interior, x, factor)
        if root is not None:
            own = own_magnitudes(problem, root)
            return _close(own, interior, trail, _rest_at(own, root, jacobian), slow_steps, False)
        believed = False
    if believed:
        return _close(problem, interior, trail, rest._replace(scaled=scaled, sizes=sizes), slow_steps, sure)
    return give_up(problem, interior, trail, -factor.weights * factor.solve(residual), factor)


def _rest_at(problem: Problem, x: Vector, beside: Matrix) -> _Rest:
    """All that is to be known of a point; where slopes are infinite, the Jacobian `beside` it stands for its own."""
    residual, jacobian = problem.linearise(x)
    if not np.isfinite(abs(jacobian).sum()):
        jacobian = beside
    factor = factorise(jacobian, np.maximum(np.abs(x), WEIGHT_FLOOR * problem.magnitude))
    sizes = equation_sizes(problem, x, jacobian)
    return _Rest(x, residual, jacobian, factor, scaled_norm(residual, sizes), sizes)


def _close(
    problem: Problem, interior: Interior, trail: Trail, rest: _Rest, slow_steps: int, sure: bool
) -> Outcome:
    """The outcome at a point where residuals vanish: what kind of root it is, if it is one.

    Parameters
    ----------
    sure : bool
        Whether the residuals are at rounding level and the steps before have shrunk.
    """
    x, residual, jacobian, factor, scaled, sizes = rest
    believed = True
    if factor.singular or not at_rest(problem, x, factor, residual):
        # No small step explains the residuals, so they must be small against terms that are really there.
        believed = scaled_norm(residual, sizes_really_there(problem, x, jacobian)) <= ACCEPTABLE
    if not believed or underflown(problem, x, factor):
        return give_up(problem, interior, trail, -factor.weights * factor.solve(residual), factor)
    single = sure and factor.condition < SURELY_SINGLE and isinstance(factor.inverse, np.ndarray)
    # The condition is that of the matrix equilibrated where it had to be, so the inverse itself is asked too.
    single = single and np.abs(factor.inverse).max() < SURELY_SINGLE
    kind = Status.CONVERGED if single else kind_of_root(problem, x, scaled, sizes, factor)
    if kind is Status.CONVERGED and slow_steps >= MULTIPLE_AFTER:
        kind = Status.DOUBLE
    if kind is Status.CONVERGED:
        return trail.close(kind, x, scaled, interior.resting(x), factor=factor)
    _, left, right = smallest_singular_vectors(factor.matrix)
    return trail.close(kind, x, scaled, interior.resting(x), tuple(left.tolist()), tuple(right.tolist()))


def give_up(problem: Problem, interior: Interior, trail: Trail, step: Vector, factor: Factor) -> Outcome:
    """The outcome where no step helps, at the last point accepted: held by bounds, singular, or stalled."""
    x = trail.best
    residual, jacobian = problem.linearise(x)
    scaled = scaled_norm(residual, equation_sizes(problem, x, jacobian))
    pressed = interior.pressed(x, step)
    if factor.singular:
        _, left, right = smallest_singular_vectors(factor.matrix)
        return trail.close(Status.SINGULAR, x, scaled, pressed, tuple(left.tolist()), tuple(right.tolist()))
    return trail.close(Status.HELD if pressed else Status.STALLED, x, scaled, pressed)
