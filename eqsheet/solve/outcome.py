"""What a solver gives back: a status that says which test fired, the point, and how it got there."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from enum import Enum
from typing import NamedTuple

from eqsheet.solve.factor import Factor
from eqsheet.solve.problem import Vector


class Status(Enum):
    """Which test ended the solver, and with that what the point is worth.

    CONVERGED
        Residuals and Newton step are at rounding level: the point is an isolated root.
    DOUBLE
        Residuals are at rounding level and grow away from the point, but the Jacobian is singular there: a
        double root, known to about half the usual digits.
    CONTINUUM
        Residuals are at rounding level at the point and along a whole direction from it: the equations
        leave a combination of unknowns free. Not a solution to rely on.
    STALLED
        No damping of the step reduces the residuals any more; the point is the best found.
    MINIMUM
        The point is a local minimum of the residuals, and no root: to first order no step within the bounds
        makes them smaller.
    HELD
        As STALLED, and unknowns are pressed against their bounds by the step.
    SINGULAR
        The Jacobian is singular and the residuals are not zero; the point is the best found.
    DOMAIN
        No point with finite residuals could be found, or none near enough to go on from.
    POLE
        One unknown: the residual changes sign only by jumping; the point is beside the jump.
    NO_SIGN_CHANGE
        One unknown: the samples over the range show no change of sign; the point is that of the smallest
        residual.
    NO_CONSISTENT_BRANCH
        Held branches: no combination of branches is consistent with its own solution.
    BUDGET
        The iterations or the time allowed are used up; the point is the best found.
    INTERRUPTED
        The user interrupted; the point is the best found.
    """

    CONVERGED = "converged"
    DOUBLE = "double root"
    CONTINUUM = "continuum of roots"
    STALLED = "stalled"
    MINIMUM = "minimum without a root"
    HELD = "held by bounds"
    SINGULAR = "singular"
    DOMAIN = "outside the domain"
    POLE = "pole"
    NO_SIGN_CHANGE = "no sign change"
    NO_CONSISTENT_BRANCH = "no consistent branch"
    BUDGET = "budget used up"
    INTERRUPTED = "interrupted"

    @property
    def solved(self) -> bool:
        """Whether the point is a root of its own."""
        return self is Status.CONVERGED or self is Status.DOUBLE


class Iteration(NamedTuple):
    """One accepted step.

    Attributes
    ----------
    residual : float
        Largest scaled residual at the point reached.
    damping : float
        Fraction of the full step that was taken (0 at the start).
    limiting : int
        Index of the unknown that limited the step, -1 if none did.
    method : str
    """

    residual: float
    damping: float
    limiting: int
    method: str


@dataclass(frozen=True)
class Outcome:
    """Where a solver ended.

    Attributes
    ----------
    status : Status
    x : ndarray (n,)
        The root, or the best point found.
    residual : float
        Largest residual at x relative to the size of its equation; inf where none is finite.
    iterations : int
        Accepted steps of that method; those of the others stand in `attempts`.
    method : str
        The method that gave x.
    history : sequence of Iteration
        Of that method.
    on_bound : tuple of int
        Unknowns that rest on a bound to rounding (solved) or are pressed against one (not solved).
    null_equations, null_unknowns : tuple of float
        Left and right singular vectors of the scaled Jacobian where it is singular: how much each equation
        and each unknown (relative to its size) takes part; empty otherwise.
    attempts : tuple of Outcome
        Earlier attempts of the ladder, in order; empty where the first one succeeded.
    factor : Factor or None
        Of the Jacobian at the root or next to it, so that the root can be judged by it.
    """

    status: Status
    x: Vector
    residual: float
    iterations: int
    method: str
    history: Sequence[Iteration] = field(default=(), repr=False)
    on_bound: tuple[int, ...] = ()
    null_equations: tuple[float, ...] = ()
    null_unknowns: tuple[float, ...] = ()
    attempts: tuple[Outcome, ...] = field(default=(), repr=False)
    factor: Factor | None = field(default=None, repr=False, compare=False)

    @property
    def solved(self) -> bool:
        """Whether x is a root of its own."""
        return self.status.solved

    @property
    def brief(self) -> str:
        """One line: method, how it ended, iterations, largest scaled residual."""
        return (
            f"{self.method}: {self.status.value} after {self.iterations} iterations, "
            f"scaled residual {self.residual:.1e}"
        )

    @property
    def full(self) -> str:
        """Every attempt with its iterations, a line each."""
        lines: list[str] = []
        for attempt in (*self.attempts, self):
            lines.append(attempt.brief)
            for number, step in enumerate(attempt.history):
                limited = f"  limited by unknown {step.limiting}" if step.limiting >= 0 else ""
                lines.append(
                    f"  {number:4d}  residual {step.residual:9.2e}  damping {step.damping:7.1e}{limited}"
                )
        return "\n".join(lines)
