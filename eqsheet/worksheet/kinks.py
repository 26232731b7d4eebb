"""Solutions at a kink of `abs`, `min` or `max`, beyond which every value satisfies the equations."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import replace

import numpy as np

from eqsheet.model.branches import literal_values, quantities_under
from eqsheet.model.evaluate import evaluate, evaluate_with_evidence
from eqsheet.model.tape import Formula
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import Problem, ScalarProblem
from eqsheet.solve.termination import ZERO_FLOOR
from eqsheet.worksheet.starting_values import Start

# Distance of the two sides of a kink, relative to their size, within which a solution counts as at the kink.
AT_KINK = 1e-9


def kinked(formulas: Sequence[Formula], own: Collection[int]) -> tuple[int, ...]:
    """Positions of the formulas in which an unknown of `own` decides a kink."""
    return tuple(
        position
        for position, formula in enumerate(formulas)
        if any(
            instruction[0] in ("abs", "min", "max")
            and any(formula.quantities[slot] in own for slot in quantities_under(formula.tape, index))
            for index, instruction in enumerate(formula.tape.instructions)
        )
    )


def beyond_the_kinks(
    outcome: Outcome,
    problem: Problem | ScalarProblem,
    formulas: Sequence[Formula],
    unknowns: Sequence[int],
    values: Sequence[float],
    start: Start,
) -> Outcome:
    """The outcome, with status CONTINUUM where it rests at a kink with nothing but solutions on one side.

    Parameters
    ----------
    formulas : sequence of Formula
        Those with kinks.
    values : sequence of float
        SI values by quantity number; those of `unknowns` are not read.
    """
    found = np.asarray(outcome.x).tolist()
    own = dict(zip(unknowns, found))
    off = {q: max(abs(v), ZERO_FLOOR * m) for q, v, m in zip(unknowns, found, start.magnitude)}
    if not any(_at_a_kink(formula, own, off, values) for formula in formulas):
        return outcome
    from eqsheet.solve.beside_kinks import curve_beside, roots_beside

    if isinstance(problem, ScalarProblem):
        if not roots_beside(problem, found[0]):
            return outcome
        return replace(outcome, status=Status.CONTINUUM, null_equations=(1.0,), null_unknowns=(1.0,))
    with np.errstate(all="ignore"):
        vectors = curve_beside(problem, np.asarray(outcome.x))
    if vectors is None:
        return outcome
    left, right = vectors
    return replace(
        outcome,
        status=Status.CONTINUUM,
        null_equations=tuple(left.tolist()),
        null_unknowns=tuple(right.tolist()),
    )


def _at_a_kink(
    formula: Formula, own: Mapping[int, float], off: Mapping[int, float], values: Sequence[float]
) -> bool:
    literals = literal_values(formula)
    at = evaluate(formula.tape, [own.get(q, values[q]) for q in formula.quantities], literals)
    # As everywhere, zero is what is next to nothing against what is typical.
    sizes = evaluate_with_evidence(
        formula.tape, [off.get(q, values[q]) for q in formula.quantities], literals
    ).sizes
    for operation, *rest in formula.tape.instructions:
        if operation == "abs":
            apart, size = at[rest[0]], sizes[rest[0]]
        elif operation in ("min", "max"):
            apart, size = at[rest[0]] - at[rest[1]], max(sizes[rest[0]], sizes[rest[1]])
        else:
            continue
        if abs(apart) <= AT_KINK * size:
            return True
    return False
