"""The branch that each condition takes is told."""

from __future__ import annotations

import eqsheet
from eqsheet.review.table import solution_lines

FRICTION = """
Re = 1800
f = if Re < 2300 then 64/Re else if Re < 4000 then 0.03 else 0.316/Re^0.25
"""


def test_the_condition_that_decides_is_told_and_no_other() -> None:
    (branch,) = eqsheet.parse(FRICTION).solve().branches
    assert (branch.text, branch.holds, branch.line) == ("Re < 2300", True, 3)


def test_conditions_met_on_the_way_are_told_in_order() -> None:
    branches = eqsheet.parse(FRICTION).solve(changes=["Re = 5000"]).branches
    assert [(b.text, b.holds) for b in branches] == [("Re < 2300", False), ("Re < 4000", False)]


def test_a_condition_on_what_is_solved_for_is_told() -> None:
    text = "Q = if T > 300 K then 2 W/K*(T - 290 K) else 3 W/K*(T - 290 K)\nQ = 50 W\nT near 295 K\n"
    (branch,) = (
        eqsheet.parse(text.replace("2 W/K*(", "2 W/K * (").replace("3 W/K*(", "3 W/K * (")).solve().branches
    )
    assert (branch.text, branch.holds) == ("T > 300 K", True)


def test_nothing_is_told_of_what_was_not_found() -> None:
    assert eqsheet.parse("y = if x > 1 then 2 else 3\nx = sqrt(0 - 1)\n").solve().branches == ()


def test_the_table_counts_members_that_take_the_same_branch() -> None:
    text = "for i in 1..5:\n    y[i] = if x[i] < 3.5 then 1 else 2\n    x[i] = i\n"
    lines = solution_lines(eqsheet.parse(text).solve())
    after = lines[lines.index("Branches") :]
    assert after[1].split() == ["x[i]", "<", "3.5", "holds", "line", "2", "3", "members"]
    assert after[2].split() == ["x[i]", "<", "3.5", "does", "not", "hold", "line", "2", "2", "members"]
