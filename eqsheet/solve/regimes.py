"""Equations with branches: hold the branches, solve, check, switch; without cycling."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

import numpy as np

from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Vector

Branches = tuple[int, ...]

# Combinations of branches tried at most for one block.
MOST_COMBINATIONS = 64
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
) -> Held:
    """A solution whose branches are those that its own values choose.

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
    """
    tried: dict[Branches, tuple[Outcome, Branches]] = {}
    queue: list[tuple[Branches, Vector | None]] = [(first, None)]
    spare = _neighbours(first, counts)
    while queue and len(tried) < MOST_COMBINATIONS:
        branches, start = queue.pop()
        outcome = solve_held(branches, start)
        chosen = consistent(outcome.x)
        tried[branches] = (outcome, chosen)
        if outcome.solved:
            if chosen == branches:
                return Held(outcome, branches, tuple(tried))
            back = tried.get(chosen)
            if back is not None and back[0].solved and _same(outcome.x, back[0].x, magnitude):
                # Each is in the other's branch by rounding: the solution lies on the switching point.
                return Held(outcome, branches, tuple(tried))
        if outcome.status is Status.INTERRUPTED:
            return Held(outcome, branches, tuple(tried))
        if chosen not in tried and all(branch < count for branch, count in zip(chosen, counts)):
            # Go on from where this branch led to, which is already in the next one's region.
            queue.append((chosen, outcome.x))
        elif not queue:
            following = next((b for b in spare if b not in tried), None)
            if following is not None:
                queue.append((following, None))
    return _unresolved(tried, magnitude)


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
    from itertools import combinations, product

    for changed in range(1, len(counts) + 1):
        for places in combinations(range(len(counts)), changed):
            for values in product(*(range(counts[k]) for k in places)):
                if all(value != first[k] for k, value in zip(places, values)):
                    branches = list(first)
                    for k, value in zip(places, values):
                        branches[k] = value
                    yield tuple(branches)


def _same(a: Vector, b: Vector, magnitude: Vector) -> bool:
    """Whether two points agree to within the accuracy of a solution."""
    return bool((np.abs(a - b) <= SAME_POINT * np.maximum(magnitude, np.abs(a))).all())
