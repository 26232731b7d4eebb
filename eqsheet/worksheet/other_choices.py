"""Other solutions of early blocks, chosen so that a later block has one.

The blocks that a failed one depends on, and those before it that depend on them too, are gone through in order, each
with its first solution. Where one has none, it is not the block just before that must choose another, but the
latest one that it depends on: conflict-directed backjumping (Prosser, Hybrid algorithms for the constraint
satisfaction problem, Computational Intelligence 9 (1993), 268-299).
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from time import perf_counter

from eqsheet.diagnostics.diagnostic import Diagnostic, note
from eqsheet.solve.outcome import Status
from eqsheet.solve.trail import Budget
from eqsheet.worksheet.block_memory import BlockMemory
from eqsheet.worksheet.block_run import BlockRun
from eqsheet.worksheet.other_solutions import other_solutions
from eqsheet.worksheet.places import label_of, line_words
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.run import Run, run_blocks
from eqsheet.worksheet.shown_units import shown_unit, written_quantity
from eqsheet.worksheet.solve_block import BlockResult, Known, solve_equations

# Blocks that may be gone through for one that failed.
MOST_BLOCKS = 400
# Blocks solved anew, and times that a choice came to nothing, for one worksheet: what decides where a search ends.
MOST_SOLVED = 300
MOST_DEAD_ENDS = 2000
# Only where single blocks take long does the time decide.
MOST_SECONDS = 6.0
# A block that fails within the search must not use up the time of all.
SECONDS_FOR_A_BLOCK = 1.0


def with_other_choices(
    prepared: Prepared, run: Run, budget: Budget, memory: BlockMemory | None = None
) -> Run:
    """A run in which other solutions are chosen for blocks before those that failed, as far as that helps."""
    allowance = _Allowance()
    hopeless: set[int] = set()
    notes: dict[int, Diagnostic] = {}
    while True:
        number = next((n for n in run.unsolved if n not in hopeless), None)
        if number is None:
            break
        failed = run.blocks[number - 1]
        search = _Search(prepared, run, budget, allowance)
        chosen = None if _interrupted(failed.result) else search.choose(failed)
        if chosen is None:
            hopeless.add(number)
            continue
        again = run_blocks(prepared, budget, memory, _given(run, chosen))
        if number in again.unsolved:
            hopeless.add(number)
            continue
        for choice in chosen:
            if choice.instead:
                notes[choice.block.number] = _note(prepared, again, run, choice.block, failed)
        run = again
    return replace(run, diagnostics=(*run.diagnostics, *notes.values())) if notes else run


@dataclass(slots=True)
class _Allowance:
    """What is left for one worksheet."""

    solved: int = MOST_SOLVED
    dead_ends: int = MOST_DEAD_ENDS
    deadline: float = 0.0

    def __post_init__(self) -> None:
        self.deadline = perf_counter() + MOST_SECONDS

    @property
    def spent(self) -> bool:
        return self.solved <= 0 or self.dead_ends <= 0 or perf_counter() > self.deadline


@dataclass(frozen=True, slots=True)
class _Choice:
    """The solution chosen for a block; `instead` where it is not its first."""

    block: BlockRun
    result: BlockResult
    instead: bool


class _Search:
    """The search for a choice of solutions with which one block is solved.

    Parameters
    ----------
    run : Run
        Its solutions are the first ones.
    """

    def __init__(self, prepared: Prepared, run: Run, budget: Budget, allowance: _Allowance) -> None:
        self._prepared = prepared
        self._run = run
        self._budget = Budget(budget.iterations, min(budget.seconds, SECONDS_FOR_A_BLOCK))
        self._allowance = allowance
        self._values = list(run.values)
        self._errors = list(run.errors)
        # By block and values of what it takes from elsewhere: its solutions, and whether these are all.
        self._solutions: dict[tuple[int, tuple[float, ...]], tuple[list[BlockResult], bool]] = {}

    def choose(self, failed: BlockRun) -> list[_Choice] | None:
        """Solutions of the blocks that matter, the failed one included; None where none were found."""
        blocks = _that_matter(self._run, failed)
        if blocks is None:
            return None
        position = {block.number: i for i, block in enumerate(blocks)}
        needs = [{position[a] for a in block.after if a in position} for block in blocks]
        taken = [-1] * len(blocks)
        results: list[BlockResult | None] = [None] * len(blocks)
        # Blocks whose other solutions might help where this one has come to nothing.
        culprits: list[set[int]] = [set() for _ in blocks]
        i = 0
        while i < len(blocks):
            if self._allowance.spent:
                return None
            taken[i] += 1
            result = self._solution(blocks[i], taken[i])
            if result is not None:
                results[i] = result
                for quantity, value, error in zip(blocks[i].unknowns, result.values, result.errors):
                    self._values[quantity] = value
                    self._errors[quantity] = error
                i += 1
                continue
            self._allowance.dead_ends -= 1
            reasons = culprits[i] | needs[i]
            if not reasons:
                return None
            back = max(reasons)
            culprits[back] |= reasons - {back}
            for k in range(back + 1, i + 1):
                taken[k] = -1
                culprits[k] = set()
            i = back
        return [
            _Choice(block, result, count > 0)
            for block, result, count in zip(blocks, results, taken)
            if result is not None
        ]

    def _solution(self, block: BlockRun, number: int) -> BlockResult | None:
        """The solution of that number of a block with the values as they are; None where there are no more."""
        formulas = [self._prepared.formulas[e] for e in block.equations]
        own = set(block.unknowns)
        used = tuple([self._values[q] for f in formulas for q in f.quantities if q not in own])
        found, complete = self._solutions.get((block.number, used), ([], False))
        if not complete and number == len(found):
            known = self._known(own)
            if number == 0:
                first = self._first(block, known, used)
                found, complete = ([first], False) if first is not None else ([], True)
            else:
                self._allowance.solved -= 1
                found = found + other_solutions(formulas, block.unknowns, known, self._run.guesses, found[0])
                complete = True
            self._solutions[block.number, used] = found, complete
        return found[number] if number < len(found) else None

    def _known(self, own: set[int]) -> Known:
        values = self._values.copy()
        for quantity in own:
            values[quantity] = math.nan
        return Known(values, self._errors)

    def _first(self, block: BlockRun, known: Known, used: tuple[float, ...]) -> BlockResult | None:
        """The first solution of a block; that of the run where it depends on nothing that has changed."""
        formulas = [self._prepared.formulas[e] for e in block.equations]
        own = set(block.unknowns)
        before = tuple([self._run.values[q] for f in formulas for q in f.quantities if q not in own])
        if used == before:
            result = block.result
        else:
            self._allowance.solved -= 1
            result = solve_equations(
                formulas,
                block.unknowns,
                known,
                self._run.guesses,
                self._prepared.dimensions,
                self._budget,
            )
        if _interrupted(result):
            self._allowance.solved = 0
        return result if result is not None and result.solved else None


def _that_matter(run: Run, failed: BlockRun) -> list[BlockRun] | None:
    """The blocks that a failed one depends on, those before it that depend on them, and itself, in order.

    None where they are too many, or where there are none to choose other solutions of.
    """
    needed = set(failed.after)
    before: list[BlockRun] = []
    for block in reversed(run.blocks[: failed.number - 1]):
        if block.number in needed:
            needed.update(block.after)
            before.append(block)
            if len(before) > MOST_BLOCKS:
                return None
    if not before:
        return None
    first = before[-1].number
    matter = {block.number for block in before}
    found = []
    for block in run.blocks[first - 1 : failed.number - 1]:
        if block.number in matter or not matter.isdisjoint(block.after):
            if block.result is None or not block.result.solved:
                continue
            matter.add(block.number)
            found.append(block)
            if len(found) > MOST_BLOCKS:
                return None
    return [*found, failed]


def _interrupted(result: BlockResult | None) -> bool:
    return result is not None and result.outcome is not None and result.outcome.status is Status.INTERRUPTED


def _given(run: Run, chosen: Sequence[_Choice]) -> Mapping[int, BlockResult]:
    """What need not be solved again: the solutions chosen, and whatever does not depend on those changed."""
    given = {choice.block.number: choice.result for choice in chosen}
    changed = {
        choice.block.number
        for choice in chosen
        if choice.block.result is None or choice.result.values != choice.block.result.values
    }
    for block in run.blocks:
        if not changed.isdisjoint(block.after):
            changed.add(block.number)
        elif block.result is not None and block.number not in given:
            given[block.number] = block.result
    return given


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
