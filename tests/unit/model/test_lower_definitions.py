"""Definitions and empirical formulas: written out at each use, each slip said once in its own line."""

from __future__ import annotations

import math
from textwrap import dedent

import pytest

import eqsheet


def solve(text: str) -> eqsheet.Solution:
    return eqsheet.parse(dedent(text).strip("\n")).solve()


def found(text: str) -> list[tuple[str, int]]:
    """Codes of the errors with their lines."""
    return [
        (d.code, d.span.line)
        for d in solve(text).diagnostics
        if d.severity.value == "error" and d.span is not None
    ]


def test_dimensions_are_worked_out_afresh_at_each_use() -> None:
    solution = solve("define square(d) = d^2\nA = square(3 m)\nt = square(2 s)\nn = square(5)")
    assert {n: (v.si, v.dimension.text) for n, v in solution.items()} == {
        "A": (9.0, "m^2"),
        "t": (4.0, "s^2"),
        "n": (25.0, "1"),
    }


def test_a_definition_may_use_quantities_and_definitions() -> None:
    solution = solve("define twice(x) = k*x\ndefine four(x) = twice(twice(x))\nk = 2\ny = four(3 m)")
    assert solution["y"].si == 12.0


def test_a_parameter_hides_a_quantity_of_its_name() -> None:
    solution = solve("define half(x) = x/2\nx = 8\ny = half(3 m)")
    assert solution["y"].si == 1.5


def test_a_definition_without_parameters_hides_nothing() -> None:
    """A function's name without a bracket is a plain name."""
    solution = solve("define f(x) = 2*x\nf = 3\ny = f(f)")
    assert solution["y"].si == 6.0


ANTOINE = (
    "define p_sat(T in degC) in mmHg = 10^(8.07131 - 1730.63/(233.426 + T)) valid 1 degC <= T <= 100 degC\n"
)


def test_an_empirical_formula_converts_at_its_boundary() -> None:
    """Worked out here with the plain numbers the formula is published for."""
    solution = solve(ANTOINE + "T = 323.15 K\np = p_sat(T)\nshow p in mmHg")
    assert solution["p"].value == pytest.approx(10 ** (8.07131 - 1730.63 / (233.426 + 50)), rel=1e-12)
    assert solution["p"].dimension.text == "kg/(m*s^2)"


def test_an_empirical_formula_is_solved_backwards() -> None:
    solution = solve(ANTOINE + "p = 100 mmHg\np = p_sat(T)\nshow T in degC")
    assert solution["T"].value == pytest.approx(1730.63 / (8.07131 - math.log10(100)) - 233.426, rel=1e-12)
    assert solution["T"].kind == "reading"


def test_a_plain_number_at_the_boundary() -> None:
    solution = solve("define rate(Q in gpm, C in 1) in psi/ft = C*Q^2\nx = rate(2 gpm, 3)\nshow x in psi/ft")
    assert solution["x"].value == pytest.approx(12.0)


@pytest.mark.parametrize(
    ("definition", "code"),
    [
        ("define f(x, x) = x", "parameter-twice"),
        ("define f(T in degC) = T", "definition-half-with-units"),
        ("define f(T in degC, q) in K = T + q", "definition-half-with-units"),
        ("define f(T in degC) in K = k*T", "quantity-in-empirical-formula"),
        ("define f(x) = f(x)", "definition-uses-itself"),
        ("define f(x) = 3 kgg*x", "unknown-unit"),
        ("define f(x) = log(x)", "log-ambiguous"),
        ("define f(x in kgg) in m = x", "unknown-unit"),
        ("define f(x) = x valid x", "number-as-condition"),
        ("define f(x) = x > 1", "comparison-in-equation"),
        ("define f(x) = const.nope*x", "unknown-constant"),
        ("define f(x) = g(x)", "unknown-function"),
    ],
)
@pytest.mark.parametrize("use", ["", "y = 1 + f(20)"], ids=["unused", "used"])
def test_each_slip_is_said_once_in_the_line_of_the_definition(definition: str, code: str, use: str) -> None:
    assert found(f"k = 2\n{definition}\n{use}") == [(code, 2)]


def test_a_slip_that_is_alike_elsewhere_is_not_hidden() -> None:
    assert found("define f(x) = 3 kgg*x\ny = f(2)\nz = 2 kgg") == [("unknown-unit", 1), ("unknown-unit", 3)]


def test_a_name_is_defined_once() -> None:
    solution = solve("define f(x) = x\ndefine f(x) = 2*x\ny = f(1)")
    (diagnostic,) = [d for d in solution.diagnostics if d.severity.value == "error"]
    assert (diagnostic.code, [label.span.line for label in diagnostic.labels]) == ("defined-twice", [2, 1])


def test_a_function_of_the_language_is_not_defined_anew() -> None:
    assert found("define sin(x) = x\ny = sin(1)") == [("definition-of-built-in", 1)]


def test_definitions_that_use_each_other() -> None:
    assert found("define f(x) = g(x)\ndefine g(x) = f(x)\ny = f(1)") == [
        ("definition-uses-itself", 1),
        ("definition-uses-itself", 2),
    ]


@pytest.mark.parametrize("use", ["f()", "f(1, 2)"])
def test_the_number_of_arguments(use: str) -> None:
    codes = [code for code, _ in found(f"define f(x) = x\ny = {use}")]
    assert codes in (["argument-count"], ["empty-brackets"])


def test_an_argument_that_does_not_fit_is_told_at_the_use() -> None:
    assert ("dimension-clash", 2) in found("define f(x) = x + 1\ny = f(3 m)")
    assert found(ANTOINE + "p = p_sat(3 bar)")[0][1] == 2


def test_definitions_that_would_grow_without_bound_are_refused() -> None:
    text = "define f0(x) = x + x^1.5\n" + "".join(
        f"define f{i}(x) = f{i - 1}(x) + f{i - 1}(2.5*x)*f{i - 1}(x^1.1)\n" for i in range(1, 20)
    )
    assert {code for code, _ in found(text + "y = f19(1.5)")} == {"formula-too-large"}
