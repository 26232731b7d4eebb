"""Which unknowns are said to have been started without a guess."""

from __future__ import annotations

import pytest

import eqsheet

PAIR = "x + y = 5\nx*y = 6\n"


def said(text: str) -> list[str]:
    return [d.message for d in eqsheet.parse(text).solve().diagnostics if d.code == "started-without-guess"]


def test_the_one_that_was_put_at_a_typical_value_is_named() -> None:
    """The other is told by an equation: a guess for one is all that is wanted."""
    (message,) = said(PAIR)
    assert message == "`x` was started without a guess"


@pytest.mark.parametrize("guess", ["x near 1", "y near 4", "x within 0 .. 2.5"])
def test_a_guess_that_tells_the_others_is_enough(guess: str) -> None:
    assert said(PAIR + guess) == []


def test_bounds_on_one_side_do_not_place_an_unknown() -> None:
    assert len(said(PAIR + "x within 0 ..")) == 1


def failure(text: str) -> tuple[str, ...]:
    """Notes of the one diagnostic of a worksheet that is not solved."""
    (found,) = eqsheet.parse(text).solve().diagnostics
    assert found.code == "no-solution"
    return found.notes


def test_a_failure_names_the_blind_start_itself_where_a_start_could_help() -> None:
    assert "`x` was started without a guess" in failure("x*exp(-x) = 1")


@pytest.mark.parametrize(
    "text",
    ["cosh(x) = 0.5", "exp(x) = 0", "y = if x < 0.5 then 1 else 0.2\nx = y/2", "x^2 + y^2 = -1\nx*y = 0.5"],
)
def test_a_failure_that_no_start_mends_says_nothing_of_starts(text: str) -> None:
    assert not any("started without a guess" in note for note in failure(text))
