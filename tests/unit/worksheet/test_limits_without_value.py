"""A limit whose side has no finite value is neither held nor failed, and the run says so."""

from __future__ import annotations

import pytest
from solving import only, solve


@pytest.mark.parametrize("limit", ["1/x <= 3", "1/x >= 3", "3 >= 1/x", "0 <= 1/x <= 3", "sqrt(x - 1) <= 2"])
def test_such_a_limit_is_not_judged(limit: str) -> None:
    solution = solve(f"x = 0\nrequire {limit}")
    found = only(solution, "limit-without-value")
    assert f"the limit `{limit}` cannot be judged" in found.message
    assert solution.limits == ()
    assert solution.status == "unsolved"
    assert solution["x"].value == 0.0


def test_of_a_large_family_the_other_members_are_judged() -> None:
    solution = solve("for i in 1..2000:\n    x[i] = i - 3\n    require 5/x[i] <= 10")
    found = only(solution, "limit-without-value")
    assert "(i = 3)" in found.message
    assert len(solution.limits) == 1999
    assert all(limit.holds for limit in solution.limits)


def test_a_branch_not_taken_needs_no_value() -> None:
    solution = solve("x = 0\nrequire (if x = 0 then 0 else 1/x) <= 3")
    assert [limit.holds for limit in solution.limits] == [True]
    assert solution.status == "solved"
