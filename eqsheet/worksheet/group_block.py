"""Solves a large block whose equations are mostly members of large families, without writing them out."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import cast

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.branches import settle, switches
from eqsheet.model.evaluate import evaluate_arrays
from eqsheet.model.lazy_sequence import LazySequence
from eqsheet.model.linear import is_linear_in
from eqsheet.model.tape import Formula, Tape
from eqsheet.solve.ladder import solve_block
from eqsheet.solve.linear import linear_step
from eqsheet.solve.trail import Budget, Trail
from eqsheet.units.dimension import Dimension
from eqsheet.worksheet.array_equations import ArrayBlock, Shape
from eqsheet.worksheet.group_equations import GroupedEquations
from eqsheet.worksheet.group_guesses import GuessArrays
from eqsheet.worksheet.guesses import Guesses
from eqsheet.worksheet.solve_block import BlockResult, Known, judged, solve_equations
from eqsheet.worksheet.starting_values import GOLDEN_SECTION, WIDE, Start, starting_values

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
    """
    apart = [int(n) for n in numbers[numbers < equations.written]]
    own = set(unknowns) if apart else set()
    written = [settle(formulas[n], lambda q: None if q in own else known.values[q]) for n in apart]
    everything = _with(formulas, numbers, dict(zip(apart, written)))
    if switches(written, own):
        return solve_equations(everything, unknowns, known, guesses, dimensions, budget)
    shapes = equations.shapes(numbers, written)
    columns = np.asarray(unknowns)
    start = _start(shapes, columns, arrays, values, equations.part)
    if start is None:
        start = starting_values(unknowns, everything, known.values, guesses, dimensions)
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


def _start(
    shapes: Sequence[Shape],
    unknowns: Numbers,
    arrays: GuessArrays,
    values: Array,
    is_part: NDArray[np.bool_],
) -> Start | None:
    """The start, where all unknowns have a guess or bounds on both sides and no curve has a say in it; else None.

    Parts of large sums need none.
    """
    if any(i[0] in ("curve", "surface") for shape in shapes for i in shape.tape.instructions):
        return None
    near = arrays.near[unknowns]
    low, high = arrays.lower[unknowns], arrays.upper[unknowns]
    assumed = np.flatnonzero(np.isnan(near))
    if len(assumed):
        near = np.where(np.isnan(near), _between(low, high), near)
        if not np.isfinite(near).all():
            near = _with_parts(near, unknowns, shapes, values, is_part)
            assumed = assumed[~is_part[unknowns[assumed]]]
        if not np.isfinite(near).all():
            return None
    low, high = np.where(np.isnan(low), -math.inf, low), np.where(np.isnan(high), math.inf, high)
    magnitude = np.abs(near)
    if not magnitude.all():
        return None
    # Arrays serve as the sequences of floats they are; tuples of a million would take long to make.
    starts, lower, upper, sizes = (cast(tuple[float, ...], one) for one in (near, low, high, magnitude))
    return Start(starts, lower, upper, sizes, tuple(assumed.tolist()))


def _with_parts(
    near: Array, unknowns: Numbers, shapes: Sequence[Shape], values: Array, is_part: NDArray[np.bool_]
) -> Array:
    """Start values with those of the parts of large sums, which follow from the others."""
    at = values.copy()
    at[unknowns] = near
    waiting = unknowns[np.isnan(near) & is_part[unknowns]]
    made = [
        (shape, shape.quantities[:, slot])
        for shape in shapes
        if (slot := _alone_on_the_left(shape.tape)) is not None and is_part[shape.quantities[:, slot]].all()
    ]
    # Level by level: parts, parts of parts, and so on.
    left = len(waiting) + 1
    while np.isnan(at[waiting]).any() and int(np.isnan(at[waiting]).sum()) < left:
        left = int(np.isnan(at[waiting]).sum())
        for shape, targets in made:
            right = shape.tape.outputs[1]
            found = evaluate_arrays(shape.tape, list(at[shape.quantities.T]), shape.literals)[right]
            at[targets] = np.where(np.isnan(at[targets]), found, at[targets])
    return at[unknowns]


def _alone_on_the_left(tape: Tape) -> int | None:
    """The slot of the quantity that the left side is."""
    operation, *rest = tape.instructions[tape.outputs[0]]
    return int(rest[0]) if operation == "quantity" else None


def _between(low: Array, high: Array) -> Array:
    """Points inside finite bounds (n,), as `starting_values` takes them; nan where a side is open."""
    part = 0.35 + 0.3 * ((np.arange(len(low)) + 1.0) * GOLDEN_SECTION % 1.0)
    with np.errstate(all="ignore"):
        ratio = high / low
        wide = (low > 0.0) & (ratio > WIDE)
        return np.where(wide, low * ratio**part, low + part * (high - low))


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
