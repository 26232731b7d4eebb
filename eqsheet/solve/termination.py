"""The stopping test: how large residuals and steps are.

Residuals are judged against the size of their equation: that of its terms, or ``sum_j |J_ij| |x_j|``, what
a relative change of the unknowns makes of it, so that a residual of a few roundings of it is explained by
the rounding of the unknowns alone (a backward error in the sense of Rigal and Gaches, J. ACM 14, 1967, row
by row). Where only that second size makes a residual small, the equation must also behave about the point
as its derivatives foretell: beside a pole, or where it oscillates faster than doubles resolve, it does not.
At a root at zero all terms vanish; there the terms count as large as they are a little way off
(`ZERO_FLOOR`). Steps are judged against the unknowns. All of these lose their unit that way.
"""

from __future__ import annotations

from math import inf

import numpy as np

from eqsheet.solve.factor import TINY, Factor
from eqsheet.solve.problem import Matrix, Problem, Vector

# Scaled residual that rounding alone explains: four units in the last place, as an equation of a few terms
# makes.
ROUNDING = 2.0**-50
# Scaled residual up to which a point where the steps have come to rest counts as a root: equations lose
# digits inside (powers, exponentials), but not five of them.
ACCEPTABLE = 1e-11
# Scaled step at which an iteration may be called at rest. Without the residual test it proves nothing.
AT_REST = 1e-9
# Scaled residual below which the sizes of the terms are asked for.
NEARLY_ZERO = 1e-6
# Scaled residual, measured by the Jacobian alone, of a contracting iteration that needs no further evidence.
SURE = 16.0 * ROUNDING
# Ratio of successive steps, at rest, above which they are noise: at an m-fold root Newton's steps shrink by
# 1 - 1/m.
SLOW = 0.9
# Ratio of two steps near a root from which on it may be multiple (1/2 at a double root, nearly 0 at a
# single one), and after how many of them in a row it is.
MULTIPLE = 0.4
MULTIPLE_AFTER = 3
# Relative displacement at which a residual must have grown for a root to be believed: beyond the distance
# from which a pole can deceive, which is `ACCEPTABLE`, and no further than needed, since near an edge of
# the domain slopes change soon.
BESIDE = 2.0**-30
# An unknown is never judged against less than this part of its typical size: a root at zero has no relative
# accuracy.
ZERO_FLOOR = 2.0**-20
# Condition from which a root is examined for being double or not isolated: 1/sqrt(eps) is where a double
# root stops.
SUSPECT_CONDITION = 1e7
# How far from the root that examination looks, relative to the size of the unknowns.
PROBE = 2.0**-12
# An unknown near zero is moved by that part of at least this part of its typical size.
NEIGHBOURHOOD = 2.0**-10


def floored(x: Vector, problem: Problem) -> Vector:
    """|x| (n,), never below the part of the typical size that counts as zero."""
    return np.maximum(np.abs(x), ZERO_FLOOR * problem.magnitude)


def jacobian_sizes(x: Vector, jacobian: Matrix) -> Vector:
    """``sum_j |J_ij| |x_j|`` (n,)."""
    return np.asarray(abs(jacobian) @ np.abs(x))


def known_sizes(problem: Problem, x: Vector) -> Vector:
    """Size of the terms of each equation (n,), where x is nearly zero that of a point a little way off."""
    sizes = problem.sizes(x)
    floor = floored(x, problem)
    if (floor > np.abs(x)).any():
        off = np.copysign(floor, x)
        sizes = np.fmax(sizes, problem.sizes(np.where((problem.lower < off) & (off < problem.upper), off, x)))
    return np.asarray(sizes)


def term_sizes(problem: Problem, x: Vector, jacobian: Matrix) -> Vector:
    """As `known_sizes`, with the Jacobian in place of those that the problem does not know."""
    sizes = known_sizes(problem, x)
    return np.asarray(np.where(sizes > 0.0, sizes, abs(jacobian) @ floored(x, problem)))


def sizes_really_there(problem: Problem, x: Vector, jacobian: Matrix) -> Vector:
    """Size of the terms of each equation at x itself (n,); only where all have vanished that of `term_sizes`.

    Vanished is what is next to nothing against the terms at the start. Of ``x y = 1`` far out on one axis the product
    is zero as far as y goes, but the one is still there.
    """
    own = problem.sizes(x)
    usual = problem.sizes(problem.start)
    # Written so that sizes that are not known count as vanished.
    there = own > ZERO_FLOOR * usual
    return np.asarray(np.where(there, own, term_sizes(problem, x, jacobian)))


def equation_sizes(problem: Problem, x: Vector, jacobian: Matrix) -> Vector:
    """What each residual is judged against (n,), >= 0: size of its terms or change with the unknowns."""
    return np.asarray(np.fmax(term_sizes(problem, x, jacobian), jacobian_sizes(x, jacobian)))


def last_step_due(rest: float, shrinkage: float) -> bool:
    """Whether after one more step of scaled size `rest` nothing is left to gain in double precision.

    `shrinkage` is the size of the step relative to the one before. Newton's steps shrink quadratically, so
    the step after the next one has the size ``rest * shrinkage**2``.
    """
    return rest <= ROUNDING or (shrinkage < 0.1 and rest * shrinkage * shrinkage <= ROUNDING)


def at_rest(problem: Problem, x: Vector, factor: Factor, residual: Vector) -> bool:
    """Whether the Newton step from x is negligible in every unknown."""
    step = np.abs(factor.solve(residual))
    if step.max() <= ZERO_FLOOR * AT_REST:
        # No unknown counts as less than that part of its weight.
        return True
    return bool((step * factor.weights <= AT_REST * floored(x, problem)).all())


def scaled_norm(residual: Vector, sizes: Vector) -> float:
    """Largest residual relative to its size; inf where one is not finite, or not zero while its size is."""
    largest = float((np.abs(residual) / np.maximum(sizes, TINY)).max())
    # Written so that nan counts as inf.
    return largest if largest < inf else inf


def residual_by_slopes(problem: Problem, x: Vector, residual: Vector, jacobian: Matrix) -> float:
    """Largest scaled residual at x by the Jacobian alone; at rounding level only if x itself explains it."""
    slopes = abs(jacobian)
    scaled = scaled_norm(residual, slopes @ floored(x, problem))
    if scaled > ROUNDING:
        return scaled
    as_it_is = scaled_norm(residual, slopes @ np.abs(x))
    return as_it_is if as_it_is <= ROUNDING else 2.0 * ROUNDING


def residual_at(problem: Problem, x: Vector, residual: Vector, jacobian: Matrix) -> float:
    """Largest scaled residual at x. The sizes of the terms are dear, and asked for only where they decide."""
    scaled = residual_by_slopes(problem, x, residual, jacobian)
    if ROUNDING < scaled < NEARLY_ZERO:
        return scaled_norm(residual, equation_sizes(problem, x, jacobian))
    return scaled


def measured(problem: Problem, x: Vector) -> float:
    """Largest scaled residual at any point x, evaluated afresh; inf outside the domain."""
    residual, jacobian = problem.linearise(x)
    return scaled_norm(residual, equation_sizes(problem, x, jacobian))


def confirmed(problem: Problem, x: Vector, residual: Vector, jacobian: Matrix) -> bool:
    """Whether residuals that are not small against terms grow away from x as their derivatives foretell.

    Beside a pole ``|J| |x|`` is larger than everything else, and a huge residual would pass for rounding;
    but there it falls with the distance. So does the size of what has the pole inside, as ``tan(x)`` has.
    """
    if not residual.any():
        return True
    sizes = np.minimum(known_sizes(problem, x), known_sizes(problem, _a_little_off(problem, x)))
    doubtful = np.flatnonzero(~(np.abs(residual) <= ACCEPTABLE * sizes))
    return all(_grows_away(problem, x, residual, jacobian, int(i)) for i in doubtful)


def _a_little_off(problem: Problem, x: Vector) -> Vector:
    """A point further from zero in every unknown, or nearer where bounds want it."""
    shift = np.copysign(BESIDE * floored(x, problem), x)
    return np.where((problem.lower < x + shift) & (x + shift < problem.upper), x + shift, x - shift)


def underflown(problem: Problem, x: Vector, factor: Factor) -> bool:
    """Whether an equation has no terms and no slopes left at x: too small for doubles, and no zero.

    ``exp(-1e9)`` is such a one. A problem that knows no sizes at all is given the benefit of the doubt.
    """
    if factor.rows.min() > TINY:
        return False
    empty = factor.rows <= TINY
    sizes = known_sizes(problem, x)
    return bool((sizes[empty] == 0.0).any() and (sizes > 0.0).any())


def _grows_away(problem: Problem, x: Vector, residual: Vector, jacobian: Matrix, equation: int) -> bool:
    """Whether a residual grows at least linearly a little way off along its own gradient."""
    row = jacobian[equation]
    row = row.toarray().ravel() if hasattr(row, "toarray") else row
    shift = BESIDE * floored(x, problem) * np.sign(row)
    foretold = float(row @ shift)
    for displaced in (x + shift, x - shift):
        if ((problem.lower < displaced) & (displaced < problem.upper)).all():
            moved = problem.residual(displaced)[equation]
            if abs(moved) < inf:
                return bool(abs(moved) > max(abs(residual[equation]), 0.25 * foretold))
    return False
