"""Held branches: switching, no cycling, and the gap where equations jump over a solution."""

import numpy as np
import pytest

from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.regimes import solve_regimes

ONE = np.array([1.0])


def outcome(x, status=Status.CONVERGED):
    return Outcome(status, np.array([x], dtype=float), 0.0, 1, "newton")


def regimes(solutions, consistent, first=(0,), counts=(2,)):
    held = []

    def solve_held(branches, start):
        held.append(branches)
        found = solutions[branches]
        return found if isinstance(found, Outcome) else outcome(found)

    result = solve_regimes(first, counts, solve_held, lambda x: consistent(float(x[0])), ONE)
    assert len(held) == len(set(held)), "a combination was held twice"
    return result


def test_a_consistent_branch_is_kept():
    held = regimes({(0,): 1.0}, lambda x: (0,))
    assert held.branches == (0,)
    assert held.visited == ((0,),)


def test_an_inconsistent_branch_is_switched():
    # Laminar gives x = 5, which is turbulent; turbulent gives 4, which is too.
    held = regimes({(0,): 5.0, (1,): 4.0}, lambda x: (int(x > 3),))
    assert held.branches == (1,)
    assert held.outcome.x[0] == 4.0
    assert held.gap is None


def test_a_jump_is_reported_with_its_gap():
    # Laminar gives 3.5 (turbulent), turbulent gives 2.0 (laminar): no solution, 1.5 apart.
    held = regimes({(0,): 3.5, (1,): 2.0}, lambda x: (int(x > 3),))
    assert held.outcome.status is Status.NO_CONSISTENT_BRANCH
    assert not held.outcome.solved
    assert abs(held.gap[0]) == pytest.approx(1.5)
    assert set(held.visited) == {(0,), (1,)}


def test_a_solution_on_the_switching_point_is_one():
    held = regimes({(0,): 3.0 + 1e-15, (1,): 3.0}, lambda x: (int(x > 3),))
    assert held.outcome.solved


def test_two_conditions_that_would_cycle_are_all_tried():
    # From (0, 0) every solution points to the next, round in a ring; only (1, 0), off the ring, is
    # consistent.
    points = {(0, 0): 1.0, (0, 1): 2.0, (1, 1): 3.0, (1, 0): 9.0}
    chosen = {1.0: (0, 1), 2.0: (1, 1), 3.0: (0, 0), 9.0: (1, 0)}
    held = regimes(points, chosen.__getitem__, (0, 0), (2, 2))
    assert held.branches == (1, 0)


def test_a_branch_without_a_solution_leads_on_by_its_best_point():
    held = regimes({(0,): outcome(7.0, Status.STALLED), (1,): 4.0}, lambda x: (int(x > 3),))
    assert held.branches == (1,)


def test_no_branch_with_a_solution_gives_the_best_failure():
    held = regimes(
        {(0,): outcome(7.0, Status.STALLED), (1,): outcome(4.0, Status.STALLED)}, lambda x: (int(x > 3),)
    )
    assert held.outcome.status is Status.STALLED


def test_the_number_of_combinations_is_bounded():
    count = 0

    def solve_held(branches, start):
        nonlocal count
        count += 1
        return outcome(float(count))

    held = solve_regimes((0,) * 20, (2,) * 20, solve_held, lambda x: (int(x[0]) % 2,) + (1,) * 19, ONE)
    assert count <= 64
    assert held.outcome.status is Status.NO_CONSISTENT_BRANCH


def test_what_is_not_possible_is_not_held():
    tried = []

    def solve_held(branches, start):
        tried.append(branches)
        return outcome(float(branches[0] + 2 * branches[1]))

    held = solve_regimes(
        (0, 0),
        (2, 2),
        solve_held,
        lambda x: (int(x[0]) % 2, int(x[0]) // 2),
        ONE,
        possible=lambda branches: branches == (1, 1),
    )
    assert tried == [(1, 1)]
    assert held.outcome.solved and held.branches == (1, 1)


def test_every_combination_is_tried_before_one_is_searched_thoroughly():
    tried = []

    def quickly(branches, start):
        tried.append(("quickly", branches))
        return outcome(0.0, Status.STALLED)

    def thoroughly(branches, start, left):
        tried.append(("thoroughly", branches, left))
        return outcome(
            1.0 if branches == (1,) else 0.0, Status.CONVERGED if branches == (1,) else Status.STALLED
        )

    held = solve_regimes((0,), (2,), quickly, lambda x: (int(x[0]),), ONE, solve_thoroughly=thoroughly)
    assert tried == [("quickly", (0,)), ("quickly", (1,)), ("thoroughly", (0,), 2), ("thoroughly", (1,), 1)]
    assert held.outcome.solved and held.branches == (1,)
