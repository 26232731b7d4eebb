"""A member that `show` names goes before its family, whichever stands first."""

from __future__ import annotations

import pytest

import eqsheet
from eqsheet.review.folding import values_together


@pytest.mark.parametrize("order", ["x[20] in mm, x in cm, x[3] in km", "x in cm, x[3] in km, x[20] in mm"])
@pytest.mark.parametrize("members", [20, 2000])
def test_members_shown_by_name(order: str, members: int) -> None:
    solution = eqsheet.parse(f"for i in 1..{members}:\n    x[i] = i*1 m\nshow {order}").solve()
    units = [solution[name].unit for name in ("x[1]", "x[3]", "x[20]", "x[19]")]
    assert units == ["cm", "km", "mm", "cm"]
    lines = {(one.first.unit, one.count) for one in values_together(solution.quantities)}
    assert lines == {("cm", members - 2), ("km", 1), ("mm", 1)}


def test_of_two_units_for_a_member_the_first_counts() -> None:
    solution = eqsheet.parse("for i in 1..3:\n    x[i] = i*1 m\nshow x[2] in mm, x[2] in km").solve()
    assert solution["x[2]"].unit == "mm"
