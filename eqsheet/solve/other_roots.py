"""Further roots of a block: changes of sign for one unknown, deflation from many starts for several."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import replace
from time import perf_counter

import numpy as np

from eqsheet.solve.bracketing import sign_changes
from eqsheet.solve.chandrupatla import chandrupatla
from eqsheet.solve.deflation import deflated
from eqsheet.solve.interior import Interior
from eqsheet.solve.interior_coordinates import interior_coordinates
from eqsheet.solve.moved_start import moved_start
from eqsheet.solve.newton import newton
from eqsheet.solve.outcome import Outcome
from eqsheet.solve.problem import Problem, ScalarProblem, Vector, as_scalar
from eqsheet.solve.scalar_newton import scalar_newton
from eqsheet.solve.spread_starts import scaled_starts, spread_starts
from eqsheet.solve.trail import Budget, Trail

# Spread starts tried besides the start itself.
STARTS = 64
# Steps from one start.
SHORT = 60
# Two roots closer than this, relative to their size, are one.
SAME = 1e-6
DEFAULT_BUDGET = Budget(SHORT, 5.0)


def other_roots(
    problem: Problem,
    known: Sequence[Vector],
    most: int = 8,
    budget: Budget = DEFAULT_BUDGET,
    starts: int = STARTS,
) -> tuple[Outcome, ...]:
    """Up to `most` roots that are none of `known`, in the order they are found; deterministic.

    An empty answer is no proof that there are none.

    Parameters
    ----------
    known : sequence of ndarray (n,)
    budget : Budget
        Iterations from one start, seconds for all.
    starts : int
        Spread starts, a power of two or 0, besides the guess and its multiples.
    """
    if problem.n == 1:
        return scalar_roots(as_scalar(problem), [float(x[0]) for x in known], most, budget)
    found: list[Outcome] = []
    deadline = perf_counter() + budget.seconds
    # Roots often lie near each other, so the neighbourhood of each comes before the spread starts.
    near = [problem.start, *known]
    spread = itertools.chain(scaled_starts(problem), spread_starts(problem, starts))
    with np.errstate(all="ignore"):
        while len(found) < most and perf_counter() < deadline:
            start = moved_start(replace(problem, start=near.pop(0))) if near else next(spread, None)
            if start is None:
                break
            roots = [*known, *(outcome.x for outcome in found)]
            outcome = _another(problem, roots, start, budget, deadline)
            if outcome is not None:
                found.append(outcome)
                near.append(outcome.x)
    return tuple(found)


def scalar_roots(
    problem: ScalarProblem, known: Sequence[float], most: int = 8, budget: Budget = DEFAULT_BUDGET
) -> tuple[Outcome, ...]:
    """As `other_roots` for one unknown: the roots behind the changes of sign, nearest to the start first.

    A root of its own changes the sign, so that samples close to either side of those known show a further one even
    where it is next to them.
    """
    found: list[Outcome] = []
    trail = Trail("bracketing", problem.start, budget)
    more = True
    while more and len(found) < most and not trail.spent:
        # Once again with what is beside the roots just found.
        roots = [*known, *(float(other.x[0]) for other in found)]
        new = _behind_changes(problem, roots, most - len(found), budget, trail)
        found += new
        more = bool(new)
    return tuple(found)


def _behind_changes(
    problem: ScalarProblem, known: Sequence[float], most: int, budget: Budget, trail: Trail
) -> list[Outcome]:
    """Roots that are none of `known`, from one walk over the samples."""
    found: list[Outcome] = []
    for bracket in sign_changes(problem, problem.start, trail, _beside(problem, known)):
        if len(found) >= most or trail.spent:
            break
        x, _ = chandrupatla(problem.residual, bracket).better
        outcome = scalar_newton(problem, x, Trail("bracketing", x, budget, trail.deadline))
        roots = [*known, *(float(other.x[0]) for other in found)]
        if outcome.solved and all(_differ(outcome.x, np.array([root]), problem.magnitude) for root in roots):
            found.append(outcome)
    return found


def _beside(problem: ScalarProblem, roots: Sequence[float]) -> list[float]:
    """Points to either side of each root, from its own size down to where two roots would be one."""
    halvings = range(1, 20)
    return [
        root + side * max(abs(root), problem.magnitude) * 2.0**-k
        for root in roots
        for k in halvings
        for side in (-1.0, 1.0)
    ]


def _another(
    problem: Problem, roots: Sequence[Vector], start: Vector, budget: Budget, deadline: float
) -> Outcome | None:
    """A root that is none of `roots`, from one start: in the unknowns, else in logarithms."""
    interior = Interior(problem)
    point = interior.enter(start)
    rest = deflated(problem, roots)
    candidates = [newton(rest, point, Trail("deflation", point, budget, deadline)).x]
    if interior.bounded:
        coordinates = interior_coordinates(rest)
        y = coordinates.there(point)
        inner = newton(coordinates.problem, y, Trail("deflation", y, budget, deadline))
        candidates.append(coordinates.back(inner.x))
    for candidate in candidates:
        outcome = newton(problem, interior.enter(candidate), Trail("deflation", candidate, budget, deadline))
        if outcome.solved and all(_differ(outcome.x, root, problem.magnitude) for root in roots):
            return outcome
    return None


def _differ(a: Vector, b: Vector, magnitude: Vector | float) -> bool:
    """Whether two points are different roots."""
    size = np.maximum(np.maximum(np.abs(a), np.abs(b)), magnitude)
    return bool((np.abs(a - b) > SAME * size).any())
