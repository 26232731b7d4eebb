"""Which line a clash is blamed on, and which text in it."""

from __future__ import annotations

import itertools
from dataclasses import replace

import pytest
from written_formulas import formulas

from eqsheet.model.infer_dimensions import infer_dimensions

PIPE = ["rho = 998[kg/m**3]", "v = 1.5[m/s]", "dP = 2[bar]"]


def blamed(*texts: str, minor: tuple[str, ...] = ()) -> list[tuple[str, str, str]]:
    """Line, guilty text, and the text of the other line that fixed the dimension, of each clash."""
    found, names = formulas(texts)
    result = infer_dimensions(found, len(names), minor=[texts.index(m) for m in minor])
    return [
        (
            texts[c.formula],
            texts[c.formula][slice(*c.place)],
            texts[c.other_formula][slice(*c.other_place)] if c.other_formula >= 0 else "",
        )
        for c in result.clashes
    ]


def test_the_equation_with_a_forgotten_square() -> None:
    assert blamed(*PIPE, "dP = rho*v") == [("dP = rho*v", "rho*v", "2[bar]")]


def test_the_term_that_the_rest_of_the_sum_speaks_against() -> None:
    line = "dP + rho*v/2 + rho*9.81[m/s**2]*z = 3[bar]"
    assert blamed(*PIPE, "z = 3[m]", line) == [(line, "rho*v/2", "2[bar]")]


def test_the_first_term_where_the_others_agree() -> None:
    line = "rho*v + dP + rho*v**2 = 3[bar]"
    assert blamed(*PIPE, line)[0][1] == "rho*v"


def test_the_known_that_several_equations_speak_against() -> None:
    lines = ["D = 52.5[kg]", "A = 3*D**2/4", "A = 0.002[m**2]", "L = 10[m]", "L/D < 1000.0"]
    assert blamed(*lines) == [("D = 52.5[kg]", "52.5[kg]", "A = 3*D**2/4")]


def test_a_guess_before_an_equation() -> None:
    lines = ["Q = 2[m**3/s]", "A = 1[m**2]", "Q = A*v", "v = 2[m]"]
    assert blamed(*lines, minor=("v = 2[m]",))[0][:2] == ("v = 2[m]", "2[m]")


def test_an_equation_before_a_limit_that_makes_sense() -> None:
    """F*A is nothing one knows, and the limit says that a pressure is meant."""
    lines = ["F = 3[kg*m/s**2]", "A = 2[m**2]", "s = F*A", "s < 200[bar]"]
    assert blamed(*lines, minor=("s < 200[bar]",))[0][:2] == ("s = F*A", "F*A")


def test_an_equation_that_a_slip_explains_before_a_limit() -> None:
    """A deflection with L^3 in place of L^4 comes out as a plain number."""
    lines = ["EI = 9[kg*m**3/s**2]", "L = 2[m]", "q = 5[kg/s**2]", "w = 5*q*L**3/EI", "w < L/300"]
    assert blamed(*lines, minor=("w < L/300",))[0][:2] == ("w = 5*q*L**3/EI", "5*q*L**3/EI")


def test_the_reynolds_number_that_lacks_its_length() -> None:
    """The slip shows three lines further on, where a fourth root of a metre would come out."""
    lines = [
        *PIPE[:2],
        "D = 2[m]",
        "L = 8[m]",
        "mu = 3[Pa*s]",
        "Re = rho*v/mu",
        "f = 0.316/Re**(1/4)",
        "dP = f*L/D*rho*v**2/2",
        "dP < 3[bar]",
    ]
    assert blamed(*lines, minor=("dP < 3[bar]",))[0][:2] == ("Re = rho*v/mu", "rho*v/mu")


def test_all_formulas_of_a_statement_stand_and_fall_together() -> None:
    """A validity condition that comes with an equation is no second witness against a known."""
    texts = ["L = 4[m]", "p = 3*L/1[K]", "L < 400[K]"]
    found, names = formulas(texts)
    found[2] = replace(found[2], statement=1)
    result = infer_dimensions(found, len(names), minor=[2])
    assert [c.formula for c in result.clashes] == [2]


def test_the_number_without_unit_in_a_sum() -> None:
    assert blamed("p = 1[bar]", "p = 3 + x") == [("p = 3 + x", "3", "1[bar]")]


def test_the_argument_of_a_function() -> None:
    assert blamed("x = 1[m]", "L = 2[m]", "L = 3*x", "y = sin(x)")[0][:2] == ("y = sin(x)", "x")


def test_the_exponent() -> None:
    assert blamed("x = 1[m]", "L = 2[m]", "L = 3*x", "y = 2.5**x")[0][:2] == ("y = 2.5**x", "x")


def test_a_line_that_contradicts_itself() -> None:
    assert blamed("x = 3[m] + 2[s]") == [("x = 3[m] + 2[s]", "2[s]", "")]


def test_independent_clashes_are_all_reported() -> None:
    lines = [*PIPE, "dP = rho*v", "m = 3[kg]", "t = 4[s]", "m = t", "w = 2*t", "w = 7[s]"]
    assert {line for line, _, _ in blamed(*lines)} == {"dP = rho*v", "m = t"}


def test_no_clash_that_follows_from_another() -> None:
    """u takes a wrong dimension from the first line only if that line is believed."""
    lines = ["a = 1[m]", "b = 2[s]", "u = a + b", "w = u + a", "w = 4[m]"]
    assert [line for line, _, _ in blamed(*lines)] == ["u = a + b"]


def test_a_clash_among_quantities_fixed_only_together() -> None:
    lines = ["x*y = 6[m**2]", "x/y = 1", "z = x + 1[s]", "z < 5[m]"]
    assert blamed(*lines)[0][:2] == ("z = x + 1[s]", "1[s]")


def test_a_clash_among_free_quantities() -> None:
    """No dimension is known, yet x/y cannot be both a speed and a time."""
    lines = ["x/y = 2[m/s]", "x/y = 3[s]"]
    (only,) = blamed(*lines)
    assert only[1] in ("2[m/s]", "3[s]", "x/y")


@pytest.mark.parametrize(
    "lines",
    [
        [*PIPE, "dP = rho*v"],
        ["D = 52.5[kg]", "A = 3*D**2/4", "A = 0.002[m**2]", "L = 10[m]", "L/D < 1000.0"],
        ["a = 1[m]", "b = 2[s]", "u = a + b", "w = u + a"],
    ],
)
def test_the_blame_does_not_depend_on_the_order_of_lines(lines: list[str]) -> None:
    """Line and guilty text; of several lines that fixed the dimension any may be shown beside it."""
    verdicts = {tuple(sorted(b[:2] for b in blamed(*order))) for order in itertools.permutations(lines)}
    assert len(verdicts) == 1
