"""A solution at a kink beyond which every value will do is not called one; other kinks are no matter."""

from __future__ import annotations

import pytest
from solving import only, solve, values


@pytest.mark.parametrize(
    "text",
    [
        "max(x - 1, 0) = 0\nx near 5",
        "abs(x) + x = 0\nx near 3",
        "min(p, 2 bar) = 2 bar\np near 1 bar within 0 bar ..",
        "max(0.5*x + 2*y - 0.25, 0) = 0\nx/y = 1.5\nx near 0.5",
        "min(x + y, 4) = x + y\nsqrt(x) = y\nx near 2\ny near 1 within 1e-6 ..",
        # A relief valve whose flow is known to be zero is shut at any pressure below its own (data invented).
        "Q = 3 L/s * max(p/p_open - 1, 0)^0.5 * (1 + p/1 bar)\nQ = 0 L/s\np_open = 4 bar\np near 6 bar within 0 bar ..",
    ],
)
def test_what_is_free_beyond_the_kink_is_said(text: str) -> None:
    solution = solve(text)
    assert solution.status == "unsolved"
    assert "free" in only(solution, "no-solution").message


def test_a_valve_that_just_opens_is_solved_where_the_flow_tells() -> None:
    text = "Q = 3 L/s * max(p/p_open - 1, 0) + 1e-3 L/s * p/1 bar\nQ = 4e-3 L/s\np_open = 4 bar\np near 6 bar"
    assert values(solve(text))["p"] == pytest.approx(4e5, rel=1e-9)


def test_a_bend_at_the_solution_is_no_matter() -> None:
    """A flow and its head loss, both zero: Q abs(Q) is level there but nowhere beside."""
    solution = solve("h = 2*Q*abs(Q)\nh = 0.5*Q\nQ near 0.01 within -0.1 .. 0.1")
    assert solution.solved
    assert values(solution)["Q"] == pytest.approx(0.0, abs=1e-9)
    assert values(solve("y = abs(x)\nx + 2*y = 0\nx near 1"))["x"] == pytest.approx(0.0, abs=1e-9)
