"""The interpreter, and the evidence it gives."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
import pytest

from eqsheet.model.evaluate import evaluate, evaluate_with_evidence, first_nonfinite
from eqsheet.model.generate import array_function, safe_function
from eqsheet.model.tape import Tape, TapeBuilder


def build() -> tuple[TapeBuilder, int, int]:
    b = TapeBuilder()
    return b, b.quantity(0, (0, 1)), b.quantity(1, (0, 1))


def last(b: TapeBuilder, index: int) -> Tape:
    return b.tape((index,))


def test_limits_are_infinite_and_the_rest_is_nan() -> None:
    b, x, y = build()
    indices = [
        b.apply("div", x, y),
        b.apply("ln", y),
        b.apply("power", y, Fraction(-1)),
        b.apply("sqrt", b.apply("neg", x)),
        b.apply("exp", b.apply("mul", x, b.constant(1e4))),
        b.apply("div", y, y),
    ]
    values = evaluate(b.tape(tuple(indices)), (2.0, 0.0), ())
    got = [values[i] for i in indices]
    assert got[:3] == [math.inf, -math.inf, math.inf]
    assert math.isnan(got[3])
    assert got[4] == math.inf
    assert math.isnan(got[5])


def test_first_nonfinite_names_the_innermost_culprit() -> None:
    b, x, y = build()
    root = b.apply("sqrt", b.apply("sub", x, y))
    tape = last(b, b.apply("mul", root, x))
    assert first_nonfinite(tape, evaluate(tape, (1.0, 2.0), ())) == root
    assert first_nonfinite(tape, evaluate(tape, (2.0, 1.0), ())) is None


def test_branch_not_taken_is_no_culprit() -> None:
    b, x, y = build()
    root = b.apply("sqrt", x)
    chosen = b.apply("if", b.apply("lt", x, b.constant(Fraction(0))), y, root)
    tape = last(b, chosen)
    assert first_nonfinite(tape, evaluate(tape, (-1.0, 2.0), ())) is None
    direct = b.tape((b.apply("add", chosen, root),))
    assert first_nonfinite(direct, evaluate(direct, (-1.0, 2.0), ())) == root


@pytest.mark.parametrize("joint", ["and", "or"])
def test_condition_without_value_has_no_branch(joint: str) -> None:
    b, x, y = build()
    broken = b.apply("lt", b.apply("sqrt", x), y)
    known = b.apply("lt", y, x) if joint == "or" else b.apply("lt", x, y)
    for condition in (
        broken,
        b.apply("not", broken),
        b.apply(joint, known, broken),
        b.apply(joint, broken, known),
    ):
        tape = last(b, b.apply("if", condition, x, y))
        assert math.isnan(evaluate(tape, (-1.0, 2.0), ())[tape.outputs[0]])
        assert np.isnan(array_function(tape)(np.array([-1.0]), 2.0)[0])
        assert math.isnan(safe_function(tape)(-1.0, 2.0))


def size(b: TapeBuilder, index: int, *at: float) -> float:
    return evaluate_with_evidence(last(b, index), at, ()).sizes[index]


def test_size_of_a_sum_is_its_largest_term_and_of_a_product_the_product() -> None:
    b, x, y = build()
    difference = b.apply("sub", x, y)
    assert size(b, difference, 1000.0, 999.0) == 1000.0
    assert size(b, b.apply("mul", difference, difference), 1000.0, 999.0) == 1e6
    assert size(b, b.apply("power", difference, Fraction(3)), 1000.0, 999.0) == pytest.approx(1e9)
    # One part in 1000 was cancelled, so the reciprocal, 1, is as uncertain as something of 1000.
    assert size(b, b.apply("power", difference, Fraction(-1)), 1000.0, 999.0) == 1000.0
    assert size(b, b.apply("div", x, difference), 1000.0, 999.0) == 1e6


def test_size_of_a_function_follows_its_slope() -> None:
    b, x, _ = build()
    assert size(b, b.apply("ln", x), 1.0, 0.0) == 1.0
    assert size(b, b.apply("sin", x), math.pi, 0.0) == pytest.approx(math.pi)
    assert size(b, b.apply("sqrt", x), 0.0, 0.0) == 0.0


@pytest.mark.parametrize("scale", [1e-6, 1e6])
def test_sizes_scale_with_the_unit(scale: float) -> None:
    # (x - y)*sqrt(x*y)/x: of the dimension of x.
    b, x, y = build()
    root = b.apply("sqrt", b.apply("mul", x, y))
    index = b.apply("div", b.apply("mul", b.apply("sub", x, y), root), x)
    assert size(b, index, 3.0 * scale, 2.9 * scale) == pytest.approx(
        scale * size(b, index, 3.0, 2.9), rel=1e-14
    )


def test_errors_put_in_come_out_by_the_slope() -> None:
    b, x, y = build()
    tape = last(b, b.apply("mul", b.apply("power", x, Fraction(2)), y))
    evidence = evaluate_with_evidence(tape, (3.0, 5.0), (), (1e-6, 1e-6))
    assert evidence.errors[-1] == pytest.approx(2 * 3 * 5 * 1e-6 + 9 * 1e-6, rel=1e-5)


def test_exact_operations_have_no_error() -> None:
    b, x, y = build()
    tape = last(b, b.apply("max", b.apply("neg", x), b.apply("abs", y)))
    assert evaluate_with_evidence(tape, (1.0, -2.0), ()).errors == (0.0,) * len(tape.instructions)


def test_the_extreme_has_the_error_of_the_other_only_where_that_may_be_chosen() -> None:
    b, x, y = build()
    tape = last(b, b.apply("max", x, y))
    assert evaluate_with_evidence(tape, (-7.0, 0.0), (), (1e-3, 0.0)).errors[-1] == 0.0
    assert evaluate_with_evidence(tape, (-7.0, 0.0), (), (1e-3, 1e-5)).errors[-1] == 1e-5
    assert evaluate_with_evidence(tape, (-1e-4, 0.0), (), (1e-3, 0.0)).errors[-1] == 1e-3


def test_the_root_of_nothing_is_off_by_the_root_of_the_error() -> None:
    b, x, _ = build()
    tape = last(b, b.apply("sqrt", x))
    assert evaluate_with_evidence(tape, (0.0, 1.0), (), (1e-8, 0.0)).errors[-1] == pytest.approx(1e-4)
