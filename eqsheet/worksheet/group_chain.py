"""Long runs of one-equation blocks from large families: one closed form a tape, evaluated member after member.

The values come from a tight loop over compiled code, since each may need the one before; everything else (the
residuals evaluated afresh, the error bounds, the bounds of guesses) is looked at once for all as arrays. A run is
taken whole or not at all: where anything is out of the ordinary, `solve_chain` gives None, and the blocks are
solved one by one.
"""

from __future__ import annotations

import math
from collections.abc import MutableSequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.array_evidence import evaluate_arrays_with_evidence
from eqsheet.model.derive import partials
from eqsheet.model.equation_group import EquationGroup
from eqsheet.model.evaluate import evaluate_arrays
from eqsheet.model.generate import DOMAIN_ERRORS, array_function, float_function
from eqsheet.model.isolate import isolate
from eqsheet.model.linear import affine_in
from eqsheet.model.tape import Tape
from eqsheet.solve.termination import ACCEPTABLE
from eqsheet.worksheet.group_guesses import GuessArrays
from eqsheet.worksheet.solve_block import PAST_BOUND

Numbers = NDArray[np.int64]
Array = NDArray[np.float64]
# Shorter runs are solved one by one: there is nothing to gain.
LEAST_CHAIN = 50


@dataclass(frozen=True, slots=True)
class ClosedForm:
    """The only closed form of a tape for one of its quantities, and the condition under which it is one."""

    tape: Tape
    condition: Tape | None


@lru_cache(maxsize=4096)
def only_closed_form(tape: Tape, slot: int) -> ClosedForm | None:
    """The closed form; None where there is none, or a choice between several."""
    isolation = isolate(tape, slot)
    if isolation is None:
        affine = affine_in(tape, slot)
        return None if affine is None else ClosedForm(affine.solution, None)
    if len(isolation.candidates) != 1:
        return None
    return ClosedForm(isolation.candidates[0].tape, isolation.candidates[0].condition)


@dataclass(frozen=True)
class ChainPart:
    """The members of one group in a chain.

    Attributes
    ----------
    group : EquationGroup
    slot : int
        Which of the tape's quantities is solved for.
    closed : ClosedForm
    positions : ndarray (m,)
        Positions of its blocks in the chain, ascending.
    entries : ndarray (m,)
        Their entries in the group.
    """

    group: EquationGroup
    slot: int
    closed: ClosedForm
    positions: Numbers
    entries: Numbers


@dataclass(frozen=True)
class ChainResult:
    """Values, error bounds and scaled residuals (n,) of a chain, by position."""

    values: Array
    errors: Array
    residuals: Array


def solve_chain(
    parts: list[ChainPart],
    targets: Numbers,
    values: MutableSequence[float],
    known_values: Array,
    known_errors: Array,
    guesses: GuessArrays,
) -> ChainResult | None:
    """The solution of the blocks of a chain in their order, None where they must be solved one by one.

    Parameters
    ----------
    parts : list of ChainPart
        Together they hold all positions of the chain.
    targets : ndarray (n,)
        Quantity numbers solved for, by position.
    values : mutable sequence of float
        SI values by quantity number; those of the targets are written, and left in place where None is given.
    known_values, known_errors : ndarray (quantities,)
        SI values and error bounds, not changed.
    """
    try:
        _run(parts, targets, values)
    except DOMAIN_ERRORS:
        return None
    found = np.array([values[q] for q in targets.tolist()])
    if not np.isfinite(found).all():
        return None
    low, high = guesses.lower[targets], guesses.upper[targets]
    slack = PAST_BOUND * np.abs(found)
    # Comparisons with nan, no bound, are false.
    if (found < low - slack).any() or (found > high + slack).any():
        return None
    every = known_values.copy()
    every[targets] = found
    place = np.full(len(every), -1, dtype=np.int64)
    place[targets] = np.arange(len(targets))
    residuals = np.empty(len(targets))
    own_errors = np.empty(len(targets))
    carried: list[tuple[Numbers, Numbers, Array]] = []
    for part in parts:
        numbers = part.group.bound.numbers[part.entries].T
        literals = part.group.bound.literals_of(part.entries)
        inputs = tuple(every[numbers])
        if not _condition_holds(part.closed.condition, inputs, literals):
            return None
        scaled = _residuals(part, inputs, literals)
        if scaled is None:
            return None
        residuals[part.positions] = scaled
        before = place[numbers] >= 0
        before[part.slot] = False
        errors = np.where(place[numbers] >= 0, 0.0, known_errors[numbers])
        evidence = evaluate_arrays_with_evidence(
            part.closed.tape, inputs, literals, tuple(errors), len(part.entries)
        )
        own_errors[part.positions] = evidence.errors[0]
        try:
            carried += _carried(part, numbers, before, place, inputs, literals)
        except ValueError:
            # A function without a derivative on tapes.
            return None
    return ChainResult(found, _with_errors_before(own_errors, carried), residuals)


def _run(parts: list[ChainPart], targets: Numbers, values: MutableSequence[float]) -> None:
    """Evaluate the closed forms one after the other."""
    if len(parts) == 1:
        (part,) = parts
        function = float_function(part.closed.tape)
        rows = part.group.bound.numbers[part.entries].tolist()
        literals = _rows_of_literals(part)
        if literals is None:
            fixed = _fixed_literals(part)
            for target, row in zip(targets.tolist(), rows):
                values[target] = function(*[values[q] for q in row], *fixed)
            return
        for target, row, own in zip(targets.tolist(), rows, literals):
            values[target] = function(*[values[q] for q in row], *own)
        return
    program: list[Any] = [None] * len(targets)
    for part in parts:
        function = float_function(part.closed.tape)
        rows = part.group.bound.numbers[part.entries].tolist()
        literals = _rows_of_literals(part) or [_fixed_literals(part)] * len(rows)
        for position, row, own in zip(part.positions.tolist(), rows, literals):
            program[position] = (function, row, own)
    for target, (function, row, own) in zip(targets.tolist(), program):
        values[target] = function(*[values[q] for q in row], *own)


def _fixed_literals(part: ChainPart) -> list[float]:
    return [float(value) for value in part.group.bound.literals if not isinstance(value, np.ndarray)]


def _rows_of_literals(part: ChainPart) -> list[list[float]] | None:
    """The literals of each member, None where all have the same."""
    if not any(isinstance(value, np.ndarray) for value in part.group.bound.literals):
        return None
    rows: list[list[float]] = np.stack(part.group.bound.literals_of(part.entries), axis=1).tolist()
    return rows


def _condition_holds(condition: Tape | None, inputs: tuple[Array, ...], literals: tuple[Array, ...]) -> bool:
    if condition is None:
        return True
    truth = evaluate_arrays(condition, inputs, literals)[condition.outputs[0]]
    return bool(np.all(np.asarray(truth) == True))  # noqa: E712  # nan, no truth value, is not True


def _residuals(part: ChainPart, inputs: tuple[Array, ...], literals: tuple[Array, ...]) -> Array | None:
    """Scaled residuals evaluated afresh from the statement, None where one is too large."""
    members = len(part.entries)
    exact = (np.zeros(members),) * len(inputs)
    afresh = evaluate_arrays_with_evidence(part.group.bound.formula.tape, inputs, literals, exact, members)
    residual = np.abs(afresh.values[0] - afresh.values[1])
    size = np.maximum(afresh.sizes[0], afresh.sizes[1])
    bound = afresh.errors[0] + afresh.errors[1]
    if not (residual <= np.maximum(ACCEPTABLE * size, bound)).all():
        return None
    return np.divide(residual, size, out=np.zeros(members), where=size > 0.0)


def _carried(
    part: ChainPart,
    numbers: Numbers,
    before: NDArray[np.bool_],
    place: Numbers,
    inputs: tuple[Array, ...],
    literals: tuple[Array, ...],
) -> list[tuple[Numbers, Numbers, Array]]:
    """How errors of values earlier in the chain reach those of a part: positions, those before, and slopes."""
    slots = tuple(np.flatnonzero(before.any(axis=1)).tolist())
    if not slots:
        return []
    closed = part.closed.tape
    _, *slopes = array_function(partials(closed, 0, slots))(*inputs, *literals)
    found = []
    for slot, slope in zip(slots, slopes):
        mask = before[slot]
        wide = np.broadcast_to(np.abs(np.asarray(slope, dtype=float)), (len(part.entries),))
        found.append((part.positions[mask], place[numbers[slot][mask]], wide[mask]))
    return found


def _with_errors_before(own: Array, carried: list[tuple[Numbers, Numbers, Array]]) -> Array:
    """Error bounds with those of the values each one is made from, to first order.

    The product of two errors, some thirty digits down, is left out.
    """
    if not carried:
        return own
    to = np.concatenate([c[0] for c in carried])
    order = np.argsort(to, kind="stable")
    origin = np.concatenate([c[1] for c in carried])[order].tolist()
    slope = np.concatenate([c[2] for c in carried])[order].tolist()
    errors: list[float] = own.tolist()
    for position, before, factor in zip(to[order].tolist(), origin, slope):
        reached = factor * errors[before]
        errors[position] += reached if reached == reached else math.inf
    return np.array(errors)
