"""In which unit the distance to a limit is told."""

from __future__ import annotations

import pytest

import eqsheet


@pytest.mark.parametrize(
    ("limit", "slack", "unit"),
    [
        ("require s <= 90 kPa", 40.0, "kPa"),
        ("require s <= 0.3*p", 0.01, "MPa"),
        ("require 2*s <= 0.9*p", 80.0, "kPa"),
        ("require T <= 80 degC", 20.0, "K"),
        ("require T <= 176 degF", 36.0, "delta_degF"),
    ],
    ids=["of the literal", "of the quantity that is a side", "of neither side", "degC", "degF"],
)
def test_unit_of_the_slack(limit: str, slack: float, unit: str) -> None:
    text = f"p = 2 bar\ns = p/4\nT = 60 degC\nshow s in MPa\n{limit}\n"
    (report,) = eqsheet.parse(text).solve().limits
    assert report.holds
    assert report.unit == unit
    assert report.slack == pytest.approx(slack)


def test_a_relative_tolerance_gives_no_unit() -> None:
    solution = eqsheet.parse("x = 2.99\nrequire x = 3 within 1 %").solve()
    assert solution["x"].unit == "1"
    (report,) = solution.limits
    assert (report.holds, report.unit) == (True, "1")
    assert report.slack == pytest.approx(0.02)


def test_an_absolute_tolerance_gives_its_unit() -> None:
    solution = eqsheet.parse("x = y\ny = 2.5 m\nrequire x = y within 3 mm").solve()
    assert solution["x"].unit == "mm"
