"""Derivatives of tapes against symbolic ones, complex steps and differences at high precision."""

from __future__ import annotations

import cmath
import math
from fractions import Fraction
from typing import Any

import mpmath
import numpy as np
import pytest
import sympy
from hypothesis import assume, given, settings
from tape_reference import NoValue, reference, symbolic
from tape_strategies import PLACE, QUANTITIES, tapes, values

from eqsheet.model.derive import equation_partials, partials, residual_tape
from eqsheet.model.evaluate import evaluate, evaluate_with_evidence
from eqsheet.model.generate import array_function, float_function, safe_function
from eqsheet.model.tape import BINARY_FUNCTIONS, UNARY_FUNCTIONS, Tape, TapeBuilder

ALL = tuple(range(QUANTITIES))


def unary_tape(operation: str) -> Tape:
    """x * f(x/3 + y): chain and product rule around one function."""
    b = TapeBuilder()
    x, y = b.quantity(0, PLACE), b.quantity(1, PLACE)
    inner = b.apply("add", b.apply("div", x, b.constant(Fraction(3))), y)
    return b.tape((b.apply("mul", x, b.apply(operation, inner)),))


def binary_tape(operation: str) -> Tape:
    """x * f(x^2, y/2)."""
    b = TapeBuilder()
    x, y = b.quantity(0, PLACE), b.quantity(1, PLACE)
    first, second = b.apply("power", x, Fraction(2)), b.apply("div", y, b.constant(Fraction(2)))
    return b.tape((b.apply("mul", x, b.apply(operation, first, second)),))


@pytest.mark.parametrize("operation", [*UNARY_FUNCTIONS, *BINARY_FUNCTIONS, "pow", "mul", "div", "sub"])
@pytest.mark.parametrize("at", [(0.3, 0.25), (0.9, 0.61), (1.1, -0.05)])
def test_each_operation_agrees_with_the_symbolic_derivative(operation: str, at: tuple[float, float]) -> None:
    tape = unary_tape(operation) if operation in UNARY_FUNCTIONS else binary_tape(operation)
    if operation == "logmean" and at[1] < 0:
        at = (at[0], -at[1])
    symbols = sympy.symbols("x y", real=True)
    expression = symbolic(tape, 0, symbols)
    # The derivative of a sign is nought but at its jump.
    derivatives = [sympy.diff(expression, s).replace(sympy.DiracDelta, lambda *_: 0) for s in symbols]
    slopes = [sympy.lambdify(symbols, derivative, "mpmath") for derivative in derivatives]
    with mpmath.workdps(40):
        expected = [slope(*map(mpmath.mpf, at)) for slope in slopes]
    got = float_function(partials(tape, 0, (0, 1)))(*at)
    # Two binary digits of each of at most ten operations may go.
    assert got[1:] == pytest.approx([float(e) for e in expected], rel=1e-14, abs=1e-14)


ANALYTIC = [f for f in UNARY_FUNCTIONS if f == "ln" or hasattr(cmath, f)]


@pytest.mark.parametrize("operation", ANALYTIC)
def test_functions_agree_with_the_complex_step(operation: str) -> None:
    f = {"ln": cmath.log}.get(operation) or getattr(cmath, operation)
    step = 1e-200
    got = float_function(partials(unary_tape(operation), 0, (0,)))(0.7, 0.3)[1]
    x = complex(0.7, step)
    assert got == pytest.approx((x * f(x / 3 + 0.3)).imag / step, rel=1e-14)


def far_from_kinks(tape: Tape, steps: list[Any]) -> bool:
    """Whether no comparison, ``min``, ``max``, ``abs`` or ``sign`` is within rounding of its switch."""
    gaps = []
    for operation, *rest in tape.instructions:
        if operation in ("min", "max", "lt", "le", "eq"):
            gaps.append(steps[rest[0]] - steps[rest[1]])
        elif operation in ("abs", "sign"):
            gaps.append(steps[rest[0]])
    return all(gap != 0 and not abs(gap) < 1e-9 for gap in gaps)


@given(tapes(), values())
@settings(max_examples=300, deadline=None)
def test_random_tapes_agree_with_differences_at_sixty_digits(tape: Tape, at: tuple[float, ...]) -> None:
    quantities, literals = at[:QUANTITIES], at[QUANTITIES:]
    derived = partials(tape, 0, ALL)
    evidence = evaluate_with_evidence(derived, quantities, literals)
    steps = evaluate(derived, quantities, literals)
    assume(all(math.isfinite(steps[i]) and abs(steps[i]) < 1e6 for i in derived.outputs))
    assume(far_from_kinks(derived, steps))
    # Cancellation inside arguments is judged by the evidence tests; here the derivative must be readable.
    assume(
        all(
            evidence.errors[i] < 1e-9 * (1 + abs(steps[i])) or math.isinf(evidence.errors[i])
            for i in derived.outputs
        )
    )
    with mpmath.workdps(60):
        h = mpmath.mpf(10) ** -20
        for k in ALL:
            ahead, behind = list(map(mpmath.mpf, quantities)), list(map(mpmath.mpf, quantities))
            ahead[k] += h
            behind[k] -= h
            try:
                rise = reference(tape, 0, ahead, literals) - reference(tape, 0, quantities, literals)
                fall = reference(tape, 0, quantities, literals) - reference(tape, 0, behind, literals)
            except NoValue:
                assume(False)
            # At a kink or a jump the two sides differ.
            assume(abs(rise - fall) < 1e-8 * h * (1 + abs(rise / h)))
            exact = float((rise + fall) / (2 * h))
            got = steps[derived.outputs[1 + k]]
            assert got == pytest.approx(
                exact, rel=1e-8, abs=1e-8 * evidence.sizes[derived.outputs[1 + k]] + 1e-9
            )


@given(tapes(), values())
@settings(max_examples=100, deadline=None)
def test_code_of_derivatives_agrees_with_the_interpreter(tape: Tape, at: tuple[float, ...]) -> None:
    derived = equation_partials(tape, ALL)
    evidence = evaluate_with_evidence(derived, at[:QUANTITIES], at[QUANTITIES:])
    expected = [evidence.values[i] for i in derived.outputs]
    if not all(math.isfinite(v) for v in expected):
        return
    slack = [1e-12 * evidence.sizes[i] + 4 * min(evidence.errors[i], 1.0) for i in derived.outputs]
    for got in (safe_function(derived)(*at), array_function(derived)(*[np.array([v, v]) for v in at])):
        for value, wanted, room in zip(got, expected, slack):
            assert np.all(np.abs(value - wanted) <= room + 1e-300)


def test_residual_is_left_minus_right() -> None:
    b = TapeBuilder()
    x, y = b.quantity(0, PLACE), b.quantity(1, PLACE)
    tape = b.tape((b.apply("mul", x, y), b.apply("add", x, y)))
    assert float_function(residual_tape(tape))(3.0, 5.0) == 7.0
    assert float_function(equation_partials(tape, (1, 0)))(3.0, 5.0) == (7.0, 2.0, 4.0)
