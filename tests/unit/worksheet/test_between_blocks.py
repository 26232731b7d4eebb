"""Blocks are not islands: an early block takes the solution that lets a later one be solved."""

from __future__ import annotations

import math

import pytest

import eqsheet
from eqsheet.worksheet.solution import Solution


def solved(text: str) -> Solution:
    """The solution of a worksheet that must be solved."""
    solution = eqsheet.parse(text).solve()
    assert solution.status == "solved", [d.message for d in solution.diagnostics]
    return solution


def codes(solution: Solution) -> list[str]:
    """Codes of all diagnostics."""
    return [d.code for d in solution.diagnostics]


def test_another_root_of_an_iterated_block_is_taken_where_the_first_leaves_a_later_block_none() -> None:
    for first, second in ((2.5, 3.0), (-2.5, 2.0)):
        sign = math.copysign(1.0, first)
        solution = solved(
            f"x^2 - 5*x + 6 = 0\nx near {5 - second}\ny = sqrt({sign:.0f}*(x - {abs(first)}))\n"
        )
        assert solution["x"].si == pytest.approx(second, rel=1e-12)
        assert "other-solution-taken" in codes(solution)


def test_another_closed_form_is_taken() -> None:
    solution = solved("a^2 = 9\nb = ln(-a)\n")
    assert solution["a"].si == -3.0
    assert solution["b"].si == pytest.approx(math.log(3.0), rel=1e-12)


def test_the_note_names_both_values_and_the_later_line() -> None:
    solution = solved("a^2 = 9 m^2\nb = ln(-a/(1 m))\n")
    note = next(d for d in solution.diagnostics if d.code == "other-solution-taken")
    assert "`a` from line 1 is -3 m" in note.message
    assert "with 3 m line 2" in note.message


def test_two_troubles_are_cured_each_by_its_own_block() -> None:
    solution = solved("a^2 = 9\nb = ln(-a)\nc^2 = 16\nd = sqrt(-c)\n")
    assert (solution["a"].si, solution["c"].si, solution["d"].si) == (-3.0, -4.0, 2.0)
    assert codes(solution).count("other-solution-taken") == 2


def test_bounds_are_kept() -> None:
    solution = eqsheet.parse("a^2 = 9\na within 0 .. 10\nb = ln(-a)\n").solve()
    assert solution.status == "unsolved"
    assert solution["a"].si == 3.0


def test_nothing_is_tried_where_every_block_is_solved() -> None:
    solution = solved("a^2 = 9\nb = ln(a)\n")
    assert solution["a"].si == 3.0
    assert "other-solution-taken" not in codes(solution)


def test_a_block_two_steps_before_is_reached() -> None:
    solution = solved("a^2 = 9\nm = a + 1\nb = sqrt(-m)\n")
    assert solution["a"].si == -3.0
    assert solution["b"].si == pytest.approx(math.sqrt(2.0), rel=1e-12)


def test_a_value_without_one_good_digit_is_no_solution_and_the_other_root_is_taken() -> None:
    """Wien's displacement law: the equation has a root at zero too, by which nothing can be divided."""
    solution = solved("5*(1 - exp(-x)) = x\nb = const.h*const.c/(const.k_B*x)\n")
    # CODATA: 2.897 771 955 e-3 m K.
    assert solution["b"].si == pytest.approx(2.897771955e-3, rel=1e-9)
    assert "other-solution-taken" in codes(solution)


def test_two_early_blocks_change_together() -> None:
    """x^2 = a + b - 5.5 has a solution only where both quadratics take their larger root."""
    solution = solved("(a-1)*(a-3) = 0\n(b-1)*(b-3) = 0\nx^2 = a + b - 5.5\na near 1.2\nb near 0.8\n")
    assert (solution["a"].si, solution["b"].si) == pytest.approx((3.0, 3.0), rel=1e-12)
    assert codes(solution).count("other-solution-taken") == 2


def test_a_trouble_that_moves_on_is_followed() -> None:
    """Each of the lines has two roots, and only the positive one lets the next have any."""
    text = "c_0 = 2\n" + "".join(f"c_{i} - c_{i + 1} = 3*c_{i + 1}^2\n" for i in range(6))
    solution = solved(text)
    expected = 2.0
    for i in range(1, 6):
        expected = (-1.0 + math.sqrt(1.0 + 12.0 * expected)) / 6.0
        assert solution[f"c_{i}"].si == pytest.approx(expected, rel=1e-9)


def test_the_next_trouble_does_not_bring_the_first_one_back() -> None:
    """The roots of x^2 = 9 serve one of two later lines each."""
    solution = eqsheet.parse("x^2 = 9\ny = sqrt(x)\nz = sqrt(-x)\n").solve()
    assert solution.status == "unsolved"
    assert solution["x"].si == 3.0
    assert solution["y"].si == pytest.approx(math.sqrt(3.0), rel=1e-12)


def test_further_turns_of_an_angle_are_tried() -> None:
    solution = solved("sin(t) = 0.5\nx = sqrt(t - 20)\n")
    # The first angle beyond 20 with this sine.
    assert solution["t"].si == pytest.approx(math.pi - math.asin(0.5) + 3.0 * math.tau, rel=1e-12)
    solution = solved("cos(3*t + 1) + 0.01*t = 0.5\nt near 0\nx = sqrt(t - 5)\n")
    assert solution["t"].si > 5.0
    assert math.cos(3.0 * solution["t"].si + 1.0) + 0.01 * solution["t"].si == pytest.approx(0.5, rel=1e-12)


def test_a_root_next_to_the_first_is_found() -> None:
    """Alternate depths of a channel near the critical one, y + c/y^2 = E: the lower one is meant."""
    solution = solved("y + 0.35/y^2 = 1.335\ny near 1.2\ns = sqrt(0.88 - y)\n")
    y = solution["y"].si
    assert 0.8 < y < 0.88
    assert y + 0.35 / y**2 == pytest.approx(1.335, rel=1e-12)


def test_the_same_signs_are_tried_first() -> None:
    solution = solved("(x - 2)*(x + 2.5)*(x - 9) = 0\nx near 1.9\ny = ln(abs(x) - 2.2)\n")
    assert solution["x"].si == pytest.approx(9.0, rel=1e-12)


def test_only_blocks_that_matter_are_changed() -> None:
    solution = solved("a^2 = 9\nb^2 = 16\nc = sqrt(-a)\nd = b + 1\n")
    assert (solution["a"].si, solution["b"].si) == (-3.0, 4.0)
    assert codes(solution).count("other-solution-taken") == 1
