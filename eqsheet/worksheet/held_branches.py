"""Blocks with conditions on what is solved for: the branches are held, the solution checked, and switched.

What bounds carried through equations and conditions tell of a combination of branches comes first: many of them can
have no solution, and one that can is started where its own conditions hold.
"""

from __future__ import annotations

import math
import operator
import time
from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from eqsheet.model.branches import Switch, chosen_branches, held_conditions, hold, switches
from eqsheet.model.tape import Formula
from eqsheet.solve.ladder import first_rungs, solve_block
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Vector
from eqsheet.solve.regimes import Branches, solve_regimes
from eqsheet.solve.trail import Budget
from eqsheet.worksheet.guesses import Guesses
from eqsheet.worksheet.interval import Interval
from eqsheet.worksheet.intervals import narrowed
from eqsheet.worksheet.solve_block import (
    BlockResult,
    Known,
    Ladder,
    closed_form,
    judged,
    problem_of,
    solve_plain,
)
from eqsheet.worksheet.starting_values import MOST_NARROWED, Start, point_between

# Plain Newton from two starts takes no longer; a combination that does is left for later.
_QUICK = Budget(iterations=60, seconds=0.5)


def by_held_branches(
    formulas: tuple[Formula, ...],
    unknowns: Sequence[int],
    known: Known,
    guesses: Guesses,
    start: Start,
    budget: Budget,
) -> BlockResult:
    """The solution of one block with undecided conditions."""
    held = _Held(formulas, unknowns, known, guesses, start, budget)
    counts = tuple(switch.count for switch in held.found)
    begin = held.choose(np.array(start.values))
    result = solve_regimes(
        tuple(map(min, begin, (count - 1 for count in counts))),
        counts,
        held.solve_quickly,
        held.choose,
        np.array(start.magnitude),
        held.possible,
        held.solve_thoroughly,
    )
    taken, outcome = hold(formulas, held.found, result.branches), result.outcome
    if outcome.status is Status.NO_CONSISTENT_BRANCH and any(
        map(operator.eq, held.choose(outcome.x), counts)
    ):
        # What the branch gives is no use where the condition itself has no value.
        taken, outcome = formulas, replace(outcome, status=Status.DOMAIN)
    problem = None
    if len(unknowns) > 1:
        problem = problem_of(taken, unknowns, known, start)
    gap = () if result.gap is None else tuple(result.gap.tolist())
    return judged(taken, unknowns, known, start, outcome, problem, gap)


class _Held:
    """The block with its branches held.

    Attributes
    ----------
    found : tuple of Switch
    """

    def __init__(
        self,
        formulas: tuple[Formula, ...],
        unknowns: Sequence[int],
        known: Known,
        guesses: Guesses,
        start: Start,
        budget: Budget,
    ) -> None:
        self.found: tuple[Switch, ...] = switches(formulas, set(unknowns))
        self._formulas = formulas
        self._unknowns = unknowns
        self._known = known
        self._guesses = guesses
        self._start = start
        self._budget = budget
        self._deadline = time.perf_counter() + budget.seconds
        self._position = {q: i for i, q in enumerate(unknowns)}
        # Where solutions with a combination lie; None where it has none.
        self._ranges: dict[Branches, tuple[Interval, ...] | None] = {}

    def choose(self, x: Vector) -> Branches:
        """The branches that a point (n,) chooses."""
        position, values = self._position, self._known.values
        return chosen_branches(
            self._formulas, self.found, lambda q: float(x[position[q]]) if q in position else values[q]
        )

    def possible(self, branches: Branches) -> bool:
        """Whether bounds and conditions leave room for a solution with these branches, -1 for one left open."""
        if branches not in self._ranges:
            self._ranges[branches] = self._narrowed(branches)
        return self._ranges[branches] is not None

    def _narrowed(self, branches: Branches) -> tuple[Interval, ...] | None:
        bounds = tuple([self._guesses.bounds(q) for q in self._unknowns])
        if len(self._unknowns) > MOST_NARROWED:
            return bounds
        conditions = held_conditions(self._formulas, self.found, branches)
        if conditions is None:
            return None
        instructions = [self._formulas[s.formula].tape.instructions[s.instruction][0] for s in self.found]
        steps = [(s, b) for s, b, step in zip(self.found, branches, instructions) if step != "if" and b >= 0]
        on_steps = hold(self._formulas, [s for s, _ in steps], [b for _, b in steps])
        known = self._known
        left = narrowed(self._unknowns, on_steps, known.values, bounds, known.errors, conditions)
        return None if left.empty >= 0 else left.ranges

    def solve_quickly(self, branches: Branches, at: Vector | None) -> Outcome:
        """The outcome with branches held, by what costs little."""
        seconds = min(_QUICK.seconds, self._budget.seconds)
        return self._solve(branches, at, Budget(_QUICK.iterations, seconds), first_rungs)

    def solve_thoroughly(self, branches: Branches, at: Vector | None, left: int) -> Outcome:
        """The outcome with branches held, by the whole ladder, in its share of the time."""
        seconds = max(self._deadline - time.perf_counter(), 0.0) / left
        return self._solve(branches, at, Budget(self._budget.iterations, seconds), solve_block)

    def _solve(self, branches: Branches, at: Vector | None, budget: Budget, ladder: Ladder) -> Outcome:
        unknowns, known = self._unknowns, self._known
        held = hold(self._formulas, self.found, branches)
        if len(unknowns) == 1 and unknowns[0] in held[0].quantities:
            closed = closed_form(held[0], unknowns[0], known, self._guesses)
            if closed is not None:
                status = Status.CONVERGED if closed.solved else Status.HELD
                return Outcome(status, np.array(closed.values), closed.residual, 0, "closed form")
        begin = self._start_of(branches) if at is None else _started_at(self._start, at)
        return solve_plain(held, unknowns, known, begin, budget, ladder)[0]

    def _start_of(self, branches: Branches) -> Start:
        """The start, moved to where solutions with these branches may lie."""
        ranges = self._ranges.get(branches)
        if ranges is None:
            return self._start
        values = [
            value if low < value < high else _moved(value, low, high, position)
            for position, (value, (low, high)) in enumerate(zip(self._start.values, ranges))
        ]
        return _started_at(self._start, np.array(values))


def _moved(value: float, low: float, high: float, position: int) -> float:
    """A point inside the range for one outside."""
    inside = point_between(low, high, position)
    if inside is not None:
        return inside
    if math.isfinite(low):
        return low + 0.5 * (abs(low) or abs(value) or 1.0)
    return high - 0.5 * (abs(high) or abs(value) or 1.0)


def _started_at(start: Start, x: Vector) -> Start:
    """The same start at another point, kept inside the bounds."""
    inside = [min(max(v, low), high) for v, low, high in zip(x.tolist(), start.lower, start.upper)]
    values = tuple(v if math.isfinite(v) else s for v, s in zip(inside, start.values))
    return Start(values, start.lower, start.upper, start.magnitude, start.assumed, start.blind)
