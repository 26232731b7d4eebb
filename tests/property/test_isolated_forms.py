"""Closed forms put back into their equations."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest
from hypothesis import assume, given, reject, settings
from hypothesis import strategies as st
from tape_strategies import PLACE, POWERS, UNITS, literal

from eqsheet.model.derive import partials
from eqsheet.model.evaluate import evaluate, evaluate_with_evidence
from eqsheet.model.isolate import Isolation, isolate
from eqsheet.model.linear import affine_in, is_linear_in
from eqsheet.model.tape import Tape, TapeBuilder

INVERTED = [
    "sqrt",
    "exp",
    "ln",
    "log10",
    "sin",
    "cos",
    "tan",
    "asin",
    "acos",
    "atan",
    "sinh",
    "cosh",
    "tanh",
    "abs",
]
ROOTS = [r for r in POWERS if r not in (0, 1)]


@st.composite
def chains(draw: st.DrawFn) -> Tape:
    """y = g(x), where x, quantity 0, occurs once; y is quantity 1; quantity 2 and a literal are around it."""
    b = TapeBuilder()
    at, y, z = (b.quantity(k, PLACE) for k in range(3))
    others = [
        z,
        b.literal(literal(1.7)),
        b.constant(Fraction(3)),
        b.apply("add", z, b.constant(Fraction(1, 2))),
    ]
    for _ in range(draw(st.integers(1, 4))):
        kind = draw(
            st.sampled_from(["arithmetic", "arithmetic", "function", "power", "pow", "pair", "unit", "neg"])
        )
        other = draw(st.sampled_from(others))
        pair = (at, other) if draw(st.booleans()) else (other, at)
        if kind == "arithmetic":
            at = b.apply(draw(st.sampled_from(["add", "sub", "mul", "div"])), *pair)
        elif kind == "function":
            at = b.apply(draw(st.sampled_from(INVERTED)), at)
        elif kind == "power":
            at = b.apply("power", at, draw(st.sampled_from(ROOTS)))
        elif kind == "pow":
            at = b.apply("pow", *pair)
        elif kind == "pair":
            at = b.apply(draw(st.sampled_from(["hypot", "atan2"])), *pair)
        elif kind == "unit":
            at = b.apply(draw(st.sampled_from(["strip", "attach"])), at, draw(st.sampled_from(UNITS)))
        else:
            at = b.apply("neg", at)
    return b.tape((y, at) if draw(st.booleans()) else (at, y))


def isolated(tape: Tape) -> Isolation:
    """Its closed forms; a chain with very many branches is let go."""
    isolation = isolate(tape, 0)
    if isolation is None:
        branches = {"sin": 5, "cos": 5, "tan": 5, "abs": 2, "cosh": 2, "hypot": 2, "pow": 2, "power": 2}
        assert math.prod(branches.get(str(i[0]), 1) for i in tape.instructions) > 24
        reject()
    return isolation


def sides(tape: Tape, x: float, y: float, z: float) -> tuple[float, float, float]:
    """Left and right side, and what rounding may make of their difference."""
    evidence = evaluate_with_evidence(tape, (x, y, z), (1.7,), (4e-16 * abs(x), 0.0, 0.0))
    left, right = tape.outputs
    room = evidence.errors[left] + evidence.errors[right]
    return evidence.values[left], evidence.values[right], room


@given(chains(), st.floats(-3, 3), st.floats(0.2, 2))
@settings(max_examples=500, deadline=None)
def test_some_candidate_gives_the_quantity_back(tape: Tape, x: float, z: float) -> None:
    # y from x, then x from y: one candidate must be x.
    side = 1 if tape.instructions[tape.outputs[0]] == ("quantity", 1) else 0
    steps = evaluate(tape, (x, 0.0, z), (1.7,))
    y = steps[tape.outputs[side]]
    # Candidates reach one turn either way.
    angles = [steps[int(i[1])] for i in tape.instructions if i[0] in ("sin", "cos", "tan")]
    assume(all(abs(angle) < 6.2 for angle in angles))
    assume(math.isfinite(y) and 1e-6 < abs(y) < 1e6)
    # Where x hardly moves y, or y is mostly rounding, x is lost in it.
    evidence = evaluate_with_evidence(tape, (x, y, z), (1.7,))
    derived = partials(tape, side, (0,))
    slope = evaluate(derived, (x, y, z), (1.7,))[derived.outputs[1]]
    assume(math.isfinite(slope) and evidence.errors[tape.outputs[side]] < 1e-9 * abs(slope))
    isolation = isolated(tape)
    found = []
    for candidate in isolation.candidates:
        assert ("quantity", 0) not in candidate.tape.instructions
        found.append(evaluate(candidate.tape, (math.nan, y, z), (1.7,))[candidate.tape.outputs[0]])
    assert any(abs(value - x) < 1e-6 for value in found)


@given(chains(), st.floats(-5, 5), st.floats(0.2, 2))
@settings(max_examples=500, deadline=None)
def test_candidates_whose_condition_holds_solve_the_equation(tape: Tape, y: float, z: float) -> None:
    isolation = isolated(tape)
    for candidate in isolation.candidates:
        x = evaluate(candidate.tape, (math.nan, y, z), (1.7,))[candidate.tape.outputs[0]]
        holds = True
        if candidate.condition is not None:
            steps = evaluate(candidate.condition, (math.nan, y, z), (1.7,))
            holds = steps[candidate.condition.outputs[0]] is True
        if not (holds and math.isfinite(x) and abs(x) < 1e6):
            continue
        left, right, room = sides(tape, x, y, z)
        if math.isfinite(room) and room < 1e-3 and abs(y) > 0.05:
            assert abs(left - right) <= 1e-6 + 1e3 * room


def test_branches_come_in_fixed_order_principal_first() -> None:
    b = TapeBuilder()
    x, y = b.quantity(0, PLACE), b.quantity(1, PLACE)
    tape = b.tape((b.apply("sin", x), y))
    isolation = isolate(tape, 0)
    assert isolation is not None
    angles = [evaluate(c.tape, (0.0, 0.5), ())[c.tape.outputs[0]] for c in isolation.candidates]
    sixth = math.pi / 6
    assert angles == pytest.approx([sixth, 5 * sixth, 13 * sixth, -7 * sixth, -11 * sixth])


@given(st.floats(-3, 3), st.floats(-3, 3), st.floats(0.2, 3))
def test_several_occurrences_of_a_linear_quantity(x: float, y: float, z: float) -> None:
    # 3*(x + z) - x/z = (x - y)*z + if z < 1 then x else 2: x three times, linear.
    b = TapeBuilder()
    qx, qy, qz = (b.quantity(k, PLACE) for k in range(3))
    left = b.apply(
        "sub", b.apply("mul", b.constant(Fraction(3)), b.apply("add", qx, qz)), b.apply("div", qx, qz)
    )
    branch = b.apply("if", b.apply("lt", qz, b.constant(Fraction(1))), qx, b.constant(Fraction(2)))
    right = b.apply("add", b.apply("mul", b.apply("sub", qx, qy), qz), branch)
    tape = b.tape((left, right))
    assert isolate(tape, 0) is None
    affine = affine_in(tape, 0)
    assert affine is not None
    steps = evaluate(affine.coefficients, (math.nan, y, z), ())
    a, c = (steps[i] for i in affine.coefficients.outputs)
    sides_at = evaluate(tape, (x, y, z), ())
    residual = sides_at[tape.outputs[0]] - sides_at[tape.outputs[1]]
    assert abs(a * x + c - residual) < 1e-13 * (20 + abs(x / z))
    assume(abs(a) > 1e-3)
    root = evaluate(affine.solution, (math.nan, y, z), ())[affine.solution.outputs[0]]
    back = evaluate(tape, (root, y, z), ())
    assert abs(back[tape.outputs[0]] - back[tape.outputs[1]]) < 1e-12 * (1 + abs(root)) * 20 / z


@given(chains())
@settings(max_examples=200, deadline=None)
def test_linear_only_where_every_difference_is_proportional(tape: Tape) -> None:
    if not is_linear_in(tape, {0}):
        return
    residuals = []
    for x in (1.0, 2.0, 4.0):
        evidence = evaluate_with_evidence(tape, (x, 0.3, 0.9), (1.7,))
        left, right = tape.outputs
        residuals.append(evidence.values[left] - evidence.values[right])
    assume(all(map(math.isfinite, residuals)))
    scale = sum(map(abs, residuals))
    assert abs((residuals[2] - residuals[1]) - 2 * (residuals[1] - residuals[0])) <= 1e-12 * scale
