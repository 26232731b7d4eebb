"""The running error bound against fifty digits, and sizes under a change of units."""

from __future__ import annotations

import math
from dataclasses import replace
from random import Random

import mpmath
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from tape_reference import NoValue, reference
from tape_strategies import PLACE, POWERS, QUANTITIES, UNITS, tapes, values

from eqsheet.model.evaluate import evaluate_with_evidence
from eqsheet.model.evidence_function import evidence_of_equations, written_out
from eqsheet.model.tape import BINARY_FUNCTIONS, UNARY_FUNCTIONS, Tape, TapeBuilder


@given(
    tapes(branching=False), values(), st.tuples(*[st.floats(-1, 1)] * QUANTITIES), st.sampled_from([0, 1e-13])
)
@settings(max_examples=500, deadline=None)
def test_error_bound_holds(tape: Tape, at: tuple[float, ...], shift: tuple[float, ...], scale: float) -> None:
    quantities, literals = at[:QUANTITIES], at[QUANTITIES:]
    errors = [scale * abs(q) for q in quantities]
    evidence = evaluate_with_evidence(tape, quantities, literals, errors)
    i = tape.outputs[0]
    # The bound is of first order: where the error is no longer small beside the value it promises nothing.
    assume(math.isfinite(evidence.values[i]) and evidence.errors[i] < 1e-6 * (1e-3 + abs(evidence.values[i])))
    with mpmath.workdps(50):
        true = [mpmath.mpf(q) + mpmath.mpf(s) * e for q, s, e in zip(quantities, shift, errors)]
        try:
            exact = reference(tape, 0, true, literals)
        except NoValue:
            assume(False)
        distance = float(abs(exact - mpmath.mpf(evidence.values[i])))
    assert distance <= evidence.errors[i] * (1 + 1e-5) + 1e-300


WITH_SPECIAL = st.one_of(st.floats(), st.sampled_from([0.0, -0.0, 1.0, 1e300, 5e-324]), st.floats(0.2, 3.0))


@given(tapes(), st.tuples(*[WITH_SPECIAL] * (QUANTITIES + 1)), st.integers(0, QUANTITIES))
@settings(max_examples=1000, deadline=None)
def test_written_out_evidence_is_the_interpreted_one(tape: Tape, at: tuple[float, ...], exact: int) -> None:
    quantities, literals = at[:QUANTITIES], at[QUANTITIES:]
    errors = [0.0 if k < exact else 1e-13 * abs(q) for k, q in enumerate(quantities)]
    try:
        evidence = evaluate_with_evidence(tape, quantities, literals, errors)
    except (ValueError, OverflowError) as problem:
        with pytest.raises(type(problem)):
            written_out(tape, exact)(quantities, literals, errors)
        return
    wanted = [[part[o] for o in tape.outputs] for part in (evidence.values, evidence.sizes, evidence.errors)]
    found = written_out(tape, exact)(quantities, literals, errors)
    assert repr([list(part) for part in found]) == repr(wanted)
    # The same outputs as sides of equations, each with the first one.
    sides = replace(tape, outputs=tuple(side for o in tape.outputs for side in (o, tape.outputs[0])))
    of_equations = evidence_of_equations(sides, exact)
    first = of_equations(quantities, literals, errors)
    for _ in range(30):
        again = of_equations(quantities, literals, errors)
    assert repr(first) == repr(again)
    values, sizes, bounds = wanted
    assert repr(first[0]) == repr(tuple(v - values[0] for v in values))
    assert repr(first[1]) == repr(tuple(max(s, sizes[0]) for s in sizes))
    assert repr(first[2]) == repr(tuple(b + bounds[0] for b in bounds))


OPERATIONS = [
    *((name, "ab") for name in ("add", "sub", "mul", "div", "pow", *BINARY_FUNCTIONS)),
    *((name, "a") for name in ("neg", *UNARY_FUNCTIONS)),
    *(("power", "a", r) for r in POWERS),
    *((name, "a", unit) for name in ("strip", "attach") for unit in UNITS),
]


@pytest.mark.parametrize("operation", OPERATIONS, ids=str)
def test_error_bound_of_each_operation_holds(operation: tuple[object, ...]) -> None:
    name, operands, *rest = operation
    b = TapeBuilder()
    leaves = [b.quantity(k, PLACE) for k in range(len(str(operands)))]
    tape = b.tape((b.apply(str(name), *leaves, *rest),))
    random = Random(20)
    judged = 0
    for _ in range(300):
        point = [random.uniform(0.0, 1.2) * 10 ** random.choice([0, 0, 0, -3, 1]) for _ in leaves]
        errors = [random.choice([0.0, 1e-13]) * x for x in point]
        evidence = evaluate_with_evidence(tape, point, [], errors)
        value, bound = evidence.values[-1], evidence.errors[-1]
        if not (math.isfinite(value) and bound < 1e-6 * abs(value)):
            continue
        judged += 1
        with mpmath.workdps(50):
            # Zero and both ends of the error put in.
            for part in (-1, 0, 1):
                exact = reference(
                    tape, 0, [mpmath.mpf(x) + part * mpmath.mpf(e) for x, e in zip(point, errors)], []
                )
                assert float(abs(exact - mpmath.mpf(value))) <= bound * (1 + 1e-5)
    assert judged > 50


@given(tapes(), values())
@settings(max_examples=200, deadline=None)
def test_no_value_is_larger_than_its_size(tape: Tape, at: tuple[float, ...]) -> None:
    evidence = evaluate_with_evidence(tape, at[:QUANTITIES], at[QUANTITIES:])
    for instruction, value, size in zip(tape.instructions, evidence.values, evidence.sizes):
        if instruction[0] not in ("lt", "le", "eq", "and", "or", "not") and math.isfinite(value):
            assert abs(value) <= size * (1 + 1e-12)
