"""Bounds carried through random equations with conditions never lose a solution.

Each worksheet is made around a point: its equations are random expressions with `if`, each set equal to what it comes
to there, so that the point is a solution. Whatever the bounds around it, the ranges must hold it.
"""

from __future__ import annotations

import math
import random
from collections.abc import Mapping, Sequence

import pytest

import eqsheet
from eqsheet.model.branches import chosen_branches, held_conditions, literal_values, switches
from eqsheet.model.evaluate import evaluate_with_evidence
from eqsheet.model.tape import Formula
from eqsheet.worksheet.intervals import narrowed

NAMES = ("a", "b", "c")
ONE_ARGUMENT = (
    *("sqrt", "exp", "ln", "log10", "asin", "acos", "atan", "tanh"),
    *("sin", "cos", "abs", "cosh", "tan"),
)
TWO_ARGUMENTS = ("min", "max", "hypot", "atan2")
POWERS = ("2", "3", "4", "(-1)", "(-2)", "0.5", "1.5", "(1/3)", "(-0.5)")
WORKSHEETS_A_SEED = 60
# The point is a solution to rounding; what an equation makes of rounding is no fault of the ranges.
FEWEST_DIGITS = 1e-9


def number(choice: random.Random) -> str:
    value = round(choice.uniform(-3.0, 3.0), 2)
    return f"{value}" if value >= 0.0 else f"({value})"


def expression(choice: random.Random, depth: int) -> str:
    """A random expression of `NAMES`, conditions in every third place."""
    if depth == 0 or choice.random() < 0.1:
        return choice.choice(NAMES) if choice.random() < 0.7 else number(choice)
    kind = choice.random()
    a = expression(choice, depth - 1)
    if kind < 0.3:
        return f"({a} {choice.choice('+-*/')} {expression(choice, depth - 1)})"
    if kind < 0.4:
        return f"({a})^{choice.choice(POWERS)}"
    if kind < 0.5:
        return f"{choice.choice(TWO_ARGUMENTS)}({a}, {expression(choice, depth - 1)})"
    if kind < 0.8:
        return f"(if {condition(choice, depth - 1)} then {a} else {expression(choice, depth - 1)})"
    return f"{choice.choice(ONE_ARGUMENT)}({a})"


def condition(choice: random.Random, depth: int) -> str:
    kind = choice.random()
    if depth > 0 and kind < 0.25:
        return (
            f"({condition(choice, depth - 1)} {choice.choice(('and', 'or'))} {condition(choice, depth - 1)})"
        )
    if depth > 0 and kind < 0.35:
        return f"not ({condition(choice, depth - 1)})"
    operator = choice.choice(("<", "<=", ">", ">="))
    return f"{expression(choice, depth)} {operator} {expression(choice, min(depth, 1))}"


def planted(choice: random.Random) -> tuple[Sequence[Formula], list[float]] | None:
    """Equations of all of `NAMES` and a solution of theirs by number; None where they have no value there."""
    expressions = [expression(choice, choice.choice((1, 2, 3))) for _ in NAMES]
    text = "".join(f"{e} = e_{k}\n" for k, e in enumerate(expressions))
    text += "".join(f"0*{name} = z_{name}\n" for name in NAMES)
    prepared = eqsheet.parse(text).prepare()
    system = prepared.system
    point = [round(choice.uniform(-3.0, 3.0), 3) for _ in system.names]
    for formula in prepared.formulas:
        inputs = [point[q] for q in formula.quantities]
        evidence = evaluate_with_evidence(formula.tape, inputs, literal_values(formula))
        left, right = formula.tape.outputs
        value = evidence.values[left]
        if not math.isfinite(value) or evidence.errors[left] > FEWEST_DIGITS * abs(value):
            return None
        right_side = formula.tape.instructions[right]
        assert right_side[0] == "quantity"
        point[formula.quantities[right_side[1]]] = value
    return prepared.formulas, point


def bounds_around(choice: random.Random, value: float) -> tuple[float, float]:
    """Bounds that hold a value, of a random kind: none, its sign, or some width."""
    kind = choice.random()
    if kind < 0.2:
        return -math.inf, math.inf
    if kind < 0.3:
        return (0.0, math.inf) if value >= 0.0 else (-math.inf, 0.0)
    width = choice.choice((0.0, 0.01, 1.0, 10.0)) * (abs(value) + 0.1)
    return value - choice.random() * width, value + choice.random() * width


def with_branches(
    choice: random.Random, formulas: Sequence[Formula], point: Sequence[float]
) -> list[Sequence[Mapping[int, bool]]]:
    """Conditions held as they are at the point: all of them, and some."""
    found = switches(formulas)
    taken = chosen_branches(formulas, found, point.__getitem__)
    some = tuple(branch if choice.random() < 0.5 else -1 for branch in taken)
    held = [held_conditions(formulas, found, branches) for branches in (taken, some)]
    assert None not in held
    return [conditions for conditions in held if conditions is not None]


@pytest.mark.parametrize("seed", range(20))
def test_no_bounds_around_a_solution_lose_it(seed: int) -> None:
    choice = random.Random(seed)
    tried = 0
    for _ in range(WORKSHEETS_A_SEED):
        found = planted(choice)
        if found is None:
            continue
        tried += 1
        formulas, point = found
        for _ in range(4):
            bounds = [bounds_around(choice, value) for value in point]
            for held in ((), *with_branches(choice, formulas, point)):
                result = narrowed(range(len(point)), formulas, [math.nan] * len(point), bounds, held=held)
                assert result.empty == -1
                for value, (low, high) in zip(point, result.ranges):
                    slack = FEWEST_DIGITS * max(abs(value), 1.0)
                    assert low - slack <= value <= high + slack
    assert tried >= WORKSHEETS_A_SEED // 10
