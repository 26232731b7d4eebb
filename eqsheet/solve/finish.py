"""The end of an iteration: the last correction, and the judgement of the point."""

from __future__ import annotations

from dataclasses import replace

from eqsheet.solve.factor import Factor, smallest_singular_vectors
from eqsheet.solve.interior import Interior
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
    kind_of_root,
    scaled_norm,
    term_sizes,
    underflown,
)
from eqsheet.solve.trail import Trail


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
    sizes = jacobian_sizes(x, jacobian)
    step = -factor.weights * factor.solve(residual)
    polished, cut = interior.cut(x, step, 0.0)
    if cut < 0 and residual.any():
        improved = problem.residual(polished)
        if scaled_norm(improved, sizes) <= scaled_norm(residual, sizes):
            x, residual = polished, improved
    scaled = scaled_norm(residual, sizes)
    sure = trail.contracting and scaled <= SURE
    if not sure:
        sizes = equation_sizes(problem, x, jacobian)
        scaled = scaled_norm(residual, sizes)
    believed = scaled <= ACCEPTABLE and (sure or confirmed(problem, x, residual, jacobian))
    if believed and (factor.singular or not at_rest(problem, x, factor, residual)):
        # No small step explains the residuals, so they must be small against terms that are really there.
        believed = scaled_norm(residual, term_sizes(problem, x, jacobian)) <= ACCEPTABLE
    if believed and underflown(problem, x, factor):
        believed = False
    if not believed:
        return give_up(problem, interior, trail, step, factor)
    kind = kind_of_root(problem, x, scaled, sizes, factor)
    if kind is Status.CONVERGED and slow_steps >= MULTIPLE_AFTER:
        kind = Status.DOUBLE
    if kind is Status.CONVERGED:
        found = trail.close(kind, x, scaled, interior.resting(x))
        return replace(found, factor=factor) if hasattr(jacobian, "tocsc") else found
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
