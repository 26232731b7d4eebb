"""Further solutions of one block, for where a block after it has none with the first."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

import numpy as np

from eqsheet.model.branches import literal_values, quantities_under
from eqsheet.model.derive import partials
from eqsheet.model.evaluate import evaluate, evaluate_with_evidence
from eqsheet.model.tape import Formula, Tape
from eqsheet.solve.other_roots import SAME, other_roots, scalar_roots
from eqsheet.solve.scalar_newton import scalar_newton
from eqsheet.solve.termination import ACCEPTABLE
from eqsheet.solve.trail import Budget, Trail
from eqsheet.worksheet.block_equations import scalar_problem
from eqsheet.worksheet.guesses import Guesses
from eqsheet.worksheet.solve_block import BlockResult, Known, closed_forms, judged
from eqsheet.worksheet.starting_values import Start

# Other solutions given of one block: each costs solving the blocks after it.
MOST_FOR_A_BLOCK = 4
# Larger blocks are not searched for other solutions: they rarely have ones that matter, and it takes long.
LARGEST_SEARCHED = 12
# Turns to either side of an angle: as many solutions as these, and of a sine twice that, have no other bound.
MOST_TURNS = 6
_SEARCH = Budget(iterations=60, seconds=1.0)
_PERIODS = {"sin": math.tau, "cos": math.tau, "tan": math.pi}


def other_solutions(
    originals: Sequence[Formula],
    unknowns: Sequence[int],
    known: Known,
    guesses: Guesses,
    first: BlockResult,
) -> list[BlockResult]:
    """Solutions of a block besides its first one; those with the same signs come first.

    Parameters
    ----------
    originals : sequence of Formula
        The equations before any branch was held.
    known : Known
        The values of `unknowns` are nan.
    first : BlockResult
        Solved.
    """
    if len(unknowns) == 1:
        found = _of_one(unknowns[0], known, guesses, first)
    elif len(unknowns) > LARGEST_SEARCHED or first.start is None or first.problem is None:
        return []
    else:
        outcomes = other_roots(first.problem, [np.array(first.values)], MOST_FOR_A_BLOCK, _SEARCH)
        found = [judged(first.formulas, unknowns, known, first.start, o, first.problem) for o in outcomes]
    kept = [r for r in found if r.solved and _hold(originals, unknowns, r.values, known.values)]
    kept.sort(key=lambda r: sum(v * f < 0.0 for v, f in zip(r.values, first.values)))
    return kept


def _of_one(unknown: int, known: Known, guesses: Guesses, first: BlockResult) -> list[BlockResult]:
    """Further solutions of one equation."""
    formula = first.formulas[0]
    if unknown not in formula.quantities:
        return []
    if first.outcome is None:
        forms = [r for r in closed_forms(formula, unknown, known, guesses) if r.solved]
        others = [r for r in forms if r.values != first.values][:MOST_FOR_A_BLOCK]
        return others + _turned(formula, unknown, known, guesses, [first, *others])
    if first.start is None:
        return []
    scalar = scalar_problem(formula, unknown, known.values, first.start)
    outcomes = scalar_roots(scalar, [first.values[0]], MOST_FOR_A_BLOCK, _SEARCH)
    others = [judged([formula], [unknown], known, first.start, o, None) for o in outcomes]
    return others + _turned(formula, unknown, known, guesses, [first])


def _turned(
    formula: Formula, unknown: int, known: Known, guesses: Guesses, found: Sequence[BlockResult]
) -> list[BlockResult]:
    """Solutions whole turns away from those found, nearest to the first of them first."""
    turned: list[BlockResult] = []
    low, high = guesses.bounds(unknown)
    for point, reach in _a_turn_away(formula, unknown, known, [r.values[0] for r in found]):
        start = Start((point,), (low,), (high,), (reach,), (0,))
        problem = scalar_problem(formula, unknown, known.values, start)
        outcome = scalar_newton(problem, point, Trail("newton", point, _SEARCH))
        result = judged([formula], [unknown], known, start, outcome, None)
        value = result.values[0]
        if result.solved and all(abs(value - r.values[0]) > SAME * reach for r in (*found, *turned)):
            turned.append(result)
    return sorted(turned, key=lambda r: abs(r.values[0] - found[0].values[0]))


def _a_turn_away(
    formula: Formula, unknown: int, known: Known, values: Sequence[float]
) -> Iterator[tuple[float, float]]:
    """Points at which an angle of a sine, cosine or tangent is whole turns away, and how far one turn is."""
    tape = formula.tape
    slot = formula.quantities.index(unknown)
    literals = literal_values(formula)
    for operation, *operands in tape.instructions:
        if operation not in _PERIODS or slot not in quantities_under(tape, operands[0]):
            continue
        angle = Tape(tape.instructions, (operands[0],), tape.quantities, tape.literals)
        slopes = partials(angle, 0, (slot,))
        for value in values:
            inputs = [value if q == unknown else known.values[q] for q in formula.quantities]
            slope = evaluate(slopes, inputs, literals)[slopes.outputs[1]]
            if not math.isfinite(slope) or slope == 0.0:
                continue
            turn = abs(_PERIODS[operation] / slope)
            for count in range(1, MOST_TURNS + 1):
                yield value + count * turn, turn
                yield value - count * turn, turn


def _hold(
    formulas: Sequence[Formula], unknowns: Sequence[int], found: Sequence[float], values: Sequence[float]
) -> bool:
    """Whether the equations hold with the branches that the solution itself takes."""
    own = dict(zip(unknowns, found))
    for formula in formulas:
        evidence = evaluate_with_evidence(
            formula.tape, [own.get(q, values[q]) for q in formula.quantities], literal_values(formula)
        )
        left, right = formula.tape.outputs
        gap = abs(evidence.values[left] - evidence.values[right])
        size = max(evidence.sizes[left], evidence.sizes[right])
        if not gap <= max(1e3 * ACCEPTABLE * size, evidence.errors[left] + evidence.errors[right]):
            return False
    return True
