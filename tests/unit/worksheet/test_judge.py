"""Limits with margin and slack, and ranges of validity, at the solution."""

from __future__ import annotations

import pytest
from solving import errors, lines, only, solve

import eqsheet


def limits(text: str) -> list[tuple[bool, float | None, float, str]]:
    return [(x.holds, x.margin, x.slack, x.unit) for x in solve(text).limits]


@pytest.mark.parametrize(
    ("limit", "holds", "margin", "slack", "unit"),
    [
        ("v <= 2.5 m/s", True, 0.2, 0.5, "m/s"),
        ("v >= 2.5 m/s", False, -0.2, -0.5, "m/s"),
        ("2.5 m/s >= v", True, 0.2, 0.5, "m/s"),
        ("v <= 2 m/s", True, 0.0, 0.0, "m/s"),
        ("v < 1 m/s", False, -1.0, -1.0, "m/s"),
        ("v <= 9 km/h", True, 0.2, 1.8, "km/h"),
        # a chain gives the smaller one
        ("0.5 m/s <= v <= 2.5 m/s", True, 0.2, 0.5, "m/s"),
        ("1.6 m/s <= v <= 9 m/s", True, 0.25, 0.4, "m/s"),
        ("2.5 m/s <= v <= 9 m/s", False, -0.2, -0.5, "m/s"),
        # equality within a distance: the distance is the limit
        ("v = 2.1 m/s within 10 %", True, 0.11 / 0.21, 0.11, "m/s"),
        ("v = 2.1 m/s within 5 cm/s", False, -1.0, -0.05, "m/s"),
        # a limit of zero has no margin
        ("v >= 0 m/s", True, None, 2.0, "m/s"),
        # both sides move: relative to the right side
        ("v <= 1.25*v", True, 0.2, 0.5, "m/s"),
        ("2*v <= w", True, 0.2, 1.0, "m/s"),
    ],
)
def test_margin_and_slack(limit: str, holds: bool, margin: float | None, slack: float, unit: str) -> None:
    ((found_holds, found_margin, found_slack, found_unit),) = limits(f"v = 2 m/s\nw = 5 m/s\nrequire {limit}")
    assert (found_holds, found_unit) == (holds, unit)
    assert found_slack == pytest.approx(slack)
    assert found_margin == (None if margin is None else pytest.approx(margin))


@pytest.mark.parametrize(
    ("limit", "holds", "slack", "unit"),
    [
        ("T <= 30 degC", True, 10.0, "K"),
        ("T <= 86 degF", True, 18.0, "delta_degF"),
        ("T >= 300 K", False, -6.85, "K"),
        ("p <= 3 barg", True, 1.0, "bar"),
        ("T = 25 degC within 6 K", True, 1.0, "K"),
    ],
)
def test_a_limit_on_a_reading_has_slack_but_no_margin(
    limit: str, holds: bool, slack: float, unit: str
) -> None:
    text = f"T = 20 degC\np = 2 barg\nrequire {limit}"
    ((found_holds, margin, found_slack, found_unit),) = limits(text)
    assert (found_holds, margin, found_unit) == (holds, None, unit)
    assert found_slack == pytest.approx(slack)


def test_a_limit_on_a_difference_has_a_margin() -> None:
    ((holds, margin, slack, unit),) = limits("dT = T2 - T1\nT2 = 50 degC\nT1 = 20 degC\nrequire dT <= 40 K")
    assert (holds, unit) == (True, "K")
    assert (margin, slack) == (pytest.approx(0.25), pytest.approx(10.0))


@pytest.mark.parametrize("limit", ["y <= 0.3", "y >= 0.3", "0.3 >= y >= 0.3"])
def test_rounding_neither_breaks_nor_passes_a_limit(limit: str) -> None:
    """3*0.1 is above 0.3 in floats; the worksheet says it is 0.3."""
    ((holds, margin, slack, _),) = limits(f"x = 0.1\ny = 3*x\nrequire {limit}")
    assert holds
    assert margin == pytest.approx(0.0, abs=1e-15)
    assert 0.0 <= slack < 1e-15


def test_what_rounding_does_not_explain_breaks_a_limit() -> None:
    ((holds, *_),) = limits("x = 0.1\ny = 3*x\nrequire y <= 0.2999999999999")
    assert not holds


def test_a_failing_limit_is_no_error() -> None:
    solution = solve("v = 2 m/s\nrequire v <= 1 m/s")
    assert (solution.status, solution.diagnostics) == ("outside-limits", ())
    assert solution.solved


def test_limits_are_judged_in_the_order_of_the_text_with_line_and_words() -> None:
    solution = solve("require v <= 3 m/s   # noise\nv = 2 m/s\nrequire v >= 1 m/s")
    assert [(x.line, x.text) for x in solution.limits] == [(1, "v <= 3 m/s"), (3, "v >= 1 m/s")]


def test_a_limit_whose_quantity_was_not_found_is_not_judged() -> None:
    solution = solve("v = w + u\nz = 2\nrequire v <= 3\nrequire z <= 3")
    assert [x.text for x in solution.limits] == ["z <= 3"]


@pytest.mark.parametrize(
    ("limit", "code"),
    [
        ("v = 2 m/s", "limit-equality"),
        ("v", "number-as-condition"),
        ("v <= 1 m/s and v >= 0 m/s", "limit-form"),
        ("v <= w", "unknown-name"),
        ("v <= 3 m", "dimension-clash"),
        ("v = 2 m/s within 3 m", "dimension-clash"),
    ],
)
def test_slips_in_a_limit(limit: str, code: str) -> None:
    solution = solve(f"v = 2 m/s\nrequire {limit}")
    assert errors(solution) == [code]


# --- validity ------------------------------------------------------------------------------------------------

IN_LINE = "Nu_t = 0.023*Re^0.8 valid Re > 1e4\n"
DEFINED = "define turbulent(R) = 0.023*R^0.8 valid R > 1e4\n"


def warned(text: str) -> list[str]:
    return [d.message for d in solve(text).diagnostics if d.code == "outside-validity"]


def test_leaving_a_range_is_a_warning_with_the_value() -> None:
    solution = solve(IN_LINE + "Re = 5000")
    found = only(solution, "outside-validity")
    assert found.message == "the solution leaves the range `Re > 1e4`"
    assert (lines(found), found.notes) == ([1], ("`Re` is 5000",))
    assert found.span is not None and found.span.text == "Re > 1e4"
    assert (solution.status, found.severity.value) == ("solved", "warning")


@pytest.mark.parametrize(("Re", "count"), [(20_000, 0), (5000, 1), (1000, 0)])
def test_only_where_the_branch_is_taken(Re: int, count: int) -> None:
    assert len(warned(DEFINED + f"Re = {Re}\nNu = if Re < 2300 then 3.66 else turbulent(Re)")) == count


@pytest.mark.parametrize(("Re", "count"), [(20_000, 0), (5000, 1), (1000, 0)])
def test_also_where_the_formula_stands_in_an_equation_of_its_own(Re: int, count: int) -> None:
    assert len(warned(IN_LINE + f"Re = {Re}\nNu = if Re < 2300 then 3.66 else Nu_t")) == count


@pytest.mark.parametrize(("v", "count"), [(0.05, 0), (0.2, 1)])
def test_also_where_the_condition_is_solved_for(v: float, count: int) -> None:
    text = f"Re = v*D/nu\nD = 25 mm\nnu = 1e-6 m^2/s\nv = {v} m/s\nNu = if Re < 2300 then 3.66 else Nu_t\n"
    assert len(warned(IN_LINE + text)) == count


def test_a_formula_that_nothing_else_uses_is_judged() -> None:
    assert len(warned(IN_LINE + "Re = 5000")) == 1


def test_each_range_of_a_line_by_itself() -> None:
    text = "Nu = 0.023*Re^0.8*Pr^0.4 valid Re > 1e4, 0.7 <= Pr <= 160\n"
    assert warned(text + "Re = 5e4\nPr = 7") == []
    assert warned(text + "Re = 5e4\nPr = 200") == ["the solution leaves the range `0.7 <= Pr <= 160`"]
    assert len(warned(text + "Re = 5e3\nPr = 200")) == 2


def test_the_range_of_a_definition_points_at_its_use() -> None:
    found = only(solve(DEFINED + "Re = 5000\nNu = 2*turbulent(Re)"), "outside-validity")
    assert lines(found) == [3]
    assert found.span is not None and found.span.text == "turbulent(Re)"


def test_the_range_of_an_empirical_formula_has_units() -> None:
    text = "define rise(T in degC) in mm = 0.2*T valid 10 degC <= T <= 50 degC\nh = rise(T)\nT = {} degC"
    assert warned(text.format(20)) == []
    assert len(warned(text.format(60))) == 1
    assert eqsheet.parse(text.format(60)).solve()["h"].to("mm") == pytest.approx(12.0)


@pytest.mark.parametrize("limit", ["v < 2 m/s", "v <= 2 m/s", "v > 2 m/s", "v >= 2 m/s"])
def test_a_value_at_its_limit_meets_it_however_it_is_written(limit: str) -> None:
    """REFERENCE.md, Limits: strict limits hold within the forward error of their sides, like all others."""
    (report,) = solve(f"v = Q/A\nQ = 0.6 m^3/s\nA = 0.3 m^2\nrequire {limit}").limits
    assert (report.holds, report.slack) == (True, 0.0)


def test_a_gauge_pressure_in_a_product_counts_as_absolute() -> None:
    """REFERENCE.md, Readings and differences: 110 % of 100 psig, and ten per cent above it."""
    text = """
    ambient = 101.325 kPa
    p = 100 psig
    absolute = 110 % * p
    above = p + 10 % * (p - ambient)
    show absolute in psig, above in psig
    """
    solution = solve(text)
    assert solution["absolute"].value == pytest.approx(1.1 * (100 + 14.6959488) - 14.6959488, abs=1e-6)
    assert solution["above"].value == pytest.approx(110.0, abs=1e-9)
