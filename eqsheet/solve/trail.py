"""The running record of a solver call: steps, best point, and what is left of the budget."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from math import inf
from time import perf_counter
from typing import Any, TypeAlias

import numpy as np

from eqsheet.solve.factor import Factor
from eqsheet.solve.outcome import Iteration, Outcome, Status
from eqsheet.solve.problem import Problem, Vector


@dataclass(frozen=True, slots=True)
class Budget:
    """What one block may cost.

    Attributes
    ----------
    iterations : int
        Accepted steps of one attempt.
    seconds : float
        Wall time of all attempts together.
    """

    iterations: int = 200
    seconds: float = 10.0


class Trail:
    """Written by one solver call as it goes; read when it ends or is interrupted.

    Attributes
    ----------
    method : str
    best : ndarray (n,) or float
        The point to fall back on: the last one accepted. By the test of its method it is better than all
        before, which scaled residuals do not show when the scale itself falls.
    best_residual : float
    contracting : bool
        Whether the last steps have shrunk, so that the point is being approached; false at the start.
    singular : bool
        Whether a step was taken from a point with a singular Jacobian, in a direction that rounding decides.
    """

    __slots__ = (
        "begun",
        "best",
        "best_residual",
        "budget",
        "contracting",
        "deadline",
        "method",
        "singular",
        "steps",
        "way",
    )

    def __init__(self, method: str, start: Vector | float, budget: Budget, deadline: float = inf) -> None:
        self.method = method
        self.best: Any = start
        self.best_residual = inf
        self.contracting = False
        self.singular = False
        self.begun = 0
        self.budget = budget
        self.deadline = min(deadline, perf_counter() + budget.seconds)
        self.steps: list[Iteration] = []
        self.way: Sequence[Iteration] | None = None

    def note(self, x: Vector | float, residual: float, damping: float, limiting: int) -> None:
        """Record an accepted step to `x`."""
        self.steps.append(Iteration(residual, damping, limiting, self.method))
        self.best = x
        self.best_residual = residual

    def walked(self, way: Sequence[Iteration], x: Vector) -> None:
        """Record a whole way to `x`, whose iterations are told one by one only when asked for."""
        self.way = way
        self.best = x

    def renew(self) -> Trail:
        """The same trail with its iterations to spend again, for a method called by another; time goes on."""
        self.begun = len(self.steps)
        self.contracting = False
        return self

    @property
    def spent(self) -> bool:
        """Whether the iterations or the time are used up."""
        return len(self.steps) - self.begun > self.budget.iterations or perf_counter() > self.deadline

    def close(
        self,
        status: Status,
        x: Vector | float | None = None,
        residual: float | None = None,
        on_bound: tuple[int, ...] = (),
        null_equations: tuple[float, ...] = (),
        null_unknowns: tuple[float, ...] = (),
        factor: Factor | None = None,
    ) -> Outcome:
        """The outcome: at `x` if given, else at the best point."""
        point = self.best if x is None else x
        history = tuple(self.steps) if self.way is None else self.way
        return Outcome(
            status,
            np.array([point]) if isinstance(point, float) else point,
            self.best_residual if residual is None else residual,
            max(len(history) - 1, 0),
            self.method,
            history,
            on_bound,
            null_equations,
            null_unknowns,
            factor=factor,
        )


# A method that takes a problem, a start (n,) and the trail it writes: what ladders are made of.
Rung: TypeAlias = Callable[[Problem, Vector, Trail], Outcome]
