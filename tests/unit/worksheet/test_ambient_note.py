"""A worksheet with gauge pressures says what they stand on, and where one is taken as absolute."""

from __future__ import annotations

import pytest
from solving import only, solve

VESSEL = "p = 10 barg\nD = 500 mm\nt = 5 mm\n"


def test_a_gauge_pressure_as_a_factor_is_pointed_out() -> None:
    """The stress is of 11.01325 bar, not of 10 bar: 55.07 MPa by hand."""
    solution = solve(VESSEL + "sigma = p*D/(2*t)\nshow sigma in MPa")
    assert solution["sigma"].value == pytest.approx(1.101325 * 500 / 10, rel=1e-12)
    (said,) = only(solution, "ambient-pressure").notes
    assert said.startswith("`p` counts as absolute in the products of line 4;")


def test_the_cure_is_taken_without_a_word() -> None:
    solution = solve(VESSEL + "ambient = 101.325 kPa\nsigma = (p - ambient)*D/(2*t)\nshow sigma in MPa")
    assert solution["sigma"].value == pytest.approx(50.0, rel=1e-12)
    assert only(solution, "ambient-pressure").notes == ()


def test_differences_of_gauge_pressures_are_no_matter() -> None:
    solution = solve("p_1 = 3 barg\np_2 = 2 barg\nF = (p_1 - p_2)*A\nA = 2 cm^2")
    assert only(solution, "ambient-pressure").notes == ()
