"""Runs the blocks of a prepared worksheet in order, and gathers values with their evidence."""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, field
from types import MappingProxyType

import numpy as np

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.model.branches import literal_values
from eqsheet.model.evaluate import evaluate_with_evidence
from eqsheet.model.tape import Formula
from eqsheet.solve.trail import Budget
from eqsheet.structure.array_sequence import as_sequence
from eqsheet.structure.verdict import Conflict
from eqsheet.worksheet.block_memory import BlockMemory
from eqsheet.worksheet.block_order import blocks_in_order
from eqsheet.worksheet.block_run import BlockRun as BlockRun
from eqsheet.worksheet.curve_choice import curve_choice_note
from eqsheet.worksheet.curve_messages import OF_CURVES
from eqsheet.worksheet.failure_messages import failure_diagnostic, start_note
from eqsheet.worksheet.follow_from_knowns import follow_from_knowns
from eqsheet.worksheet.guesses import Guesses, constant_guesses, work_out_guesses
from eqsheet.worksheet.known_quantities import known_quantities
from eqsheet.worksheet.places import line_words, span_of
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.shown_units import shown_unit, written_quantity
from eqsheet.worksheet.solve_block import BlockResult, Known, solve_equations
from eqsheet.worksheet.structure_messages import conflict_diagnostic
from eqsheet.worksheet.trust import poor_known, trust_warnings
from eqsheet.worksheet.without_unknowns import EQUAL_TO
from eqsheet.worksheet.written_values import written


@dataclass(frozen=True)
class Run:
    """Values of all quantities by number (nan where not found) and how they were come by.

    ``unsolved`` holds the numbers of the blocks that were tried and not solved.
    """

    values: Sequence[float]
    errors: Sequence[float]
    blocks: Sequence[BlockRun]
    block_of: Mapping[int, int]
    guesses: Guesses
    formulas: Sequence[Formula]
    diagnostics: tuple[Diagnostic, ...]
    best: Mapping[int, float] = field(default_factory=dict)
    unsolved: tuple[int, ...] = ()

    @property
    def failed(self) -> bool:
        """Whether a block was tried and not solved."""
        return bool(self.unsolved)


# Overflow far from the solution is a step to be shortened, not a message to the user.
@np.errstate(all="ignore")
def run_blocks(
    prepared: Prepared,
    budget: Budget,
    memory: BlockMemory | None = None,
    given: Mapping[int, BlockResult] = MappingProxyType({}),
) -> Run:
    """Solve block after block; what depends on a failed block is left out.

    Parameters
    ----------
    memory : BlockMemory, optional
        Blocks it has met before are not solved again.
    given : mapping of int to BlockResult
        Results to take for blocks, by number, instead of solving them.
    """
    if prepared.system.groups:
        return _run_groups(prepared, budget, memory, given)
    solve = solve_equations if memory is None else memory.solve
    system = prepared.system
    diagnostics: list[Diagnostic] = []
    guesses = constant_guesses(system, prepared.kinds)
    if guesses is None:
        guesses, found = work_out_guesses(system, follow_from_knowns(prepared), prepared.kinds)
        diagnostics += found
    knowns = known_quantities(prepared)
    values, errors = list(knowns.values), list(knowns.errors)
    diagnostics += [poor_known(prepared, q, values[q], errors[q]) for q in knowns.doubtful]
    formulas = list(prepared.formulas)
    dimensions = prepared.dimensions
    known = Known(values, errors)
    runs: list[BlockRun] = []
    block_of: dict[int, int] = {}
    best: dict[int, float] = {}
    failed: set[int] = set()
    unsolved: list[int] = []
    for number, equations, unknowns, after in blocks_in_order(prepared):
        result = None
        if not failed.isdisjoint(after) or _uses(formulas, equations, prepared.contested):
            failed.add(number)
        else:
            result = given.get(number) or solve(
                [formulas[e] for e in equations], unknowns, known, guesses, dimensions, budget
            )
            for equation, formula in zip(equations, result.formulas):
                formulas[equation] = formula
            if result.solved:
                for quantity, value, error in zip(unknowns, result.values, result.errors):
                    values[quantity] = value
                    errors[quantity] = error
            else:
                failed.add(number)
                best.update(zip(unknowns, result.values))
        for quantity in unknowns:
            block_of[quantity] = number
        run = BlockRun(number, equations, unknowns, after, result)
        runs.append(run)
        if result is not None:
            if result.solved:
                diagnostics += trust_warnings(system, run, dimensions)
            else:
                unsolved.append(number)
                failure = failure_diagnostic(system, prepared, run, known, guesses, runs)
                diagnostics.append(failure)
                if failure.code in OF_CURVES:
                    # No start would help.
                    continue
            diagnostics += start_note(system, run)
            diagnostics += curve_choice_note(prepared, run, known, guesses)
    verdicts = _conflicts(prepared, formulas, values, errors)
    diagnostics += [diagnostic for _, _, diagnostic in verdicts]
    _withhold(prepared, runs, values, [c for c, satisfied, _ in verdicts if not satisfied])
    return Run(
        tuple(values),
        tuple(errors),
        tuple(runs),
        block_of,
        guesses,
        tuple(formulas),
        tuple(diagnostics),
        best,
        tuple(unsolved),
    )


def _run_groups(
    prepared: Prepared, budget: Budget, memory: BlockMemory | None, given: Mapping[int, BlockResult]
) -> Run:
    """As `run_blocks`, for a worksheet with large families."""
    from eqsheet.worksheet.group_guesses import ByBlock
    from eqsheet.worksheet.group_run import GroupRun

    # Nothing can be contradicted: what is not square is prepared without groups.
    work = GroupRun(prepared, budget, memory, given)
    work.solve_all()
    return Run(
        as_sequence(work.value_array),
        as_sequence(work.error_array),
        work.runs,
        ByBlock(work.block_of),
        work.guesses,
        work.formulas,
        tuple(work.diagnostics),
        work.best,
        tuple(work.unsolved),
    )


def _uses(formulas: Sequence[Formula], equations: Sequence[int], quantities: Collection[int]) -> bool:
    """Whether one of the equations holds one of the quantities."""
    return bool(quantities) and any(q in quantities for e in equations for q in formulas[e].quantities)


def _conflicts(
    prepared: Prepared, formulas: Sequence[Formula], values: list[float], errors: list[float]
) -> list[tuple[Conflict, bool | None, Diagnostic]]:
    """Whether the statements of each over-determined piece contradict or merely repeat each other."""
    found = []
    for conflict in prepared.structure.conflicts:
        satisfied, gap = left_out_hold(prepared, conflict, formulas, values, errors)
        diagnostic = conflict_diagnostic(prepared.system, prepared.rows, conflict, satisfied, gap)
        found.append((conflict, satisfied, diagnostic))
    return found


def left_out_hold(
    prepared: Prepared,
    conflict: Conflict,
    formulas: Sequence[Formula],
    values: list[float],
    errors: list[float],
) -> tuple[bool | None, str]:
    """Whether the equations left out of a conflict hold at the solution of the others.

    Returns
    -------
    satisfied : bool or None
        None where a value they need could not be found.
    gap : str
        The sides of the first that does not hold, in words.
    """
    for row in conflict.left_out:
        number = prepared.rows[row]
        formula = formulas[number]
        inputs = [values[q] for q in formula.quantities]
        if not all(map(math.isfinite, inputs)):
            return None, ""
        evidence = evaluate_with_evidence(
            formula.tape, inputs, literal_values(formula), [errors[q] for q in formula.quantities]
        )
        left, right = formula.tape.outputs
        gap = abs(evidence.values[left] - evidence.values[right])
        size = max(evidence.sizes[left], evidence.sizes[right])
        if not gap <= EQUAL_TO * size + evidence.errors[left] + evidence.errors[right]:
            return False, _gap_words(prepared, number, evidence.values[left], evidence.values[right], values)
    return True, ""


def _gap_words(prepared: Prepared, number: int, left: float, right: float, values: Sequence[float]) -> str:
    """What the other statements make of an equation that does not hold with them."""
    system = prepared.system
    item = system.equations[number]
    quantity = item.known
    if quantity < 0:
        text = span_of(system, item.place).text
        return f"with the others, `{text}` reads {written(left)} = {written(right)} in SI units"
    kind = prepared.kinds[quantity]
    unit = shown_unit(system, prepared.dimensions, prepared.kinds, quantity)
    return (
        f"the others make `{system.names[quantity]}` {written_quantity(unit, kind, values[quantity])}, "
        f"{line_words(system, (item.place,))} sets it to {written_quantity(unit, kind, item.value)}"
    )


def _withhold(
    prepared: Prepared, runs: Sequence[BlockRun], values: list[float], contradicted: list[Conflict]
) -> None:
    """Values that contradicting statements give, and what depends on them, are not shown; knowns are."""
    columns = {column for conflict in contradicted for column in conflict.columns}
    if not columns:
        return
    tainted: set[int] = set()
    for run in runs:
        if _uses(prepared.formulas, run.equations, columns) or tainted.intersection(run.after):
            tainted.add(run.number)
            for quantity in run.unknowns:
                values[quantity] = math.nan
