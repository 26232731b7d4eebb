"""Chains that would tell each other's starts out of all proportion are started at typical values."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from solving import solve

# Each takes the number of a member and those of its neighbours round the ring.
RINGS: dict[str, Callable[[int, int, int], str]] = {
    # Broyden's tridiagonal function (More, Garbow and Hillstrom 1981, problem 30), closed to a ring.
    "quadratic": lambda i, a, b: f"x{i}*(3 - 2*x{i}) - x{a} - 2*x{b} + 1 = 0",
    "squares": lambda i, a, b: f"x{i}^2 - x{a} - x{b} + 0.5 = 0",
    "waves": lambda i, a, b: f"sin(x{i}) + 0.5*x{a} - 0.3*x{b} = 0.1*{i}",
    "cubes": lambda i, a, b: f"x{i}^3 + x{i} - x{a} - x{b} + 0.5*{i} - 5 = 0",
}


@pytest.mark.parametrize("size", [8, 20])
@pytest.mark.parametrize("ring", RINGS)
def test_a_ring_is_solved_without_guesses(ring: str, size: int) -> None:
    equations = (RINGS[ring](i, (i - 2) % size + 1, i % size + 1) for i in range(1, size + 1))
    assert solve("\n".join(equations)).solved
