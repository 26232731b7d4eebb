"""Generated code: laziness, depth, domains, and what gets into it."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
import pytest

from eqsheet.model.block_code import block_code
from eqsheet.model.derive import equation_partials
from eqsheet.model.generate import array_function, float_function, safe_function
from eqsheet.model.tape import Literal, Tape, TapeBuilder
from eqsheet.units.dimension import DIMENSIONLESS


def guarded(joint: str) -> Tape:
    """if <0 < x, joint 1 < ln x> then x else -x."""
    b = TapeBuilder()
    x, zero, one = b.quantity(0, (0, 1)), b.constant(Fraction(0)), b.constant(Fraction(1))
    positive = b.apply("lt", zero, x)
    condition = b.apply(joint, positive, b.apply("lt", one, b.apply("ln", x)))
    return b.tape((b.apply("if", condition, x, b.apply("neg", x)),))


def test_second_condition_is_evaluated_only_where_it_decides() -> None:
    both = float_function(guarded("and"))
    assert (both(-2.0), both(2.0), both(3.0)) == (2.0, -2.0, 3.0)
    with pytest.raises(ValueError, match="domain"):
        float_function(guarded("or"))(-2.0)


def test_instruction_shared_between_a_branch_and_the_outside_is_evaluated_once_outside() -> None:
    b = TapeBuilder()
    x, y = b.quantity(0, (0, 1)), b.quantity(1, (0, 1))
    root = b.apply("sqrt", y)
    chosen = b.apply("if", b.apply("lt", x, y), b.apply("mul", root, root), x)
    f = float_function(b.tape((b.apply("add", chosen, root),)))
    assert f(1.0, 4.0) == 6.0
    assert f(5.0, 4.0) == 7.0
    with pytest.raises(ValueError, match="domain"):
        f(1.0, -4.0)


def test_nested_branches_share_their_locals() -> None:
    b = TapeBuilder()
    x, zero, one = b.quantity(0, (0, 1)), b.constant(Fraction(0)), b.constant(Fraction(1))
    log = b.apply("ln", x)
    square = b.apply("mul", log, log)
    inner = b.apply("if", b.apply("lt", one, x), square, b.apply("sub", square, log))
    tape = b.tape((b.apply("if", b.apply("lt", zero, x), inner, one), x))
    f = float_function(equation_partials(tape, (0,)))
    assert f(-1.0) == (2.0, -1.0)
    e = math.e
    assert f(e) == pytest.approx((1 - e, 2 / e - 1))
    assert f(1 / e) == pytest.approx((2 - 1 / e, -2 * e - e - 1))


def test_negative_base_never_becomes_complex() -> None:
    b = TapeBuilder()
    tape = b.tape((b.apply("power", b.quantity(0, (0, 1)), Fraction(1, 3)),))
    with pytest.raises(ValueError, match="domain"):
        float_function(tape)(-8.0)
    assert math.isnan(safe_function(tape)(-8.0))
    assert np.isnan(array_function(tape)(np.array([-8.0]))[0])


@pytest.mark.parametrize("left_deep", [True, False])
def test_expressions_of_any_depth_compile(left_deep: bool) -> None:
    b = TapeBuilder()
    x = b.quantity(0, (0, 1))
    at = x
    for n in range(5000):
        other = b.constant(Fraction(n % 7))
        at = b.apply("sub", at, other) if left_deep else b.apply("sub", other, at)
    expected = 0.5
    for n in range(5000):
        expected = expected - n % 7 if left_deep else n % 7 - expected
    tape = b.tape((at, x))
    assert float_function(tape)(0.5)[0] == expected
    assert abs(float_function(equation_partials(tape, (0,)))(0.5)[1]) in (0.0, 2.0)


def test_overflow_is_raised_or_infinite() -> None:
    b = TapeBuilder()
    tape = b.tape((b.apply("exp", b.quantity(0, (0, 1))),))
    with pytest.raises(OverflowError):
        float_function(tape)(1e4)
    assert safe_function(tape)(1e4) == math.inf
    assert array_function(tape)(np.array([1e4]))[0] == math.inf


def test_code_has_no_builtins_and_no_names_of_a_worksheet() -> None:
    b = TapeBuilder()
    f = float_function(b.tape((b.apply("add", b.quantity(0, (0, 1)), b.quantity(1, (0, 1))),)))
    assert f.__globals__["__builtins__"] == {}
    assert set(f.__code__.co_varnames) == {"q0", "q1"}


def test_array_code_broadcasts_cases_against_scalars() -> None:
    b = TapeBuilder()
    x, y = b.quantity(0, (0, 1)), b.quantity(1, (0, 1))
    f = array_function(b.tape((b.apply("div", x, y), b.constant(Fraction(2)))))
    ratio, constant = f(np.array([1.0, 2.0, 0.0]), 0.0)
    assert np.isinf(ratio[:2]).all() and np.isnan(ratio[2])
    assert constant == 2.0


def test_block_with_literals_and_shared_parameters() -> None:
    # x*p = 6 and x + y = p with p = 2: literals follow the known quantities.
    b = TapeBuilder()
    x, p = b.quantity(5, (0, 1)), b.quantity(9, (0, 1))
    first = b.tape((b.apply("mul", x, p), b.literal(Literal(6.0, DIMENSIONLESS, "plain", 0, 1))))
    c = TapeBuilder()
    x, y, p = (c.quantity(k, (0, 1)) for k in (5, 3, 9))
    second = c.tape((c.apply("add", x, y), p))
    code, parameters = block_code([(first, (5, 9)), (second, (5, 3, 9))], [3, 5])
    assert parameters == (9,)
    assert code.pattern == ((0, 1), (1, 0), (1, 1))
    assert code.linearise([10.0, 4.0], [2.0, 6.0]) == ((2.0, 12.0), (2.0, 1.0, 1.0))
    assert code.residuals([10.0, 4.0], [2.0, 6.0]) == (2.0, 12.0)


def test_blocks_of_one_shape_share_one_function() -> None:
    b = TapeBuilder()
    tape = b.tape((b.quantity(0, (0, 1)), b.apply("exp", b.quantity(1, (0, 1)))))
    first, _ = block_code([(tape, (4, 5)), (tape, (5, 6))], [4, 5])
    second, _ = block_code([(tape, (14, 25)), (tape, (25, 6))], [14, 25])
    assert first is second
