"""Runs the blocks of a worksheet with large families: large blocks and chains as arrays, others one by one."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.model.evaluate import as_typed
from eqsheet.model.lazy_sequence import LazySequence
from eqsheet.model.tape import Formula
from eqsheet.solve.trail import Budget
from eqsheet.structure.array_sequence import as_sequence
from eqsheet.structure.verdict import Block
from eqsheet.worksheet.array_equations import LARGE_BLOCK
from eqsheet.worksheet.block_memory import BlockMemory
from eqsheet.worksheet.block_run import BlockRun
from eqsheet.worksheet.curve_choice import curve_choice_note
from eqsheet.worksheet.curve_messages import OF_CURVES
from eqsheet.worksheet.failure_messages import (
    blind_names,
    failure_diagnostic,
    start_note_at,
)
from eqsheet.worksheet.group_block import solve_group_block
from eqsheet.worksheet.group_chain import LEAST_CHAIN, ChainResult, solve_chain
from eqsheet.worksheet.group_equations import GroupedEquations
from eqsheet.worksheet.group_guesses import guess_arrays, work_out_group_guesses
from eqsheet.worksheet.group_singles import Singles
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.solve_block import BlockResult, Known, solve_equations
from eqsheet.worksheet.trust import FEW_DIGITS, digits_of, few_digits_warning, trust_warnings

Numbers = NDArray[np.int64]


class GroupRun:
    """The state of one run; `solve_all` goes through the blocks.

    Attributes
    ----------
    values, errors : list of float
        By quantity number.
    value_array, error_array : ndarray (quantities,)
        The same.
    runs : sequence of BlockRun
    block_of : ndarray (quantities,)
        Number of the block that gives a quantity, 0 for none.
    """

    def __init__(
        self,
        prepared: Prepared,
        budget: Budget,
        memory: BlockMemory | None,
        given: Mapping[int, BlockResult],
    ) -> None:
        self.prepared = prepared
        self._budget = budget
        self._given = given
        self._solve = solve_equations if memory is None else memory.solve
        self._equations = GroupedEquations(prepared.system)
        self.guesses, found = work_out_group_guesses(prepared)
        self.diagnostics: list[Diagnostic] = list(found)
        total = len(prepared.system.names)
        self._guess_arrays = guess_arrays(self.guesses, total)
        self.values = [math.nan] * total
        self.errors = [0.0] * total
        for quantity, value in prepared.known_values.items():
            if quantity not in prepared.contested:
                self.values[quantity] = value
                self.errors[quantity] = as_typed(value)
        self.value_array = np.array(self.values)
        self.error_array = np.array(self.errors)
        self._known = Known(self.values, self.errors)
        self._written = [prepared.formulas[n] for n in range(self._equations.written)]
        self.block_of = np.zeros(total, dtype=np.int32)
        self.best: dict[int, float] = {}
        self._failed: set[int] = set()
        self.unsolved: list[int] = []
        self._parts: list[tuple[int, Callable[[int], BlockRun]]] = []
        assert prepared.system.firsts is not None
        self._firsts = prepared.system.firsts
        self._singles = Singles(prepared, self._equations)
        self._numbers = self._singles.numbers

    @property
    def runs(self) -> Sequence[BlockRun]:
        """The blocks in order of solution."""
        return LazySequence(self._parts)

    @property
    def formulas(self) -> Sequence[Formula]:
        """The formulas of all equations, with the branches taken."""
        # The list itself, not a copy, which would be made anew for every block.
        groups = [(len(group), group.bound.at) for group in self._equations.groups]
        return LazySequence([(len(self._written), self._written.__getitem__), *groups])

    def solve_all(self) -> None:
        """Solve block after block; what depends on a failed block is left out."""
        blocks = self.prepared.structure.blocks
        position = 0
        for where in self._singles.runs(LEAST_CHAIN):
            begin, end = int(where[0]), int(where[-1]) + 1
            self._one_by_one(position, begin)
            if self._failed or self._given or not self._chain(where):
                self._one_by_one(begin, end)
            position = end
        self._one_by_one(position, len(blocks))

    def _one_by_one(self, begin: int, end: int) -> None:
        for position in range(begin, end):
            if self._numbers[position]:
                self._one(position, self.prepared.structure.blocks[position])

    # --- one block ----------------------------------------------------------------------------------------

    def _one(self, position: int, block: Block) -> None:
        number = int(self._numbers[position])
        rows = self.prepared.rows
        # Where all equations take part, as they do with groups, rows are their numbers.
        numbers = block.rows if isinstance(rows, range) else [rows[r] for r in block.rows]
        equations = self._equations.in_text_order(numbers)
        after = self._after(block)
        result = None
        if any(a in self._failed for a in after) or self._contested(equations):
            self._failed.add(number)
        else:
            result = self._given.get(number) or self._result(equations, block)
            self._keep(number, equations, block, result)
        self.block_of[np.asarray(block.columns)] = number
        run = BlockRun(number, as_sequence(equations), block.columns, after, result)
        self._parts.append((1, lambda _: run))
        if result is None:
            return
        system = self.prepared.system
        if not result.solved:
            self.unsolved.append(number)
            failure = failure_diagnostic(system, self.prepared, run, self._known, self.guesses, self.runs)
            self.diagnostics.append(failure)
            if failure.code in OF_CURVES:
                # No start would help.
                return
        elif len(equations) < LARGE_BLOCK:
            self.diagnostics += trust_warnings(system, run, self.prepared.dimensions)
        else:
            columns = np.asarray(block.columns)
            self.diagnostics += self._trust(
                run, equations, self.value_array[columns], self.error_array[columns]
            )
        if blind_names(system, run):
            first = system.equations[int(equations[0])].place
            self.diagnostics += start_note_at(system, run, first)
        self.diagnostics += curve_choice_note(self.prepared, run, self._known, self.guesses)

    def _after(self, block: Block) -> tuple[int, ...]:
        numbers = self._numbers
        return tuple([int(numbers[d]) for d in block.depends if numbers[d]])

    def _contested(self, equations: Numbers) -> bool:
        contested = self.prepared.contested
        if not contested:
            return False
        formulas = self.formulas
        return any(q in contested for e in equations for q in formulas[int(e)].quantities)

    def _result(self, equations: Numbers, block: Block) -> BlockResult:
        dimensions = self.prepared.dimensions
        formulas = self.formulas
        if len(equations) < LARGE_BLOCK:
            return self._solve(
                [formulas[int(e)] for e in equations],
                block.columns,
                self._known,
                self.guesses,
                dimensions,
                self._budget,
            )
        return solve_group_block(
            self._equations,
            equations,
            formulas,
            block.columns,
            self._known,
            self.value_array,
            self.error_array,
            self.guesses,
            self._guess_arrays,
            self._firsts,
            dimensions,
            self._budget,
        )

    def _keep(self, number: int, equations: Numbers, block: Block, result: BlockResult) -> None:
        """Put down what a block gave."""
        apart = np.flatnonzero(equations < self._equations.written)
        for i in apart.tolist():
            if i < len(result.formulas):
                self._written[int(equations[i])] = result.formulas[i]
        if not result.solved:
            self._failed.add(number)
            self.best.update(zip(block.columns, result.values))
            return
        columns = np.asarray(block.columns)
        self.value_array[columns] = result.values
        self.error_array[columns] = result.errors
        first, end = block.columns[0], block.columns[-1] + 1
        if end - first == len(block.columns):
            self.values[first:end] = result.values
            self.errors[first:end] = result.errors
        else:
            for quantity, value, error in zip(block.columns, result.values, result.errors):
                self.values[quantity] = value
                self.errors[quantity] = error

    def _trust(
        self, run: BlockRun, equations: Numbers, values: NDArray[np.float64], errors: NDArray[np.float64]
    ) -> list[Diagnostic]:
        """As `trust_warnings` for a large block."""
        few = np.flatnonzero(self._few_digits(values, errors))
        if not len(few):
            return []
        with np.errstate(all="ignore"):
            # The first of those with the fewest whole digits.
            digits = np.floor(-np.log10(errors[few] / np.abs(values[few])))
        position = int(few[np.argmin(np.where(np.isnan(digits), 0.0, np.maximum(digits, 0.0)))])
        count = digits_of(float(values[position]), float(errors[position]))
        if count >= FEW_DIGITS:
            return []
        system = self.prepared.system
        _, firsts = np.unique(self._equations.statement[equations], return_index=True)
        places = [system.equations[int(equations[i])].place for i in firsts]
        return [few_digits_warning(system, run, count, position, places)]

    @staticmethod
    def _few_digits(values: NDArray[np.float64], errors: NDArray[np.float64]) -> NDArray[np.bool_]:
        """Which values may have fewer digits than are passed over in silence."""
        with np.errstate(all="ignore"):
            return np.asarray(
                (values != 0.0)
                & ~(errors <= np.abs(values) * 10.0 ** -(FEW_DIGITS + 0.001))
                & (errors != 0.0)
            )

    # --- chains -------------------------------------------------------------------------------------------

    def _chain(self, where: Numbers) -> bool:
        """Solve the blocks at some positions as a chain; whether that went well."""
        targets = self._singles.columns[where]
        result = solve_chain(
            self._singles.parts(where),
            targets,
            self.values,
            self.value_array,
            self.error_array,
            self._guess_arrays,
        )
        if result is None:
            for quantity in targets.tolist():
                self.values[quantity] = math.nan
            return False
        self.value_array[targets] = result.values
        self.error_array[targets] = result.errors
        for quantity, error in zip(targets.tolist(), result.errors.tolist()):
            self.errors[quantity] = error
        self.block_of[targets] = self._numbers[where]
        make = self._runs_of_chain(where, result)
        self._parts.append((len(where), make))
        for i in np.flatnonzero(self._few_digits(result.values, result.errors)).tolist():
            self.diagnostics += trust_warnings(self.prepared.system, make(i), self.prepared.dimensions)
        return True

    def _runs_of_chain(self, where: Numbers, result: ChainResult) -> Callable[[int], BlockRun]:
        """Makes the account of one block of a chain."""
        prepared, numbers, after = self.prepared, self._numbers, self._after

        def run(i: int) -> BlockRun:
            block = prepared.structure.blocks[int(where[i])]
            equation = prepared.rows[block.rows[0]]
            one = BlockResult(
                True,
                (float(result.values[i]),),
                (float(result.errors[i]),),
                "closed form",
                residual=float(result.residuals[i]),
                formulas=(prepared.formulas[equation],),
            )
            return BlockRun(int(numbers[where[i]]), (equation,), block.columns, after(block), one)

        return run
