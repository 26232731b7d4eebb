"""Which of the values that a block takes from blocks before it could be others.

A proof that a block has no solution is one for the values it was given. It holds of the worksheet where each of these
follows from the knowns in one way only, or where it holds whatever the blocks before might have given.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

from eqsheet.model.branches import quantities_under
from eqsheet.model.tape import Formula
from eqsheet.worksheet.block_run import BlockRun
from eqsheet.worksheet.guesses import Guesses
from eqsheet.worksheet.intervals import narrowed
from eqsheet.worksheet.solve_block import Known, closed_forms

if TYPE_CHECKING:
    from eqsheet.worksheet.prepare import Prepared

# Blocks looked at for one that failed; where there are more, each of them may differ.
MOST_BLOCKS = 2000
# Of as many unknowns in all, what equations of several blocks leave together is worked out.
MOST_UNKNOWNS = 60


def that_may_differ(
    block: BlockRun, before: Sequence[BlockRun], known: Known, guesses: Guesses
) -> tuple[BlockRun, ...] | None:
    """The blocks a block depends on whose values may not be the only ones, in order; None where they are too many.

    Parameters
    ----------
    before : sequence of BlockRun
        The blocks before it, by number from 1.
    """
    needed = set(block.after)
    found: list[BlockRun] = []
    for number in range(block.number - 1, 0, -1):
        if number in needed:
            found.append(before[number - 1])
            needed.update(found[-1].after)
            if len(found) > MOST_BLOCKS:
                return None
    differ: dict[int, BlockRun] = {}
    for one in reversed(found):
        if not differ.keys().isdisjoint(one.after) or not _settled(one, known, guesses):
            differ[one.number] = one
    return tuple(differ.values())


def _settled(block: BlockRun, known: Known, guesses: Guesses) -> bool:
    """Whether a block has one solution for certain, for the values it was given, whatever its bounds."""
    result = block.result
    if result is None or result.method == "linear":
        return True
    if result.outcome is not None or len(block.unknowns) > 1 or len(result.formulas) != 1:
        return False
    unknown, formula = block.unknowns[0], result.formulas[0]
    if unknown not in formula.quantities or _turns(formula, unknown):
        return False
    values = list(known.values)
    values[unknown] = math.nan
    forms = closed_forms(formula, unknown, Known(values, known.errors), guesses)
    return len(list(forms)) == 1


def _turns(formula: Formula, unknown: int) -> bool:
    """Whether the unknown stands in an angle, so that there are more solutions than closed forms."""
    slot = formula.quantities.index(unknown)
    return any(
        instruction[0] in ("sin", "cos", "tan") and slot in quantities_under(formula.tape, instruction[1])
        for instruction in formula.tape.instructions
    )


def proven_whatever_they_are(
    prepared: Prepared,
    block: BlockRun,
    differ: Sequence[BlockRun],
    known: Known,
    guesses: Guesses,
) -> bool:
    """Whether bounds carried through the equations of all these blocks leave no solution.

    Parameters
    ----------
    differ : sequence of BlockRun
        Blocks before it, from `that_may_differ`.
    """
    blocks = (*differ, block)
    unknowns = [q for one in blocks for q in one.unknowns]
    if len(unknowns) > MOST_UNKNOWNS:
        return False
    formulas = [prepared.formulas[e] for one in blocks for e in one.equations]
    bounds = [guesses.bounds(q) for q in unknowns]
    return narrowed(unknowns, formulas, known.values, bounds, known.errors).empty >= 0
