"""The damped Newton iteration of `newton` in plain floats, for a small block whose step is written out.

The decisions are those of `newton`, and so are the points, but for rounding. It only goes where the way is plain:
where the start has no value, a pivot vanishes or no damping helps, it leaves the block to `newton`. The root is
judged in the same way, by `finish`.
"""

from __future__ import annotations

from collections.abc import Sequence
from math import hypot, inf, sqrt
from operator import add, truediv
from typing import overload

import numpy as np

from eqsheet.solve.damping import SURE_CONTRACTION, corrected_damping, predicted_damping
from eqsheet.solve.finish import WEIGHT_FLOOR, finish_plainly
from eqsheet.solve.interior import Interior
from eqsheet.solve.newton import CONTRACTING, NEAR, QUICK
from eqsheet.solve.outcome import Iteration, Outcome
from eqsheet.solve.problem import Problem, Vector, WrittenStep
from eqsheet.solve.termination import (
    AT_REST,
    MULTIPLE,
    SLOW,
    ZERO_FLOOR,
    last_step_due,
    residual_at,
)
from eqsheet.solve.trail import Trail

# Once Newton's steps shrink quadratically and the one after the next is foretold to be smaller than this, the point
# after the next has the digits that the last correction starts from.
SETTLED = 2.0**-44
# The floor of the test of rest as a part of that of the weights.
ZERO_PART = ZERO_FLOOR / WEIGHT_FLOOR
# More steps than these are not a plain way.
MOST_STEPS = 40
# Damping below which the way is not plain either.
LEAST_PLAIN = 2.0**-10


def written_newton(problem: Problem, written: WrittenStep, start: Vector, trail: Trail) -> Outcome | None:
    """The root that damped Newton steps lead to from `start`; None where the way there is not plain.

    Parameters
    ----------
    problem : Problem
    written : WrittenStep
        Of the same equations.
    start : ndarray (n,)
    trail : Trail
        Written on the way.
    """
    try:
        return _walk(problem, written, start, trail)
    except (ArithmeticError, ValueError):
        return None


def _walk(problem: Problem, written: WrittenStep, start: Vector, trail: Trail) -> Outcome | None:
    interior = Interior(problem)
    floors = (WEIGHT_FLOOR * problem.magnitude).tolist()
    mean = sqrt(problem.n)
    newton_step, correct, arguments = written.step, written.correction, written.arguments
    x: list[float] = start.tolist()
    if not interior.holds(x):
        x = interior.enter(start).tolist()
    _, step, numbers = newton_step(x, arguments)
    damping, limiting, contraction = 0.0, -1, inf
    last_step: Sequence[float] = ()
    last_correction: Sequence[float] = ()
    last_rest, last_norm, slow_steps = inf, inf, 0
    way: list[tuple[list[float], float, int]] = []
    settled = True
    while len(way) < MOST_STEPS:
        way.append((x, damping, limiting))
        weights = [a if a > f else max(-a, f) for a, f in zip(x, floors)]
        scaled = list(map(truediv, step, weights))
        norm = hypot(*scaled) / mean
        rest = _largest_change(step, x, floors) if norm < NEAR else inf
        slow_steps = slow_steps + 1 if MULTIPLE < rest / last_rest < SLOW else 0
        at_rest = rest <= AT_REST and (last_step_due(rest, norm / last_norm) or rest > SLOW * last_rest)
        if at_rest or (settled and contraction < QUICK and rest * (norm / last_norm) ** 2 <= SETTLED):
            point = x
            if not at_rest:
                point = list(map(add, x, step))
                way.append((point, 1.0, -1))
            outcome = _finished(problem, interior, trail, way, contraction, slow_steps)
            if outcome is not None or at_rest:
                return outcome
            # The root is further off than the steps foretold.
            way.pop()
            settled = False
        if damping == 0.0 or (damping == 1.0 and contraction < SURE_CONTRACTION):
            damping = 1.0
        else:
            corrected = list(map(truediv, last_correction, weights))
            damping = predicted_damping(
                damping,
                hypot(*map(truediv, last_step, weights)) / mean,
                hypot(*corrected) / mean,
                hypot(*[c - s for c, s in zip(corrected, scaled)]) / mean,
                norm,
            )
        raised = False
        while True:
            if not damping >= LEAST_PLAIN:
                return None
            trial, limiting = _trial(interior, x, step, damping, norm)
            try:
                residuals, next_step, next_numbers = newton_step(trial, arguments)
            except (ValueError, OverflowError):
                # Outside the domain. A division by zero may be a pivot instead, which is no matter of damping.
                damping *= 0.5
                continue
            correction = correct(residuals, (), numbers)
            corrected = list(map(truediv, correction, weights))
            contraction = hypot(*corrected) / mean / norm
            if damping == 1.0 and contraction < SURE_CONTRACTION:
                break
            deviation = hypot(
                *[c - (s - (t - a) / w) for c, s, t, a, w in zip(corrected, scaled, trial, x, weights)]
            )
            better = corrected_damping(damping, contraction, deviation / mean, norm, limiting >= 0, raised)
            if better == damping:
                if limiting < 0 and damping < 1.0:
                    limiting = max(range(problem.n), key=lambda i: abs(scaled[i]))
                break
            raised = raised or better > damping
            damping = better
        last_step, last_correction, last_rest, last_norm = step, correction, rest, norm
        x, step, numbers = trial, next_step, next_numbers
    return None


class Way(Sequence[Iteration]):
    """The iterations of a way by its points; their scaled residuals are worked out when asked for.

    Parameters
    ----------
    problem : Problem
    steps : sequence of (point, damping, limiting unknown)
    method : str
    """

    def __init__(
        self, problem: Problem, steps: Sequence[tuple[list[float], float, int]], method: str
    ) -> None:
        self._problem = problem
        self._steps = steps
        self._method = method

    def __len__(self) -> int:
        return len(self._steps)

    @overload
    def __getitem__(self, position: int) -> Iteration: ...

    @overload
    def __getitem__(self, position: slice) -> Sequence[Iteration]: ...

    def __getitem__(self, position: int | slice) -> Iteration | Sequence[Iteration]:
        if isinstance(position, slice):
            return Way(self._problem, self._steps[position], self._method)
        point, damping, limiting = self._steps[position]
        x = np.array(point)
        with np.errstate(all="ignore"):
            scaled = residual_at(self._problem, x, *self._problem.linearise(x))
        return Iteration(scaled, damping, limiting, self._method)


def _finished(
    problem: Problem,
    interior: Interior,
    trail: Trail,
    way: list[tuple[list[float], float, int]],
    contraction: float,
    slow_steps: int,
) -> Outcome | None:
    """The judgement of the last point of a way; None where it is not at a root."""
    point = np.array(way[-1][0])
    trail.walked(Way(problem, tuple(way), trail.method), point)
    trail.contracting = contraction < CONTRACTING
    outcome = finish_plainly(problem, interior, trail, point, slow_steps)
    return outcome if outcome is not None and outcome.solved else None


def _largest_change(step: Sequence[float], x: Sequence[float], floors: Sequence[float]) -> float:
    """The largest part of a step relative to its unknown, which counts as no less than its floor."""
    sizes = [a if a > f else f for a, f in zip(map(abs, x), [ZERO_PART * f for f in floors])]
    return float(max(map(truediv, map(abs, step), sizes)))


def _trial(
    interior: Interior, x: Sequence[float], step: Sequence[float], damping: float, norm: float
) -> tuple[list[float], int]:
    """As `Interior.cut`."""
    trial = list(map(add, x, step)) if damping == 1.0 else [a + damping * d for a, d in zip(x, step)]
    if interior.holds(trial):
        return trial, -1
    cut, limiting = interior.cut(np.array(x), damping * np.array(step), norm)
    return cut.tolist(), limiting
