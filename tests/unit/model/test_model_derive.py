"""Derivatives where they do not exist, or exist only just."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest

from eqsheet.model.derive import equation_partials, partials
from eqsheet.model.evaluate import evaluate
from eqsheet.model.generate import float_function, safe_function
from eqsheet.model.tape import Tape, TapeBuilder
from eqsheet.units.dimension import Dimension
from eqsheet.units.unit import Unit


def of_one(operation: str, *rest: object) -> Tape:
    b = TapeBuilder()
    return b.tape((b.apply(operation, b.quantity(0, (0, 1)), *rest),))


def of_two(operation: str) -> Tape:
    b = TapeBuilder()
    return b.tape((b.apply(operation, b.quantity(0, (0, 1)), b.quantity(1, (0, 1))),))


def slopes(tape: Tape, *at: float) -> tuple[float, ...]:
    """Partial derivatives with respect to all quantities, never raising."""
    values: tuple[float, ...] = safe_function(partials(tape, 0, tuple(range(tape.quantities))))(*at)
    return values[1:]


def test_root_at_zero_is_infinitely_steep() -> None:
    assert slopes(of_one("sqrt"), 0.0) == (math.inf,)
    assert slopes(of_one("power", Fraction(1, 2)), 0.0) == (math.inf,)


def test_kinks_are_flat() -> None:
    assert slopes(of_one("abs"), 0.0) == (0.0,)
    assert slopes(of_one("sign"), 0.0) == (0.0,)
    assert slopes(of_two("hypot"), 0.0, 0.0) == (0.0, 0.0)


def test_equal_operands_count_as_the_first() -> None:
    assert slopes(of_two("min"), 2.0, 2.0) == (1.0, 0.0)
    assert slopes(of_two("max"), 2.0, 2.0) == (1.0, 0.0)
    assert slopes(of_two("max"), 2.0, 3.0) == (0.0, 1.0)


def test_logmean_of_equal_numbers_has_equal_weights() -> None:
    assert slopes(of_two("logmean"), 4.0, 4.0) == (0.5, 0.5)


def test_power_of_zero() -> None:
    assert slopes(of_one("power", Fraction(2)), 0.0) == (0.0,)
    assert slopes(of_one("power", Fraction(0)), 0.0) == (0.0,)
    # 0^b is 0 for every b > 0, so it does not change with b.
    assert slopes(of_two("pow"), 0.0, 2.0) == (0.0, 0.0)


def test_power_of_negative_base_with_whole_exponent() -> None:
    got = slopes(of_two("pow"), -2.0, 3.0)
    assert got[0] == 12.0
    assert math.isnan(got[1])


def test_infinite_derivative_of_the_branch_not_taken_does_not_leak() -> None:
    b = TapeBuilder()
    x = b.quantity(0, (0, 1))
    zero = b.constant(Fraction(0))
    tape = b.tape((b.apply("if", b.apply("lt", zero, x), b.apply("sqrt", x), b.apply("neg", x)),))
    assert slopes(tape, 4.0) == (0.25,)
    assert slopes(tape, 0.0) == (-1.0,)
    # Raises nothing either: the branch not taken is not evaluated.
    assert float_function(partials(tape, 0, (0,)))(-9.0) == (9.0, -1.0)


def test_tanh_keeps_digits_far_out() -> None:
    # sech(20)^2 to 17 digits, from mpmath; 1 - tanh(20)^2 is 0 in floats.
    assert slopes(of_one("tanh"), 20.0)[0] == pytest.approx(4 * math.exp(-40.0), rel=1e-15)
    assert slopes(of_one("tanh"), 800.0) == (0.0,)


def test_units_scale_derivatives() -> None:
    degf = Unit("degF", Dimension.of({"K": 1}), 5 / 9, 459.67 * 5 / 9, reading=True)
    assert slopes(of_one("strip", degf), 300.0) == (1.0 / (5 / 9),)
    assert slopes(of_one("attach", degf), 60.0) == (5 / 9,)


def test_second_derivative_of_gamma_is_refused() -> None:
    once = partials(of_one("gamma"), 0, (0,))
    with pytest.raises(ValueError, match="digamma"):
        partials(once, 1, (0,))


def test_derivatives_come_in_the_order_wanted_and_zero_where_absent() -> None:
    b = TapeBuilder()
    x, y, z = (b.quantity(k, (0, 1)) for k in range(3))
    tape = b.tape((b.apply("mul", x, y), z))
    derived = equation_partials(tape, (2, 1))
    steps = evaluate(derived, (3.0, 5.0, 7.0), ())
    assert [steps[i] for i in derived.outputs] == [8.0, -1.0, 3.0]
    assert float_function(partials(tape, 1, (0, 2)))(3.0, 5.0, 7.0) == (7.0, 0.0, 1.0)


def test_an_infinite_slope_of_what_does_not_change_is_no_slope() -> None:
    """The root of max(x - 10, 0) is flat below 10, however deep the extremes are nested."""
    b = TapeBuilder()
    x = b.quantity(0, (0, 1))
    above = b.apply("max", b.apply("sub", x, b.constant(Fraction(10))), b.constant(Fraction(0)))
    root = b.apply("sqrt", above)
    twice = b.apply("sqrt", b.apply("max", b.apply("add", above, above), b.constant(Fraction(0))))
    for tape in (b.tape((root,)), b.tape((twice,))):
        assert slopes(tape, 3.0) == (0.0,)
    assert slopes(b.tape((root,)), 14.0) == (0.25,)
    assert slopes(b.tape((twice,)), 18.0) == (0.25,)
    assert slopes(b.tape((root,)), 10.0) == (math.inf,)
