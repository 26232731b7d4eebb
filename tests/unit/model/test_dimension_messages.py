"""What clashes and open dimensions read like."""

from __future__ import annotations

import pytest
from written_formulas import formulas, statements

from eqsheet.diagnostics.diagnostic import Diagnostic, Severity
from eqsheet.model.dimension_messages import dimension_diagnostics
from eqsheet.model.infer_dimensions import infer_dimensions

PIPE = ["rho = 998[kg/m**3]", "v = 1.5[m/s]", "dP = 2[bar]"]


def diagnostics(*texts: str) -> tuple[Diagnostic, ...]:
    found, names = formulas(texts)
    return dimension_diagnostics(infer_dimensions(found, len(names)), found, statements(texts), names)


def only(*texts: str) -> Diagnostic:
    (diagnostic,) = diagnostics(*texts)
    return diagnostic


def test_a_clash_names_both_places_and_the_cure() -> None:
    clash = only(*PIPE, "dP = rho*v")
    assert clash.code == "dimension-clash"
    assert clash.severity is Severity.ERROR
    assert clash.message == "`dP` is a pressure, but `rho*v` is a mass flux"
    assert [(label.span.line, label.span.text) for label in clash.labels] == [
        (4, "rho*v"),
        (3, "2[bar]"),
        (4, "dP"),
    ]
    assert clash.labels[1].text == "`dP` is a pressure by this line"
    assert clash.notes == ("`rho` is a density (kg/m^3, line 1)", "`v` is a speed (m/s, line 2)")
    assert clash.help == "it would fit with `v^2` in place of `v`"


@pytest.mark.parametrize(
    ("lines", "message", "help_text"),
    [
        (
            ["rho = 998[kg/m**3]", "h = 2[m]", "p = 1[bar]", "p = rho*h"],
            "`p` is a pressure, but `rho*h` is a mass per area",
            "is the acceleration of gravity missing? It is `const.g_n`",
        ),
        (
            ["P = 3[W]", "E = 5[J]", "t = 3[s]", "P = E"],
            "`P` is a power, but `E` is an energy or torque",
            "`E` lacks a factor in 1/s; division by `t` would mend that",
        ),
        (
            ["Q = 1[m**3/s]", "D = 3[m]", "v = 2[m/s]", "Q = 3*D**2/4"],
            "`Q` is a volume flow, but `3*D**2/4` is an area",
            "`3*D**2/4` lacks a factor in m/s, which `v` would be",
        ),
        (
            ["p = 1[bar]", "p = 3 + x"],
            "`p` is a pressure, but `3` has no unit",
            "give it a unit: `3 Pa`",
        ),
        (
            ["D = 52.5[kg]", "A = 3*D**2/4", "A = 0.002[m**2]", "L = 10[m]", "L/D < 1000.0"],
            "`D` is a length, but `52.5[kg]` is a mass",
            "give it in a unit of length, such as m",
        ),
        (
            ["E = 4[J]", "m = 2[kg]", "v = 3[m/s]", "E = m*v**3"],
            "`E` is an energy or torque, but `m*v**3` is kg*m^3/s^3",
            "it would fit with `v^2` in place of `v^3`",
        ),
    ],
)
def test_the_cure_of_usual_slips(lines: list[str], message: str, help_text: str) -> None:
    clash = only(*lines)
    assert clash.message == message
    assert clash.help == help_text


@pytest.mark.parametrize(
    ("line", "message"),
    [
        ("y = sin(L)", "`sin` takes a plain number, but `L` is a length"),
        ("y = 2.5**L", "an exponent must be a plain number, but `L` is a length"),
        (
            "y = L**n",
            "under an exponent with a quantity in it the base must be a plain number, but `L` is a length",
        ),
    ],
)
def test_arguments(line: str, message: str) -> None:
    clash = only("L = 2[m]", "x = 3[m]", "L = 3*x", "n = 2.5", line)
    assert clash.code == "dimension-of-argument"
    assert clash.message == message


def test_a_sum_says_why() -> None:
    clash = only("x = 3[m] + 2[s]")
    assert clash.message == "`3[m]` is a length, but `2[s]` is a time"
    assert clash.notes == ("the terms of a sum must have one dimension",)


def test_sides_with_open_quantities_are_told_by_their_ratio() -> None:
    clash = only("x/y = 2[m/s]", "x = 3[s]*y", "x < 5*z")
    assert "cannot be alike" in clash.message or "is a" in clash.message
    assert clash.severity is Severity.ERROR


def test_an_open_dimension_is_a_warning() -> None:
    open_one = only("y = 3*x")
    assert open_one.code == "dimension-open"
    assert open_one.severity is Severity.WARNING
    assert open_one.message == "nothing fixes the dimensions of `x` and `y`"
    assert [label.span.text for label in open_one.labels] == ["x", "y"]
    assert "`x near 1 m`" in open_one.help and "`show x in m`" in open_one.help


def test_what_is_known_of_open_dimensions_is_said() -> None:
    assert only("x*y = 6[m**2]").notes == ("`x*y` is an area",)


def test_each_independent_group_is_told_apart() -> None:
    found = diagnostics("x*y = 6[m**2]", "a = 3*b")
    assert [d.message for d in found] == [
        "nothing fixes the dimensions of `a` and `b`",
        "nothing fixes the dimensions of `x` and `y`",
    ]


def test_quantities_open_because_of_a_clash_are_not_told() -> None:
    """w and u are open only because their line was set aside."""
    found = diagnostics(*PIPE, "x = 2[m]", "L = 3[m]", "L = 2*x", "w = sin(x)*v*u", "u = 3*w2")
    assert [d.code for d in found] == ["dimension-of-argument"]


def test_a_unit_that_ends_in_the_name_of_a_quantity() -> None:
    """10 bar/m was read as a unit; m is a quantity here too."""
    clash = only("p = 2[bar]", "m = 3.5", "p = 10[bar/m]", "p < 7[bar]")
    assert clash.help == "`bar/m` was read as a unit; if `m` is meant as the quantity, put spaces: `bar / m`"
