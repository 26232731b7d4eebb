"""Simplified writing of tapes."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest

from eqsheet.model.simplify import Simplifier, prune
from eqsheet.model.tape import Tape, TapeBuilder


@pytest.fixture
def s() -> Simplifier:
    return Simplifier()


def test_neutral_operands_disappear(s: Simplifier) -> None:
    x = s.put("quantity", 0)
    for same in (s.add(x, s.zero), s.sub(x, s.zero), s.mul(s.one, x), s.div(x, s.one), s.neg(s.neg(x))):
        assert same == x
    assert s.mul(x, s.zero) == s.sub(x, x) == s.zero
    assert s.power(x, Fraction(0)) == s.one
    assert s.power(x, Fraction(1)) == x


def test_exact_constants_are_folded_exactly(s: Simplifier) -> None:
    third, two = s.constant(Fraction(1, 3)), s.constant(Fraction(2))
    assert s.constants[s.add(third, third)] == Fraction(2, 3)
    assert s.constants[s.power(third, Fraction(-2))] == 9
    assert s.constants[s.div(two, third)] == 6
    assert s.constants[s.function("ln", two)] == math.log(2)


def test_constants_beyond_the_floats_become_infinite_beside_a_float(s: Simplifier) -> None:
    huge = s.constant(Fraction(10) ** 400)
    assert s.constants[s.mul(huge, s.constant(1.5))] == math.inf


def test_what_has_no_value_stays_for_the_evaluation(s: Simplifier) -> None:
    assert s.instructions[s.div(s.one, s.zero)][0] == "div"
    assert s.instructions[s.function("ln", s.zero)][0] == "ln"
    assert s.instructions[s.power(s.zero, Fraction(-1))][0] == "power"


def test_signs_move_outwards_and_meet(s: Simplifier) -> None:
    x, y = s.put("quantity", 0), s.put("quantity", 1)
    assert s.mul(s.neg(x), s.neg(y)) == s.mul(x, y)
    assert s.add(x, s.neg(y)) == s.sub(x, y)
    assert s.neg(s.sub(x, y)) == s.sub(y, x)
    assert s.sub(s.neg(x), y) == s.neg(s.add(x, y))


def test_even_roots_are_not_undone(s: Simplifier) -> None:
    # sqrt(x^2) is |x|, not x.
    x = s.put("quantity", 0)
    root = s.power(s.power(x, Fraction(2)), Fraction(1, 2))
    assert root != x
    assert s.power(s.power(x, Fraction(2)), Fraction(3)) == s.power(x, Fraction(6))


def test_both_branches_alike_need_no_condition(s: Simplifier) -> None:
    x, y = s.put("quantity", 0), s.put("quantity", 1)
    assert s.select(s.put("lt", x, y), x, x) == x


def test_prune_keeps_numbers_of_quantities_and_tells_new_ones_of_instructions() -> None:
    b = TapeBuilder()
    x, y = b.quantity(0, (0, 1)), b.quantity(1, (0, 1))
    unused = b.apply("mul", x, y)
    root = b.apply("sqrt", y)
    pruned, numbers = prune(b.tape((root,)))
    assert pruned == Tape((("quantity", 1), ("sqrt", 0)), (1,), 2, 0)
    assert (numbers[x], numbers[y], numbers[unused], numbers[root]) == (None, 0, None, 1)
