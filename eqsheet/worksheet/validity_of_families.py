"""Validity ranges of worksheets with large families, judged as arrays by the rules of `judge`."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.model.equation_group import BoundFormula, EquationGroup, ValidityGroup
from eqsheet.model.evaluate import evaluate_arrays
from eqsheet.model.lazy_sequence import LazySequence
from eqsheet.model.system import LimitItem
from eqsheet.worksheet.group_equations import GroupedEquations
from eqsheet.worksheet.judge import range_left, ranges_left
from eqsheet.worksheet.places import quoted
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.run import Run

Array = NDArray[np.float64]
Numbers = NDArray[np.int64]
Mask = NDArray[np.bool_]


def judge_validity_of_families(prepared: Prepared, run: Run) -> tuple[Diagnostic, ...]:
    """As `judge_validity`; what many members of a family share is told of the first, with their count."""
    system = prepared.system
    written = [number for number, item in enumerate(system.written) if item.valid]
    groups = [group for group in system.groups if group.valid]
    if not written and not groups:
        return ()
    solved = _Solved(prepared, run)
    diagnostics: list[Diagnostic] = []
    for number in written:
        if solved.matters[number]:
            diagnostics += ranges_left(prepared, run, system.equations[number])
    for start, group in zip(solved.equations.starts.tolist(), solved.equations.groups):
        matters = solved.matters[start : start + len(group)]
        for validity in group.valid:
            left = np.flatnonzero(matters & _is_left(validity, solved.values))
            if len(left):
                diagnostics.append(_told_once(prepared, run, group, validity, left))
    return tuple(diagnostics)


class _Solved:
    """What is in use at a solution.

    Attributes
    ----------
    values : ndarray (quantities,)
    matters : ndarray (equations,)
        Whether what an equation is solved for matters: see `judge_validity`.
    """

    def __init__(self, prepared: Prepared, run: Run) -> None:
        system = prepared.system
        self.values = np.array(run.values)
        self.equations = GroupedEquations(system)
        total = len(system.names)
        block = np.zeros(total, dtype=np.int64)
        for quantity, number in run.block_of.items():
            block[quantity] = number
        block_of_equation = np.zeros(len(system.equations), dtype=np.int64)
        first = np.full(int(block.max()) + 1, -1, dtype=np.int64)
        members = np.bincount(block, minlength=len(first))
        for one in prepared.structure.blocks:
            number = int(block[one.columns[0]])
            block_of_equation[[prepared.rows[r] for r in one.rows]] = number
            first[number] = one.columns[0]
        in_use, mentioned = np.zeros(total, dtype=bool), np.zeros(total, dtype=bool)
        for number, item in enumerate(system.written):
            for formula, found in ((run.formulas[number], in_use), (item.formula, mentioned)):
                numbers = np.array(formula.quantities, dtype=np.int64)
                found[numbers[_others(block[numbers], block_of_equation[number])]] = True
        for start, group in zip(self.equations.starts.tolist(), self.equations.groups):
            own = block_of_equation[start : start + len(group), None]
            for bound, found in ((group.bound, in_use), (group.as_written, mentioned)):
                found[bound.numbers[_others(block[bound.numbers], own)]] = True
        for part in system.limit_parts:
            of_limit = part.formula.quantities if isinstance(part, LimitItem) else part.bound.numbers.ravel()
            in_use[np.asarray(of_limit, dtype=np.int64)] = True
        used = in_use | ~mentioned
        alone = (block_of_equation > 0) & (members[block_of_equation] == 1)
        self.matters = ~alone | used[first[block_of_equation]]


def _others(blocks: Numbers, own: np.int64 | Numbers) -> Mask:
    """Which quantities are not solved for by their equation, by the numbers of the blocks that give them."""
    return np.asarray((blocks != own) | (blocks == 0))


def _is_left(validity: ValidityGroup, values: Array) -> Mask:
    """For which members the condition matters, and does not hold."""
    there = np.isfinite(values[validity.bound.numbers]).all(axis=1)
    for guard, branch in validity.guards:
        there &= np.isfinite(values[guard.numbers]).all(axis=1) & (_truth(guard, values) == branch)
    return np.asarray(there & ~_truth(validity.bound, values))


def _truth(bound: BoundFormula, values: Array) -> Mask:
    formula = bound.formula
    with np.errstate(all="ignore"):
        results = evaluate_arrays(formula.tape, list(values[bound.numbers.T]), bound.literals)
    truth = np.asarray(results[formula.tape.outputs[0]], dtype=float)
    return np.asarray(np.broadcast_to(truth, (len(bound),)) == 1.0)


def _told_once(
    prepared: Prepared, run: Run, group: EquationGroup, validity: ValidityGroup, left: Numbers
) -> Diagnostic:
    """The warning for the first member, with the names of the others."""
    names = prepared.system.names
    first = range_left(prepared, run, validity.item(int(left[0])))
    column = next((c for c in validity.bound.numbers.T if (c != c[0]).any()), None)
    if column is None or len(left) == 1:
        return first
    others = column[left][column[left] != column[left[0]]].tolist()
    named = quoted(LazySequence([(len(others), lambda i: names[others[i]])]))
    return replace(first, notes=(*first.notes, f"the same is so of {named}"))
