"""The neutral entry point: one method after the other until a block is solved; every attempt is kept."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from time import perf_counter
from typing import TypeAlias

from eqsheet.solve.bracketing import bracketing
from eqsheet.solve.newton import newton
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Problem, ScalarProblem, Vector, as_scalar
from eqsheet.solve.scalar_newton import scalar_newton
from eqsheet.solve.trail import Budget, Trail

Rung: TypeAlias = Callable[[Problem, Vector, Trail], Outcome]
ScalarRung: TypeAlias = Callable[[ScalarProblem, float, Trail], Outcome]

# In the order of cost: a rung is only reached where those before it have failed.
RUNGS: tuple[tuple[str, Rung], ...] = (("newton", newton),)
SCALAR_RUNGS: tuple[tuple[str, ScalarRung], ...] = (("newton", scalar_newton), ("bracketing", bracketing))

DEFAULT_BUDGET = Budget()


def solve_block(problem: Problem, budget: Budget = DEFAULT_BUDGET) -> Outcome:
    """The solution of a block, or the most telling of the failed attempts with all others in its `attempts`.

    Never raises for numerical reasons; KeyboardInterrupt ends with status INTERRUPTED and the best point so
    far.
    """
    if problem.n == 1:
        return solve_scalar(as_scalar(problem), budget)
    attempts: list[Outcome] = []
    deadline = perf_counter() + budget.seconds
    for name, rung in RUNGS:
        trail = Trail(name, problem.start, budget, deadline)
        try:
            outcome = rung(problem, problem.start, trail)
        except KeyboardInterrupt:
            outcome = trail.close(Status.INTERRUPTED)
        attempts.append(outcome)
        if _final(outcome, deadline):
            break
    return concluded(attempts)


def solve_scalar(problem: ScalarProblem, budget: Budget = DEFAULT_BUDGET) -> Outcome:
    """As `solve_block` for one equation in plain floats: safeguarded Newton, then bracketing."""
    attempts: list[Outcome] = []
    deadline = perf_counter() + budget.seconds
    for name, rung in SCALAR_RUNGS:
        trail = Trail(name, problem.start, budget, deadline)
        try:
            outcome = rung(problem, problem.start, trail)
        except KeyboardInterrupt:
            outcome = trail.close(Status.INTERRUPTED)
        attempts.append(outcome)
        if _final(outcome, deadline):
            break
    return concluded(attempts)


def concluded(attempts: list[Outcome]) -> Outcome:
    """The outcome that stands for all: the last if solved or interrupted, else that of the least residual."""
    last = attempts[-1]
    if len(attempts) == 1:
        return last
    if last.solved or last.status is Status.INTERRUPTED:
        chosen = last
    else:
        chosen = min(attempts, key=lambda attempt: attempt.residual)
    return replace(
        chosen,
        iterations=sum(attempt.iterations for attempt in attempts),
        attempts=tuple(attempt for attempt in attempts if attempt is not chosen),
    )


def _final(outcome: Outcome, deadline: float) -> bool:
    """Whether no further rung is to be tried."""
    return outcome.solved or outcome.status is Status.INTERRUPTED or perf_counter() > deadline
