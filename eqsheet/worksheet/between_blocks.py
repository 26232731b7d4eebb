"""Blocks are not islands: where a block has no solution, those before it may have taken the wrong one of several.

A block that is solved before another may have several solutions, of which only one lets the other be solved.
Where a block fails, the other solutions of the blocks it depends on are sought and tried, nearest block first,
in a fixed order and a bounded number.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import replace

import numpy as np

from eqsheet.diagnostics.diagnostic import Diagnostic, note
from eqsheet.model.branches import literal_values
from eqsheet.model.evaluate import evaluate_with_evidence
from eqsheet.model.tape import Formula
from eqsheet.solve.other_roots import other_roots, scalar_roots
from eqsheet.solve.termination import ACCEPTABLE
from eqsheet.solve.trail import Budget
from eqsheet.worksheet.block_equations import scalar_problem
from eqsheet.worksheet.block_memory import BlockMemory
from eqsheet.worksheet.places import label_of, line_words
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.run import BlockRun, Run, run_blocks
from eqsheet.worksheet.shown_units import shown_unit, written_quantity
from eqsheet.worksheet.solve_block import BlockResult, Known, closed_forms, judged

# Other solutions tried for one block, and all in all: each costs a run of the blocks after it.
MOST_FOR_A_BLOCK = 4
MOST_TRIES = 12
# Larger blocks are not searched for other solutions: they rarely have ones that matter, and it takes long.
LARGEST_SEARCHED = 12
_SEARCH = Budget(iterations=60, seconds=1.0)


def run_between_blocks(prepared: Prepared, budget: Budget, memory: BlockMemory | None = None) -> Run:
    """Solve block after block; where one fails, with other solutions of those it depends on.

    The first other solution with which the failed block is solved, and no other fails instead, is taken, and
    said so; where there is none, the first solutions stand.
    """
    run = run_blocks(prepared, budget, memory)
    left = MOST_TRIES
    hopeless: set[int] = set()
    notes: list[Diagnostic] = []
    while left > 0:
        number = next((n for n in run.unsolved if n not in hopeless), None)
        if number is None:
            break
        failed = run.blocks[number - 1]
        better, left = _with_other_solution(prepared, run, failed, budget, memory, left, notes)
        if better is None:
            hopeless.add(failed.number)
        else:
            run = better
    return replace(run, diagnostics=(*run.diagnostics, *notes)) if notes else run


def _with_other_solution(
    prepared: Prepared,
    run: Run,
    failed: BlockRun,
    budget: Budget,
    memory: BlockMemory | None,
    left: int,
    notes: list[Diagnostic],
) -> tuple[Run | None, int]:
    """A run in which a failed block is solved, None if no other solution tried gives one; and the tries left."""
    count = len(run.unsolved)
    for block in _before(run, failed):
        kept = {b.number: b.result for b in run.blocks if b.number < block.number and b.result is not None}
        for other in _others(prepared, run, block):
            if left == 0:
                return None, 0
            left -= 1
            again = run_blocks(prepared, budget, memory, {**kept, block.number: other})
            now = again.blocks[failed.number - 1]
            if now.result is not None and now.result.solved and len(again.unsolved) < count:
                notes.append(_note(prepared, again, run, block, failed))
                return again, left
    return None, left


def _before(run: Run, failed: BlockRun) -> Iterator[BlockRun]:
    """Solved blocks that a failed one depends on, nearest first."""
    needed = set(failed.after)
    for block in reversed(run.blocks[: failed.number - 1]):
        if block.number in needed:
            needed.update(block.after)
            if block.result is not None and block.result.solved:
                yield block


def _others(prepared: Prepared, run: Run, block: BlockRun) -> list[BlockResult]:
    """Further solutions of a block, best first."""
    result = block.result
    assert result is not None
    values = list(run.values)
    for quantity in block.unknowns:
        values[quantity] = math.nan
    known = Known(values, run.errors)
    if result.outcome is None:
        found = closed_forms(result.formulas[0], block.unknowns[0], known, run.guesses)
        return [r for r in found if r.solved and r.values != result.values][:MOST_FOR_A_BLOCK]
    if len(block.unknowns) > LARGEST_SEARCHED or result.start is None:
        return []
    taken = [np.array(result.values)]
    if len(block.unknowns) == 1:
        scalar = scalar_problem(result.formulas[0], block.unknowns[0], known.values, result.start)
        outcomes = scalar_roots(scalar, [result.values[0]], MOST_FOR_A_BLOCK, _SEARCH)
    elif result.problem is not None:
        outcomes = other_roots(result.problem, taken, MOST_FOR_A_BLOCK, _SEARCH)
    else:
        return []
    originals = [prepared.formulas[e] for e in block.equations]
    others = []
    for outcome in outcomes:
        other = judged(result.formulas, block.unknowns, known, result.start, outcome, result.problem)
        if other.solved and _hold(originals, block.unknowns, other.values, values):
            others.append(other)
    return others


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


def _note(prepared: Prepared, again: Run, run: Run, block: BlockRun, failed: BlockRun) -> Diagnostic:
    system = prepared.system

    def written(source: Run, quantity: int) -> str:
        unit = shown_unit(system, prepared.dimensions, prepared.kinds, quantity)
        return written_quantity(unit, prepared.kinds[quantity], source.values[quantity])

    places = [system.equations[e].place for e in block.equations]
    quantity = next((q for q in block.unknowns if again.values[q] != run.values[q]), block.unknowns[0])
    later = line_words(system, [system.equations[e].place for e in failed.equations])
    return note(
        "other-solution-taken",
        f"`{system.names[quantity]}` from {line_words(system, places)} is {written(again, quantity)}: with "
        f"{written(run, quantity)} {later} would have no solution",
        label_of(system, places[0]),
        help="a guess (`near`) or bounds (`within`) say which solution is meant",
    )
