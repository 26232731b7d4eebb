"""Calls that are not calls: the cure fits what was meant."""

from __future__ import annotations

import pytest
from solving import errors, solve

FAMILY = "for i in 1..3:\n    T[i] = i*2 K\n"


@pytest.mark.parametrize(
    ("call", "cure"),
    [
        ("sum(T)", "`sum(T[i] for i in ...)`"),
        ("prod(T)", "`prod(T[i] for i in ...)`"),
        ("max(T)", "`max(T[i] for i in ...)`"),
        ("min(T[2])", "`min(T[2] for i in ...)`"),
        ("sum(T[1], T[2])", "`a + b`"),
        ("max(T)", "two values or more"),
    ],
)
def test_an_aggregate_says_over_which_members_it_runs(call: str, cure: str) -> None:
    solution = solve(f"{FAMILY}y = {call}\n")
    assert errors(solution) == ["members-missing"]
    assert cure in solution.diagnostics[0].help


@pytest.mark.parametrize(
    ("text", "code"), [("k = 2\nz = 3 m/k\n", "ambiguous-unit"), ("q = 2\nz = 3 m/q\n", "unknown-unit")]
)
def test_a_unit_that_is_a_quantity_wants_spaces(text: str, code: str) -> None:
    solution = solve(text)
    assert errors(solution) == [code]
    assert solution.diagnostics[0].help.endswith("put spaces around the operator before it")
