"""Curves read backwards: which of several solutions was taken is told, unless the worksheet says which is meant."""

from __future__ import annotations

import pytest
from solving import lines, only, solve, values

CODE = "curve-with-several-solutions"
# Up and down in straight lines, so that 30 is the value at 5 and at 20.
ROOF = """
    curve eta(Q in L/s) in 1 by line:
        0   20
        10  40
        30  20
"""


def codes(text: str) -> list[str]:
    return [d.code for d in solve(text).diagnostics]


def test_the_other_solutions_are_told() -> None:
    solution = solve(ROOF + "    30 = eta(Q)\n")
    found = only(solution, CODE)
    assert values(solution)["Q"] == pytest.approx(0.005)
    assert found.severity.value == "note"
    assert lines(found) == [5]
    assert "`Q` = 5 L/s was taken, and 20 L/s solves" in found.message


@pytest.mark.parametrize(
    "guess", ["Q near 4 L/s", "Q near 22 L/s", "Q within 0 L/s .. 9 L/s", "Q within 12 L/s .. 30 L/s"]
)
def test_a_guess_or_bounds_say_which_is_meant(guess: str) -> None:
    assert codes(ROOF + f"    30 = eta(Q)\n    {guess}\n") == []


def test_at_the_top_there_is_one_solution() -> None:
    assert codes(ROOF + "    40 = eta(Q)\n") == []


def test_a_curve_that_only_rises_needs_no_word() -> None:
    rising = "curve h(x in m) in m:\n    0 0\n    1 1\n    2 3\n"
    assert codes(rising + "0.5 m = h(x)\n") == []


def test_members_are_told_together() -> None:
    found = only(solve(ROOF + "    for i in 1..4:\n        30 = eta(Q[i])\n"), CODE)
    assert "`Q[1]`" in found.message
    assert any("`Q[4]`" in note for note in found.notes)


def test_a_curve_read_forwards_says_nothing() -> None:
    assert codes(ROOF + "    Q = 3 L/s\n    y = eta(Q)\n") == []
