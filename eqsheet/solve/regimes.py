"""Equations with branches: hold the branches, solve, check, switch; without cycling."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from itertools import chain, combinations, islice, product

import numpy as np

from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Vector

Branches = tuple[int, ...]

# Combinations of branches tried at most for one block.
MOST_COMBINATIONS = 64
# Combinations asked whether they may have a solution: by nearness to the first one, and then systematically.
MOST_NEAR = 64
MOST_LOOKED_AT = 1024
# Scaled distance of two solutions, each in the other's branch, at which they are one solution on the
# switching point.
SAME_POINT = 1e-9


@dataclass(frozen=True)
class Held:
    """A solution with its branches, or the reason why there is none.

    Attributes
    ----------
    outcome : Outcome
        With status NO_CONSISTENT_BRANCH where every solution found contradicts its own branches.
    branches : tuple of int
        The branches held for that outcome.
    visited : tuple of tuple of int
        All combinations tried, in order.
    gap : ndarray (n,) or None
        With NO_CONSISTENT_BRANCH: the difference between two solutions that each lie in the other's branch,
        that is, how far the equations jump over a solution; None where there are no two such.
    """

    outcome: Outcome
    branches: Branches
    visited: tuple[Branches, ...]
    gap: Vector | None = None


def solve_regimes(
    first: Branches,
    counts: tuple[int, ...],
    solve_held: Callable[[Branches, Vector | None], Outcome],
    consistent: Callable[[Vector], Branches],
    magnitude: Vector,
    possible: Callable[[Branches], bool] = lambda branches: True,
    solve_thoroughly: Callable[[Branches, Vector | None, int], Outcome] | None = None,
) -> Held:
    """A solution whose branches are those that its own values choose.

    All combinations are tried cheaply before the first of them is searched with more effort.

    Parameters
    ----------
    first : tuple of int
        Branches at the start point: entry k is the branch taken by condition k.
    counts : tuple of int
        Number of branches of each condition.
    solve_held : callable
        (branches, start or None for the caller's own start) to the outcome with these branches held.
    consistent : callable
        x (n,) to the branches that x itself chooses; the number of branches where it chooses none of them.
    magnitude : ndarray (n,)
        Typical size of each unknown, for telling points apart.
    possible : callable
        Whether a combination, -1 standing for a condition left open, may have a solution; False only for certain.
    solve_thoroughly : callable, optional
        As `solve_held`, for combinations it has not solved; the last argument is how many of them are left.
    """
    work = _Work(counts, consistent, magnitude)
    queue: list[tuple[Branches, Vector | None]] = [(first, None)]
    near = (b for b in islice(_neighbours(first, counts), MOST_NEAR) if possible(b))
    spare = chain(near, _left_open(first, counts, possible))
    if not possible(first):
        queue = [(following, None)] if (following := next(spare, None)) is not None else queue
    while queue and len(work.tried) < MOST_COMBINATIONS:
        branches, start = queue.pop()
        held = work.add(branches, solve_held(branches, start))
        if held is not None:
            return held
        outcome, chosen = work.tried[branches]
        if work.may_follow(chosen) and chosen not in work.tried and possible(chosen):
            # Go on from where this branch led to, which is already in the next one's region.
            queue.append((chosen, outcome.x))
        elif not queue:
            following = next((b for b in spare if b not in work.tried), None)
            if following is not None:
                queue.append((following, None))
    if solve_thoroughly is not None:
        failed = [branches for branches, (outcome, _) in work.tried.items() if not outcome.solved]
        for number, branches in enumerate(failed):
            held = work.add(branches, solve_thoroughly(branches, None, len(failed) - number))
            if held is not None:
                return held
    return _unresolved(work.tried, magnitude)


class _Work:
    """What has been tried.

    Attributes
    ----------
    tried : dict
        By combination, in order: its last outcome and the branches that this chooses.
    """

    def __init__(
        self, counts: tuple[int, ...], consistent: Callable[[Vector], Branches], magnitude: Vector
    ) -> None:
        self.tried: dict[Branches, tuple[Outcome, Branches]] = {}
        self._counts = counts
        self._consistent = consistent
        self._magnitude = magnitude

    def add(self, branches: Branches, outcome: Outcome) -> Held | None:
        """Put an outcome down; the end of the search where it is one."""
        chosen = self._consistent(outcome.x)
        self.tried[branches] = (outcome, chosen)
        if outcome.status is Status.INTERRUPTED:
            return Held(outcome, branches, tuple(self.tried))
        if not outcome.solved:
            return None
        if chosen == branches:
            return Held(outcome, branches, tuple(self.tried))
        back = self.tried.get(chosen)
        if back is not None and back[0].solved and _same(outcome.x, back[0].x, self._magnitude):
            # Each is in the other's branch by rounding: the solution lies on the switching point.
            return Held(outcome, branches, tuple(self.tried))
        return None

    def may_follow(self, chosen: Branches) -> bool:
        """Whether every condition has chosen one of its branches."""
        return all(branch < count for branch, count in zip(chosen, self._counts))


def _unresolved(tried: dict[Branches, tuple[Outcome, Branches]], magnitude: Vector) -> Held:
    """The report where no combination is consistent."""
    visited = tuple(tried)
    closest: tuple[float, Branches, Vector] | None = None
    for branches, (outcome, chosen) in tried.items():
        other = tried.get(chosen)
        if outcome.solved and other is not None and other[0].solved and chosen != branches:
            gap = other[0].x - outcome.x
            distance = float((np.abs(gap) / magnitude).max())
            if closest is None or distance < closest[0]:
                closest = (distance, branches, gap)
    if closest is not None:
        _, branches, gap = closest
        outcome = replace(tried[branches][0], status=Status.NO_CONSISTENT_BRANCH)
        return Held(outcome, branches, visited, gap)
    solved = [b for b, (outcome, _) in tried.items() if outcome.solved]
    if solved:
        outcome = replace(tried[solved[0]][0], status=Status.NO_CONSISTENT_BRANCH)
        return Held(outcome, solved[0], visited)
    best = min(visited, key=lambda b: tried[b][0].residual)
    return Held(tried[best][0], best, visited)


def _neighbours(first: Branches, counts: tuple[int, ...]) -> Iterator[Branches]:
    """All other combinations, those that differ from `first` in fewer conditions first."""
    for changed in range(1, len(counts) + 1):
        for places in combinations(range(len(counts)), changed):
            for values in product(*(range(counts[k]) for k in places)):
                if all(value != first[k] for k, value in zip(places, values)):
                    branches = list(first)
                    for k, value in zip(places, values):
                        branches[k] = value
                    yield tuple(branches)


def _left_open(
    first: Branches, counts: tuple[int, ...], possible: Callable[[Branches], bool]
) -> Iterator[Branches]:
    """All combinations but those that are not possible, one condition after the other held, as in `first` first."""
    stack: list[Branches] = [()]
    looked_at = 0
    while stack and looked_at < MOST_LOOKED_AT:
        begin = stack.pop()
        looked_at += 1
        rest = len(counts) - len(begin)
        if not possible(begin + (-1,) * rest):
            continue
        if rest == 0:
            yield begin
            continue
        own = first[len(begin)]
        others = [value for value in range(counts[len(begin)]) if value != own]
        stack += [(*begin, value) for value in (*reversed(others), own)]


def _same(a: Vector, b: Vector, magnitude: Vector) -> bool:
    """Whether two points agree to within the accuracy of a solution."""
    return bool((np.abs(a - b) <= SAME_POINT * np.maximum(magnitude, np.abs(a))).all())
