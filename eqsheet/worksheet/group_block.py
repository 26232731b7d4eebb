"""Solves a large block whose equations are mostly members of large families, without writing them out."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.branches import settle, switches
from eqsheet.model.equation_group import reads_curve
from eqsheet.model.lazy_sequence import LazySequence
from eqsheet.model.linear import is_linear_in
from eqsheet.model.tape import Formula
from eqsheet.solve.ladder import solve_block
from eqsheet.solve.linear import linear_step
from eqsheet.solve.trail import Budget, Trail
from eqsheet.units.dimension import Dimension
from eqsheet.worksheet.array_equations import ArrayBlock, Shape
from eqsheet.worksheet.curve_ranges import argument_ranges
from eqsheet.worksheet.decided_shapes import decided_shapes
from eqsheet.worksheet.group_equations import GroupedEquations
from eqsheet.worksheet.group_guesses import GuessArrays
from eqsheet.worksheet.group_starts import group_starts
from eqsheet.worksheet.guesses import Guesses
from eqsheet.worksheet.solve_block import BlockResult, Known, judged, solve_equations

Numbers = NDArray[np.int64]
Array = NDArray[np.float64]
# Patterns of more slots are too many to number.
_MOST_CODED = 16


def solve_group_block(
    equations: GroupedEquations,
    numbers: Numbers,
    formulas: Sequence[Formula],
    unknowns: Sequence[int],
    known: Known,
    values: Array,
    errors: Array,
    guesses: Guesses,
    arrays: GuessArrays,
    firsts: Numbers,
    dimensions: Sequence[Dimension | None],
    budget: Budget,
) -> BlockResult:
    """The solution of one large block, as `solve_equations` gives it.

    Parameters
    ----------
    equations : GroupedEquations
    numbers : ndarray (n,)
        Equation numbers, in the order of the text.
    formulas : sequence of Formula
        Of all equations of the worksheet.
    unknowns : sequence of int
        Quantity numbers, ascending.
    known : Known
    values, errors : ndarray (quantities,)
        The same as in `known`.
    guesses : Guesses
    arrays : GuessArrays
        The same as in `guesses`.
    firsts : ndarray
        Numbers of the first members of all families, ascending; quantities that are no family among them.
    """
    apart = [int(n) for n in numbers[numbers < equations.written]]
    own = set(unknowns) if apart else set()
    written = [settle(formulas[n], lambda q: None if q in own else known.values[q]) for n in apart]
    everything = _with(formulas, numbers, dict(zip(apart, written)))
    if switches(written, own):
        return solve_equations(everything, unknowns, known, guesses, dimensions, budget)
    shapes = equations.shapes(numbers, written)
    columns = np.asarray(unknowns)
    decided = decided_shapes(shapes, columns, values)
    if decided is None:
        return solve_equations(everything, unknowns, known, guesses, dimensions, budget)
    shapes = decided
    readers = everything if any(reads_curve(shape.tape) for shape in shapes) else ()
    ranges = argument_ranges(unknowns, readers, known.values) if readers else {}
    start = group_starts(shapes, columns, values, arrays, ranges, firsts, equations.part, dimensions)
    problem = ArrayBlock(shapes, columns, values, errors).problem(start)
    if _linear(shapes, columns, len(values)):
        outcome = linear_step(problem, problem.start, Trail("linear", problem.start, budget))
    else:
        outcome = solve_block(problem, budget)
    return judged(everything, unknowns, known, start, outcome, problem)


def _with(formulas: Sequence[Formula], numbers: Numbers, settled: dict[int, Formula]) -> Sequence[Formula]:
    """The formulas of some equations, on demand."""

    def formula(position: int) -> Formula:
        number = int(numbers[position])
        return settled[number] if number in settled else formulas[number]

    return LazySequence([(len(numbers), formula)])


def _linear(shapes: Sequence[Shape], unknowns: Numbers, total: int) -> bool:
    """Whether all equations are linear in the unknowns they hold."""
    own = np.zeros(total, dtype=bool)
    own[unknowns] = True
    for shape in shapes:
        held = own[shape.quantities]
        if not all(is_linear_in(shape.tape, one) for one in _patterns(held)):
            return False
    return True


def _patterns(held: NDArray[np.bool_]) -> list[set[int]]:
    """The different rows of a table of truth values, as sets of columns; there are few."""
    slots = held.shape[1]
    if slots > _MOST_CODED:
        return [set(np.flatnonzero(row).tolist()) for row in np.unique(held, axis=0)]
    codes = np.flatnonzero(np.bincount(held @ (1 << np.arange(slots))))
    return [{k for k in range(slots) if code >> k & 1} for code in codes.tolist()]
