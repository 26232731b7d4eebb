"""Guesses for all members of a family, and which of two counts."""

from __future__ import annotations

import pytest
from both_ways import codes, only

import eqsheet

SQUARES = "for i in 1..3:\n    x[i]^2 = 4\n"


@pytest.mark.parametrize(
    ("first", "second", "what"),
    [
        ("x near 1", "x near -3", "a start value"),
        ("x within 0 .. 5", "x within 0.5 ..", "a lower bound"),
        ("x near 1 within .. 5", "x within .. 6", "an upper bound"),
    ],
)
def test_two_guesses_for_a_whole_family(first: str, second: str, what: str) -> None:
    found = only(f"{SQUARES}{first}\n{second}", "guess-twice")
    assert found.message == f"`x` has two guesses with {what}"
    assert [label.span.line for label in found.labels] == [4, 3]


def test_guesses_that_add_to_each_other() -> None:
    text = SQUARES + "x near -1\nx within .. 0\nx[3] within 0 ..\nx[3] near 1\n"
    assert codes(text) == []
    solution = eqsheet.parse(text).solve()
    assert [round(solution[f"x[{i}]"].si, 9) for i in (1, 2, 3)] == [-2.0, -2.0, 2.0]


def test_each_instance_has_guesses_of_its_own() -> None:
    text = (
        "template t:\n    for i in 1..2:\n        x[i]^2 = 4\n    x near 1\n"
        "use t as a\nuse t as b:\n    x near -1\n"
    )
    assert codes(text) == []
    solution = eqsheet.parse(text).solve()
    assert [round(solution[name].si, 9) for name in ("a.x[2]", "b.x[2]")] == [2.0, -2.0]
