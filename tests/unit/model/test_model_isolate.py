"""Where a quantity can be isolated, and where it is linear."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest

from eqsheet.model.evaluate import evaluate
from eqsheet.model.isolate import Candidate, isolate
from eqsheet.model.linear import affine_in, is_linear_in
from eqsheet.model.tape import Tape, TapeBuilder


def values(tape: Tape, *at: float) -> list[float]:
    isolation = isolate(tape, 0)
    assert isolation is not None
    return [evaluate(c.tape, at, ())[c.tape.outputs[0]] for c in isolation.candidates]


def holds(candidate: Candidate, *at: float) -> bool:
    assert candidate.condition is not None
    return evaluate(candidate.condition, at, ())[candidate.condition.outputs[0]] is True


def function_of_x(operation: str, *rest: object) -> Tape:
    """f(x) = y"""
    b = TapeBuilder()
    x, y = b.quantity(0, (0, 1)), b.quantity(1, (0, 1))
    return b.tape((b.apply(operation, x, *rest), y))


def test_even_powers_give_both_signs_positive_first() -> None:
    assert values(function_of_x("power", Fraction(2)), math.nan, 9.0) == [3.0, -3.0]
    assert values(function_of_x("abs"), math.nan, 9.0) == [9.0, -9.0]


def test_odd_powers_keep_the_sign() -> None:
    assert values(function_of_x("power", Fraction(3)), math.nan, -8.0) == pytest.approx([-2.0])
    assert values(function_of_x("power", Fraction(-1)), math.nan, -8.0) == [-0.125]


def test_fractional_powers_have_one_root_under_a_condition() -> None:
    isolation = isolate(function_of_x("power", Fraction(2, 3)), 0)
    assert isolation is not None
    (candidate,) = isolation.candidates
    assert holds(candidate, math.nan, 4.0)
    assert not holds(candidate, math.nan, -4.0)


@pytest.mark.parametrize(
    ("exponent", "right", "which"), [(3.0, -8.0, [1]), (2.0, 9.0, [0, 1]), (1.5, 8.0, [0])]
)
def test_base_of_a_power_whose_parity_shows_only_in_the_value(
    exponent: float, right: float, which: list[int]
) -> None:
    # x^n = y with the quantity n: which of the two candidates are genuine depends on n.
    b = TapeBuilder()
    x, y, n = (b.quantity(k, (0, 1)) for k in range(3))
    isolation = isolate(b.tape((b.apply("pow", x, n), y)), 0)
    assert isolation is not None
    at = (math.nan, right, exponent)
    genuine = [i for i, c in enumerate(isolation.candidates) if holds(c, *at)]
    assert genuine == which
    for i in genuine:
        tape = isolation.candidates[i].tape
        assert evaluate(tape, at, ())[tape.outputs[0]] ** exponent == pytest.approx(right)


def test_nested_branches_multiply() -> None:
    # |x^2 - 5| = 4 has four roots.
    b = TapeBuilder()
    x, y = b.quantity(0, (0, 1)), b.quantity(1, (0, 1))
    inside = b.apply("sub", b.apply("power", x, Fraction(2)), b.constant(Fraction(5)))
    assert values(b.tape((b.apply("abs", inside), y)), math.nan, 4.0) == [3.0, -3.0, 1.0, -1.0]


@pytest.mark.parametrize("operation", ["sign", "erf", "gamma"])
def test_functions_without_inverse_are_left_to_newton(operation: str) -> None:
    assert isolate(function_of_x(operation), 0) is None


@pytest.mark.parametrize("operation", ["min", "max", "logmean"])
def test_pairs_without_inverse_are_left_to_newton(operation: str) -> None:
    assert isolate(function_of_x(operation, 1), 0) is None


def test_condition_and_branches_are_no_way_through() -> None:
    b = TapeBuilder()
    x, y = b.quantity(0, (0, 1)), b.quantity(1, (0, 1))
    condition = b.apply("lt", y, b.constant(Fraction(1)))
    assert isolate(b.tape((b.apply("if", condition, x, y), y)), 0) is None
    assert isolate(b.tape((b.apply("if", b.apply("lt", x, y), y, b.apply("neg", y)), y)), 0) is None


def test_two_occurrences_are_none_wherever_they_stand() -> None:
    b = TapeBuilder()
    x, y = b.quantity(0, (0, 1)), b.quantity(1, (0, 1))
    total = b.apply("add", x, y)
    assert isolate(b.tape((x, total)), 0) is None
    assert isolate(b.tape((b.apply("mul", total, total), y)), 0) is None
    assert isolate(b.tape((total, total)), 0) is None
    assert isolate(b.tape((b.apply("exp", y), y)), 0) is None


def test_use_by_an_instruction_no_output_needs_does_not_count() -> None:
    b = TapeBuilder()
    x, y = b.quantity(0, (0, 1)), b.quantity(1, (0, 1))
    b.apply("mul", x, x)
    assert values(b.tape((b.apply("exp", x), y)), math.nan, 1.0) == [0.0]


def test_linear_needs_factors_free_of_the_quantities() -> None:
    b = TapeBuilder()
    x, y, z = (b.quantity(k, (0, 1)) for k in range(3))
    bent = [
        b.apply("mul", x, x),
        b.apply("div", z, x),
        b.apply("power", x, Fraction(2)),
        b.apply("sign", x),
        b.apply("if", b.apply("lt", x, z), z, b.apply("neg", z)),
        b.apply("max", x, z),
    ]
    assert not any(is_linear_in(b.tape((index, z)), {0}) for index in bent)
    straight = [
        b.apply("div", x, b.apply("exp", z)),
        b.apply("if", b.apply("lt", y, z), x, z),
        b.apply("mul", b.apply("sub", x, z), b.apply("power", y, Fraction(2))),
    ]
    assert all(is_linear_in(b.tape((index, z)), {0}) for index in straight)
    assert not is_linear_in(b.tape((straight[2], z)), {0, 1})


def test_affine_needs_the_quantity_to_matter() -> None:
    b = TapeBuilder()
    x, y = b.quantity(0, (0, 1)), b.quantity(1, (0, 1))
    assert affine_in(b.tape((b.apply("mul", x, x), y)), 0) is None
    assert affine_in(b.tape((b.apply("sub", x, x), y)), 0) is None
    assert affine_in(b.tape((y, b.apply("neg", y))), 0) is None
