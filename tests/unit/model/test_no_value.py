"""What has no finite value is named, with the reason and its arguments."""

from __future__ import annotations

import pytest

import eqsheet

KNOWNS = {
    "sqrt(-3.2 m^2)": "`sqrt(-3.2 m^2)` takes the square root of a negative number",
    "ln(0)": "`ln(0)` takes the logarithm of zero",
    "log10(-2)": "`log10(-2)` takes the logarithm of a negative number",
    "1/0": "`1/0` divides by zero",
    "2*(0/0)": "`(0/0)` divides zero by zero",
    "acos(1.5)": "`acos(1.5)` takes the arccosine of a number outside -1 .. 1",
    "(-2)^0.5": "`(-2)^0.5` raises a negative number to a power that is not whole",
    "0^-1": "`0^-1` raises zero to a negative power",
    "logmean(3, -2)": "`logmean(3, -2)` takes the mean of two numbers of different signs",
    "gamma(-2)": "`gamma(-2)` takes the gamma function of zero or a negative whole number",
    "exp(1000)": "`exp(1000)` is beyond the range of floating-point numbers, about 1.8e308",
}


@pytest.mark.parametrize("value", KNOWNS)
def test_a_known_without_value_says_why(value: str) -> None:
    (found,) = eqsheet.parse(f"x = {value}").solve().diagnostics
    assert found.code == "value-not-finite"
    assert found.message == f"`x` has no value: {KNOWNS[value]}"


def test_arguments_are_given_where_the_text_does_not_show_them() -> None:
    (found,) = eqsheet.parse("x = 3*sqrt(2 m^2 - 5 m^2)").solve().diagnostics
    assert found.notes == ("`2 m^2 - 5 m^2` is -3 m^2",)
    assert found.span is not None
    assert found.span.text == "sqrt(2 m^2 - 5 m^2)"


def test_an_equation_without_value_says_why_and_with_which_values() -> None:
    (found,) = eqsheet.parse("A = 1 m^2\nB = 5 m^2\nL = sqrt(A - B)").solve().diagnostics
    assert found.message == "`L` has no value: `sqrt(A - B)` takes the square root of a negative number"
    assert found.notes == ("`A - B` is -4 m^2", "here A = 1 m^2, B = 5 m^2")


def test_the_reason_lies_inside_a_definition() -> None:
    """The place is the use, where the engineer can change something; the words are of what happens inside."""
    (found,) = eqsheet.parse("define half(x) = 1/(x - 2)\na = 2\ny = half(a)").solve().diagnostics
    assert found.message == "`y` has no value: `half(a)` divides by zero"
    assert found.notes == ("here a = 2",)


def test_a_guess_without_value_says_why() -> None:
    found = eqsheet.parse("A = -4\nx near sqrt(A)\nx^3 = 8").solve().diagnostics
    assert [d.message for d in found] == [
        "the guess has no value: `sqrt(A)` takes the square root of a negative number"
    ]
