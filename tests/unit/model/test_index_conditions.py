"""Conditions on indices are settled before the members of the branches are looked up."""

from __future__ import annotations

import pytest
from both_ways import codes, only, prepared

import eqsheet

CHAIN = "for i in 1..{n}:\n    a[i] = if i = 1 then 5 else if i = {n} then 7 else a[i-1] + 1\n"


def values(text: str) -> dict[str, float]:
    solution = eqsheet.parse(text).solve()
    assert solution.status == "solved", solution.diagnostics
    return {name: quantity.si for name, quantity in solution.quantities.items()}


def test_only_the_branch_that_counts_is_looked_up() -> None:
    text = CHAIN.format(n=4)
    assert codes(text) == []
    assert values(text) == {"a[1]": 5.0, "a[2]": 6.0, "a[3]": 7.0, "a[4]": 7.0}


def test_large_families_stay_arrays() -> None:
    system = prepared(CHAIN.format(n=5000), 1000).system
    assert [len(group) for group in system.groups] == [4998]
    assert values(CHAIN.format(n=5000))["a[4999]"] == 5003.0


def test_condition_inside_an_expression_and_with_a_whole_known() -> None:
    text = (
        "N = 3\nfor i in 1..4:\n    x[i] = i\n    b[i] = 2*(if i < N and i + 1 != 3 then x[i+1] else 0) + 1"
    )
    assert [values(text)[f"b[{i}]"] for i in (1, 2, 3, 4)] == [5.0, 1.0, 1.0, 1.0]


def test_members_of_a_set() -> None:
    text = (
        "rows pipe: up of pipe, v\n    P1 - 2\n    P2 P1 3\n    P3 P2 4\n"
        "for p in pipe:\n    s[p] = v[p] + (if p = P1 then 0 else s[up[p]])"
    )
    assert codes(text) == []
    assert values(text)["s[P3]"] == 9.0


def test_index_of_a_sum() -> None:
    text = "for i in 1..3:\n    x[i] = i*1 m\ny = sum(if j = 1 then 0 m else x[j-1] for j in 1..4)"
    assert codes(text) == []
    assert values(text)["y"] == 6.0


def test_members_of_a_limit_keep_their_order() -> None:
    text = "for i in 1..4:\n    x[i] = i\n    require x[i] <= (if i = 3 then 9 else x[i+1])\nx[5] = 5"
    limits = eqsheet.parse(text).solve().limits
    assert [limit.text.rpartition(" (")[2] for limit in limits] == ["i = 1)", "i = 2)", "i = 3)", "i = 4)"]
    assert [limit.slack for limit in limits] == pytest.approx([1.0, 1.0, 6.0, 1.0])


def test_a_branch_that_counts_wants_its_members() -> None:
    text = "for i in 1..4:\n    a[i] = if i = 2 then 5 else a[i-1] + 1"
    assert only(text, "no-such-member").message == "there is no `a[0]` (at i = 1)"


@pytest.mark.parametrize(
    ("head", "condition"),
    [("for i in 1..4:\n", "i = 1"), ("rows s: K\n    A 1\n    B 2\nfor i in s:\n", "i = A")],
)
def test_dimensions_of_the_branches_agree(head: str, condition: str) -> None:
    found = only(f"{head}    a[i] = if {condition} then 5 m else 2 s", "dimension-clash")
    assert found.message == "`a[i]` is a length, but `2 s` is a time"


def test_parameters_are_no_indices() -> None:
    text = "define f(i) = if i = 1 then 2 else 3*i\nfor i in 1..3:\n    y[i] = f(i + 1)"
    assert [values(text)[f"y[{i}]"] for i in (1, 2, 3)] == [6.0, 9.0, 12.0]


def test_quantities_in_the_condition_are_left_to_the_solution() -> None:
    text = "v = 2\nfor i in 1..3:\n    y[i] = if i > v then 1 else 0"
    assert [values(text)[f"y[{i}]"] for i in (1, 2, 3)] == [0.0, 0.0, 1.0]
