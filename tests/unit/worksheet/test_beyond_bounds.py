"""A solution that only the bounds shut out is found and named, with the bound's line."""

from __future__ import annotations

from solving import lines, only, solve


def test_the_bound_that_shuts_the_solution_out_is_named_with_its_place() -> None:
    """x*y = 6 and x + y = 5 have the roots 2 and 3."""
    found = only(solve("x*y = 6 m^2\nx + y = 5 m\nx within 7 m .. 9 m\ny within 0 m .."), "no-solution")
    assert 3 in lines(found)[:2]
    (told,) = [n for n in found.notes if n.startswith("outside the bounds")]
    assert told.endswith(("with x = 2 m", "with x = 3 m"))
    assert "within the bounds" in found.message


def test_one_unknown_is_looked_for_past_its_bounds() -> None:
    """ln(x) + x = 1 has the root 1."""
    found = only(solve("ln(x) + x = 1\nx near 4 within 3 .. 5"), "no-solution")
    assert lines(found) == [1, 2]
    assert "outside the bounds the equations are satisfied, with x = 1" in found.notes


def test_where_there_is_no_solution_at_all_no_bound_is_blamed() -> None:
    found = only(solve("x^2 + y^2 = -1\nx - y = 0.5\nx within 0 .. 5"), "no-solution")
    assert 3 not in lines(found)


def test_bounds_at_zero_are_given_up_last() -> None:
    """x^2 + x*y = 8, y = 2: the roots are 2 and -4; the positive one is told."""
    found = only(
        solve("x^2 + x*y = 8\ny^3 + y = 10 + 0*x\nx near 6 within 5 .. 9\ny within 0 .."), "no-solution"
    )
    assert "outside the bounds the equations are satisfied, with x = 2" in found.notes


def test_a_worksheet_without_bounds_is_not_searched_again() -> None:
    found = only(solve("x^2 + y^2 = -1\nx - y = 0.5"), "no-solution")
    assert not any("outside the bounds" in note for note in found.notes)
