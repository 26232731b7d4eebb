"""The neutral entry point: one method after the other until a block is solved; every attempt is kept."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from time import perf_counter
from typing import TypeVar

import numpy as np

from eqsheet.solve.bracketing import bracketing
from eqsheet.solve.newton import newton
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Problem, ScalarProblem, Vector, as_scalar
from eqsheet.solve.scalar_newton import scalar_newton
from eqsheet.solve.termination import floored, scaled_norm
from eqsheet.solve.trail import Budget, Rung, Trail
from eqsheet.solve.written_newton import written_newton

P = TypeVar("P", Problem, ScalarProblem)
S = TypeVar("S", Vector, float)
# How telling a failure is, most telling first; all others come after these.
_TELLING = {Status.CONTINUUM: 0, Status.MINIMUM: 1, Status.SINGULAR: 1, Status.POLE: 1}

DEFAULT_BUDGET = Budget()


def solve_block(
    problem: Problem,
    budget: Budget = DEFAULT_BUDGET,
    own_rungs: Sequence[tuple[str, Rung]] = (),
    hopeless: Callable[[], bool] | None = None,
) -> Outcome:
    """The solution of a block, or the most telling of the failed attempts with all others in its `attempts`.

    Damped Newton first; the rungs of `fallbacks` only where it fails. Never raises for numerical reasons;
    KeyboardInterrupt ends with status INTERRUPTED and the best point so far.

    Parameters
    ----------
    own_rungs : sequence of (name, rung)
        What the caller, who knows more of the equations, can try between Newton and the fallbacks.
    hopeless : callable, optional
        Whether the caller can prove that there is no root within the bounds; asked only where Newton has failed,
        and spares the search for one. The best point is still looked for.
    """
    if problem.n == 1:
        return solve_scalar(as_scalar(problem), budget)
    deadline = perf_counter() + budget.seconds
    # Overflow and invalid operations are ordinary events here: they shorten the step.
    with np.errstate(all="ignore"):
        trail = Trail("newton", problem.start, budget, deadline)
        attempts = [_attempt(_newton, problem, problem.start, trail)]
        # Through a singular Jacobian rounding has chosen the way: a start without symmetry says what counts.
        if trail.singular or not _final(attempts[0], deadline):
            from eqsheet.solve.fallbacks import LAST, fallbacks
            from eqsheet.solve.moved_start import moved_start

            start = moved_start(problem)
            for name, rung in fallbacks(problem, own_rungs, hopeless):
                if _on_a_curve(attempts) and name != LAST:
                    # From here all ways lead onto it; only other starts may lead past it.
                    continue
                attempts.append(_attempt(rung, problem, start, Trail(name, start, budget, deadline)))
                if _final(attempts[-1], deadline) or attempts[0].solved:
                    break
        found = _concluded(attempts, lambda: _distance_from_zero(problem))
        if _came_to_bound(found):
            from eqsheet.solve.other_roots import other_roots

            return _inner_if_any(found, lambda: other_roots(problem, [found.x], 2, budget, starts=0))
    return found


def first_rungs(
    problem: Problem,
    budget: Budget = DEFAULT_BUDGET,
    own_rungs: Sequence[tuple[str, Rung]] = (),
    hopeless: Callable[[], bool] | None = None,
) -> Outcome:
    """As `solve_block` by what costs little: damped Newton from the start, and from the start moved.

    For many problems of which few have a root; `own_rungs` and `hopeless` are not asked.
    """
    if problem.n == 1:
        return solve_scalar(as_scalar(problem), budget)
    deadline = perf_counter() + budget.seconds
    with np.errstate(all="ignore"):
        attempts = [
            _attempt(_newton, problem, problem.start, Trail("newton", problem.start, budget, deadline))
        ]
        if not _final(attempts[0], deadline):
            from eqsheet.solve.moved_start import moved_start

            start = moved_start(problem)
            trail = Trail("newton, start moved", start, budget, deadline)
            attempts.append(_attempt(newton, problem, start, trail))
        return _concluded(attempts, lambda: _distance_from_zero(problem))


def solve_scalar(problem: ScalarProblem, budget: Budget = DEFAULT_BUDGET) -> Outcome:
    """As `solve_block` for one equation in plain floats: safeguarded Newton, then bracketing."""
    deadline = perf_counter() + budget.seconds
    start = problem.start
    attempts = [_attempt(scalar_newton, problem, start, Trail("newton", start, budget, deadline))]
    if not _final(attempts[0], deadline):
        trail = Trail("bracketing", start, budget, deadline)
        attempts.append(_attempt(bracketing, problem, start, trail))
    found = _concluded(attempts, lambda: lambda outcome: abs(problem.residual(float(outcome.x[0]))))
    if _came_to_bound(found):
        from eqsheet.solve.other_roots import scalar_roots

        return _inner_if_any(found, lambda: scalar_roots(problem, [float(found.x[0])], 2, budget))
    return found


def _on_a_curve(attempts: Sequence[Outcome]) -> bool:
    """Whether more than one attempt has ended on a continuum of roots."""
    return sum(attempt.status is Status.CONTINUUM for attempt in attempts) > 1


def _came_to_bound(outcome: Outcome) -> bool:
    """Whether the root rests on a bound and the start did not: a start on it is a solution found before."""
    return outcome.solved and bool(outcome.on_bound) and outcome.iterations > 0


def _inner_if_any(on_bound: Outcome, others: Callable[[], tuple[Outcome, ...]]) -> Outcome:
    """The first of the other roots that lies between the bounds, else the one that rests on a bound.

    Many equations have a root at zero that nobody asks for: no flow, no concentration.
    """
    try:
        found = others()
    except KeyboardInterrupt:
        return on_bound
    inner = next((o for o in found if o.status is Status.CONVERGED and not o.on_bound), None)
    return on_bound if inner is None else replace(inner, attempts=(*on_bound.attempts, on_bound))


def _newton(problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """Damped Newton: in plain floats where the step is written out and the way is plain, else with arrays."""
    if problem.written is not None:
        own = Trail(trail.method, start, trail.budget, trail.deadline)
        found = written_newton(problem, problem.written, start, own)
        if found is not None:
            return found
    return newton(problem, start, trail)


def _attempt(rung: Callable[[P, S, Trail], Outcome], problem: P, start: S, trail: Trail) -> Outcome:
    """The outcome of one rung; an interrupt keeps the point it had reached."""
    try:
        return rung(problem, start, trail)
    except KeyboardInterrupt:
        return trail.close(Status.INTERRUPTED)
    except np.linalg.LinAlgError:
        # A singular value iteration of the library that did not converge: no more can be had from this rung.
        return trail.close(Status.STALLED)


def _concluded(attempts: list[Outcome], measure: Callable[[], Callable[[Outcome], float]]) -> Outcome:
    """The outcome that stands for all: the last solved one, else that of the best point.

    A continuum of roots tells more than any point that is no root, and a minimum more than a point on the
    way.
    """
    last = attempts[-1]
    if len(attempts) == 1:
        return last
    solved = [attempt for attempt in attempts if attempt.solved]
    if last.status is Status.INTERRUPTED:
        chosen = last
    elif solved:
        chosen = solved[-1]
    else:
        distance = measure()
        chosen = min(attempts, key=lambda a: (_TELLING.get(a.status, 2), _or_infinity(distance(a))))
    return replace(
        chosen,
        attempts=tuple(attempt for attempt in attempts if attempt is not chosen),
    )


def _distance_from_zero(problem: Problem) -> Callable[[Outcome], float]:
    """A measure by which points of different attempts can be compared: the residuals in units of one point.

    Scaled residuals will not do: far out, where the terms are large, they are small everywhere.
    """
    _, jacobian = problem.linearise(problem.start)
    sizes = np.fmax(problem.sizes(problem.start), abs(jacobian) @ floored(problem.start, problem))
    units = np.where(np.isfinite(sizes) & (sizes > 0.0), sizes, 1.0)

    def distance(outcome: Outcome) -> float:
        return scaled_norm(problem.residual(outcome.x), units)

    return distance


def _or_infinity(value: float) -> float:
    """The value, inf for nan."""
    return value if value == value else np.inf


def _final(outcome: Outcome, deadline: float) -> bool:
    """Whether no further rung is to be tried."""
    return outcome.solved or outcome.status is Status.INTERRUPTED or perf_counter() > deadline
