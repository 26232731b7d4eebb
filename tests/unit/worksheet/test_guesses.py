"""Guesses: start values choose the solution, bounds are kept, patterns give way to names."""

from __future__ import annotations

import pytest
from solving import errors, lines, only, solve, values

SQUARE = "x^2 = 4 m^2\n"


@pytest.mark.parametrize(
    ("guess", "root"),
    [
        ("x near 3 m", 2.0),
        ("x near -3 m", -2.0),
        ("x within .. 0 m", -2.0),
        ("x within 0 m ..", 2.0),
        ("x within -5 m .. -1 m", -2.0),
        ("x near 1 m within -5 m .. 5 m", 2.0),
        ("x near a - 7 m\na = 3 m", -2.0),
        ("x within a .. 3*a\na = 1 m", 2.0),
    ],
)
def test_a_guess_chooses_the_root(guess: str, root: float) -> None:
    solution = solve(SQUARE + guess)
    assert solution.status == "solved"
    assert solution["x"].si == pytest.approx(root)


def test_the_parts_may_stand_on_two_lines() -> None:
    assert solve(SQUARE + "x near -9 m\nx within .. 0 m").status == "solved"


@pytest.mark.parametrize(
    ("again", "part"),
    [
        ("x near 4 m", "a start value"),
        ("x within 1 m ..", "a lower bound"),
        ("x within .. 8 m", "an upper bound"),
    ],
)
def test_two_guesses_with_the_same_part_are_refused(again: str, part: str) -> None:
    found = only(solve(SQUARE + "x near 3 m within 0 m .. 10 m\n" + again), "guess-twice")
    assert found.message == f"`x` has two guesses with {part}"
    assert lines(found) == [3, 2]


def test_a_pattern_bounds_all_that_match() -> None:
    solution = solve("c_a^2 = 4 m^2\nc_b^2 = 9 m^2\nd^2 = 4 m^2\nc_* within .. 0 m\nd near 1 m")
    assert values(solution) == pytest.approx({"c_a": -2.0, "c_b": -3.0, "d": 2.0})


@pytest.mark.parametrize("order", [1, -1])
def test_a_name_goes_before_a_pattern_in_any_order(order: int) -> None:
    guesses = ["c_* within 0 m .. 9 m", "c_a within -9 m .. -1 m"][::order]
    solution = solve("c_a^2 = 4 m^2\nc_b^2 = 9 m^2\n" + "\n".join(guesses))
    assert values(solution) == pytest.approx({"c_a": -2.0, "c_b": 3.0})


def test_a_pattern_without_a_match_is_a_warning() -> None:
    solution = solve(SQUARE + "x near 1 m\nd_* near 3 m")
    assert only(solution, "pattern-without-match").message == "no quantity matches `d_*`"
    assert solution.status == "solved"


def test_only_the_star_is_special_in_a_pattern() -> None:
    solution = solve("x_1^2 = 4\nx_* within .. 0")
    assert values(solution) == {"x_1": -2.0}


def test_a_guess_on_a_known_is_silent() -> None:
    solution = solve("x = 4 m\nx near 7 m")
    assert (solution.status, solution.diagnostics) == ("solved", ())


def test_the_bounds_of_a_known_are_checked() -> None:
    solution = solve("x = 4 m\nx within 5 m .. 9 m")
    found = only(solution, "outside-bounds")
    assert found.message == "`x` = 4 m is below its bound 5 m"
    assert lines(found) == [1, 2]
    assert solution.status == "unsolved"


def test_a_closed_form_outside_its_bounds_is_no_solution() -> None:
    solution = solve("2*x = 8 m\nx within 5 m .. 9 m")
    found = only(solution, "outside-bounds")
    assert lines(found) == [1, 2]
    assert solution.status == "unsolved"
    assert "x" not in solution


def test_a_root_on_its_bound_is_a_solution() -> None:
    assert solve("2*x = 10 m\nx within 5 m .. 9 m").status == "solved"


def test_a_start_outside_the_bounds_is_moved_with_a_warning() -> None:
    solution = solve(SQUARE + "x near 9 m within 0 m .. 3 m")
    assert only(solution, "guess-outside-bounds").severity.value == "warning"
    assert values(solution) == {"x": 2.0}


def test_bounds_that_leave_no_room() -> None:
    solution = solve(SQUARE + "x within 5 m .. 3 m")
    assert "bounds-empty" in errors(solution)
    assert solution.status == "invalid"


def test_bounds_crossed_by_knowns_name_the_guess() -> None:
    found = only(solve(SQUARE + "x within a .. b\na = 3 m\nb = 2 m"), "bounds-empty")
    assert lines(found)[0] == 2


def test_a_guess_that_needs_the_solution() -> None:
    solution = solve("x^2 = y\ny^3 = x + 3\nx near y")
    assert "guess-not-known" in errors(solution)


def test_a_guess_for_a_name_no_equation_has() -> None:
    found = only(solve("flow^2 = 4\nflw near 3"), "unknown-name")
    assert found.message == "no equation mentions `flw`"
    assert found.help == "did you mean `flow`?"


def test_a_guess_must_fit_its_quantity() -> None:
    assert errors(solve(SQUARE + "x near 3 s")) == ["dimension-clash"]


def test_a_guess_that_is_no_number() -> None:
    assert "value-not-finite" in errors(solve(SQUARE + "x near a/b\na = 1 m\nb = 0"))
