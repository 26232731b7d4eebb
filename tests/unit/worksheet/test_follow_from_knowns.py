"""A guess may use what follows from the knowns line by line, whatever the order of the lines."""

from __future__ import annotations

import pytest

import eqsheet

LINES = [
    "D = 60 mm",
    "r = D/2",
    "a = pi*r^2",
    "x^2 = a",
    "x within r .. 10*r",
    "s^2 = 4*a",
    "s within 0 m ..",
]


@pytest.mark.parametrize("step", [1, -1, 3])
def test_bounds_of_what_follows_from_a_known(step: int) -> None:
    lines = LINES[::-1] if step == -1 else [LINES[i * step % len(LINES)] for i in range(len(LINES))]
    solution = eqsheet.parse("\n".join(lines)).solve()
    assert solution.status == "solved"
    assert solution["x"].si == pytest.approx(0.03 * 3.141592653589793**0.5)


@pytest.mark.parametrize(
    "line", ["r^2 = D^2", "r = D/2 + 0*x", "r*y = D^2\ny = D + r"], ids=["two ways", "circular", "together"]
)
def test_what_needs_a_choice_or_a_solution_does_not_follow(line: str) -> None:
    text = f"D = 60 mm\n{line}\nx^3 = 8 mm * D*r\nx near r"
    diagnostics = eqsheet.parse(text).solve().diagnostics
    assert "guess-not-known" in [d.code for d in diagnostics]
