"""Equations without unknowns: knowns set again, and what is true or false among knowns."""

from __future__ import annotations

import pytest
from solving import errors, lines, only, solve, values


def test_set_twice_names_both_lines() -> None:
    solution = solve("D = 50 mm\nL = 3 m\nD = 60 mm")
    found = only(solution, "set-twice")
    assert found.message == "`D` is set twice on lines 1 and 3"
    assert lines(found) == [3, 1]
    assert solution.status == "invalid"


def test_nothing_is_computed_from_a_quantity_set_to_two_values() -> None:
    solution = solve("D = 50 mm\nD = 60 mm\nA = pi*D^2/4\nB = 2*A\nz = 2*w\nw = 1\nrequire A <= 1 m^2")
    assert values(solution) == {"z": 2.0, "w": 1.0}
    assert solution.limits == ()


@pytest.mark.parametrize("again", ["x = 50 mm", "x = 5 cm", "5 cm = x"])
def test_the_same_value_twice_is_said_to_be_the_same(again: str) -> None:
    solution = solve(f"x = 50 mm\n{again}\ny = 2*x")
    assert only(solution, "set-twice").message == "`x` is set twice to the same value on lines 1 and 2"
    assert values(solution) == {"x": 0.05, "y": 0.1}


def test_a_quantity_set_often_is_said_once() -> None:
    found = only(solve("\n".join(f"x = {i} m" for i in range(1, 30))), "set-twice")
    assert found.message.startswith("`x` is set 29 times on lines 1, 2, 3, ")
    assert len(found.labels) == 6


@pytest.mark.parametrize(
    "text", ["a*b = 12", "3 m = 300 cm", "a + b - 7 = 0", "b/a = 4/3", "sqrt(a^2 + b^2) = 5"]
)
def test_true_among_knowns_is_a_note(text: str) -> None:
    solution = solve(f"a = 3\nb = 4\n{text}")
    assert only(solution, "equation-always-true").message == f"`{text}` holds no unknown, and is true"
    assert solution.status == "solved"


def test_false_among_knowns_names_the_knowns_and_the_sides() -> None:
    solution = solve("a = 3\nb = 4\na + b = 8")
    found = only(solution, "equation-always-false")
    assert found.message == "`a + b = 8` holds no unknown, and is false"
    assert lines(found) == [3, 1, 2]
    assert found.notes == ("left side 7, right side 8, in SI units",)
    assert solution.status == "invalid"


@pytest.mark.parametrize("digits", ["0.333333333", "0.33"])
def test_typed_digits_count(digits: str) -> None:
    """Nine digits are true to nine digits; two are not the third."""
    solution = solve(f"a = 1\nb = 3\nc = 0.333333333333\nc = a/b\nd = {digits}\n3*d = 1")
    expected = ["equation-always-false"] if digits == "0.33" else []
    assert [c for c in errors(solution) if c == "equation-always-false"] == expected


def test_a_false_equation_with_units_that_clash_is_told_as_a_clash_only() -> None:
    assert errors(solve("a = 3 m\nb = 3 s\na = b*1")) == ["dimension-clash"]
