"""A cell of a column `of` a set that is left unknown: out of every filter, and told where a member is needed."""

from __future__ import annotations

import pytest
from solving import errors, lines, only, solve, values

TREE = """
    rows bus: up of bus, x
        root - 2
        b2 root 3
        b3 b2 4
"""


@pytest.mark.parametrize("condition", ["up[b] != b", "up[b] = up[b]", "not up[b] = b"])
def test_a_filter_leaves_rows_without_a_member_out(condition: str) -> None:
    found = values(solve(TREE + f"    for b in bus if {condition}:\n        y[b] = x[b] + x[up[b]]\n"))
    assert {n: v for n, v in found.items() if n.startswith("y")} == {"y[b2]": 5, "y[b3]": 7}


def test_a_filter_of_a_sum_does_too() -> None:
    assert values(solve(TREE + "    w = sum(x[b] for b in bus if up[b] = b2)\n"))["w"] == 4


def test_a_filter_goes_through_two_columns() -> None:
    found = values(solve(TREE + "    w = sum(x[b] for b in bus if up[up[b]] = root)\n"))
    assert found["w"] == 4


def test_in_brackets_the_row_and_the_cure_are_told() -> None:
    solution = solve(TREE + "    for b in bus:\n        y[b] = x[b] + x[up[b]]\n")
    found = only(solution, "cell-left-unknown")
    assert lines(found) == [6]
    assert "`up[root]`" in found.message
    assert "`if up[b] = up[b]`" in found.help


def test_an_expression_cannot_be_chosen_by_such_a_cell() -> None:
    solution = solve(TREE + "    for b in bus:\n        y[b] = if up[b] = root then 1 else 2\n")
    assert errors(solution) == ["cell-left-unknown"]
