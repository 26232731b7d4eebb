"""Generated code against the interpreter on random tapes."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from tape_strategies import QUANTITIES, tapes, values

from eqsheet.model.block_code import block_code
from eqsheet.model.evaluate import evaluate, evaluate_arrays, evaluate_with_evidence, first_nonfinite
from eqsheet.model.generate import (
    DOMAIN_ERRORS,
    array_function,
    float_function,
    safe_function,
    value_function,
)
from eqsheet.model.tape import Tape


def agree(got: Any, wanted: Any, size: float) -> bool:
    """Equal but for the rounding of powers, which code writes as products."""
    if not math.isfinite(wanted):
        return (math.isnan(got) and math.isnan(wanted)) or got == wanted
    return abs(got - wanted) <= 1e-13 * max(size, abs(wanted))


@given(tapes(), values())
@settings(max_examples=300, deadline=None)
def test_float_code_gives_the_interpreted_value_or_raises(tape: Tape, at: tuple[float, ...]) -> None:
    evidence = evaluate_with_evidence(tape, at[:QUANTITIES], at[QUANTITIES:])
    broken = first_nonfinite(tape, evidence.values)
    # Two branches that share an instruction may have it evaluated though neither is taken.
    anywhere = any(not math.isfinite(value) for value in evidence.values)
    try:
        got = float_function(tape)(*at)
    except DOMAIN_ERRORS:
        assert anywhere
        got = None
    safe = safe_function(tape)(*at)
    interpreted = [evidence.values[i] for i in tape.outputs]
    if not anywhere:
        assert got is not None
    if broken is None and got is not None:
        assert list(got) == interpreted
    # To the last digit, so that it does not matter which of them ran.
    assert [repr(value) for value in safe] == [repr(value) for value in (got or interpreted)]
    value = value_function(tape)
    for _ in range(14):
        assert broken is not None or list(value(*at)) == interpreted


@given(tapes(), st.lists(values(), min_size=1, max_size=4))
@settings(max_examples=200, deadline=None)
def test_array_code_gives_each_case_its_interpreted_value(tape: Tape, cases: list[tuple[float, ...]]) -> None:
    columns = [np.array(column) for column in zip(*cases)]
    steps = evaluate_arrays(tape, columns[:QUANTITIES], columns[QUANTITIES:])
    got = array_function(tape)(*columns)
    for n, case in enumerate(cases):
        evidence = evaluate_with_evidence(tape, case[:QUANTITIES], case[QUANTITIES:])
        for m, i in enumerate(tape.outputs):
            size = max(evidence.sizes[i], 1e3 * evidence.errors[i])
            if not math.isfinite(size):
                continue
            for result in (got[m], steps[i]):
                value = float(np.broadcast_to(result, (len(cases),))[n])
                assert agree(value, float(evidence.values[i]), size)


@given(tapes(), tapes(), values(), values())
@settings(max_examples=100, deadline=None)
def test_block_function_joins_its_equations(
    one: Tape, other: Tape, at: tuple[float, ...], more: tuple[float, ...]
) -> None:
    # Quantity 11 is shared, 10 and 21 are solved for.
    numbers = [(10, 11, 12), (20, 21, 11)]
    known = dict(zip((10, 11, 12, 20, 21), (*at[:QUANTITIES], *more[:2])))
    literals = [at[QUANTITIES], more[QUANTITIES]]
    code, parameters = block_code(list(zip((one, other), numbers)), (10, 21))
    x = [known[10], known[21]]
    p = [*(known[n] for n in parameters), *literals]
    sides = []
    for tape, quantities, value in zip((one, other), numbers, literals):
        steps = evaluate(tape, [known[q] for q in quantities], [value])
        sides.append([steps[i] for i in tape.outputs])
    try:
        residuals, slopes = code.linearise(x, p)
    except DOMAIN_ERRORS:
        return
    assert len(slopes) == len(code.pattern)
    assert (0, 1) not in code.pattern
    for got, (left, right) in zip(residuals, sides):
        if math.isfinite(left) and math.isfinite(right) and math.isfinite(got):
            assert abs(got - (left - right)) <= 1e-9 * (1 + abs(left) + abs(right))
