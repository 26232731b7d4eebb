"""What bounds carried through the equations of a failed block prove, in the worksheet's own terms."""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import cached_property
from typing import TYPE_CHECKING

from eqsheet.model.tape import Formula
from eqsheet.worksheet.beyond_bounds import LARGEST_BLOCK
from eqsheet.worksheet.block_run import BlockRun
from eqsheet.worksheet.guesses import Guesses
from eqsheet.worksheet.intervals import narrowed
from eqsheet.worksheet.may_differ import proven_whatever_they_are, that_may_differ
from eqsheet.worksheet.places import equation_words, quoted
from eqsheet.worksheet.shown_units import shown_unit, written_quantity
from eqsheet.worksheet.solve_block import Known

if TYPE_CHECKING:
    from eqsheet.worksheet.prepare import Prepared

# Values of other blocks named at most.
MOST_NAMED = 4


class Proof:
    """That a block has no solution, where that is proven; false where it is not.

    Parameters
    ----------
    before : sequence of BlockRun
        The blocks before it, by number from 1.

    Attributes
    ----------
    equation : int
        Position of an equation that no values within the bounds satisfy; -1 where nothing is proven.
    """

    def __init__(
        self,
        prepared: Prepared,
        run: BlockRun,
        known: Known,
        guesses: Guesses,
        before: Sequence[BlockRun],
    ) -> None:
        self._prepared = prepared
        self._system = prepared.system
        self._run = run
        self._known = known
        self._guesses = guesses
        self._before = before
        # As they were before any branch or step was held.
        self._formulas = [prepared.formulas[e] for e in run.equations]
        self.equation = -1 if len(run.unknowns) > LARGEST_BLOCK else self._empty(self._formulas)

    def __bool__(self) -> bool:
        return self.equation >= 0

    def _empty(self, formulas: Sequence[Formula]) -> int:
        bounds = [self._guesses.bounds(q) for q in self._run.unknowns]
        return narrowed(self._run.unknowns, formulas, self._known.values, bounds, self._known.errors).empty

    @cached_property
    def _differ(self) -> tuple[BlockRun, ...] | None:
        """Blocks before this one whose values may not be the only ones; None where they are too many."""
        return that_may_differ(self._run, self._before, self._known, self._guesses)

    @cached_property
    def certain(self) -> bool:
        """Whether the proof holds whatever solutions the blocks before may have."""
        if not self._differ:
            return self._differ is not None
        return proven_whatever_they_are(self._prepared, self._run, self._differ, self._known, self._guesses)

    @property
    def _within(self) -> str:
        blocks = (self._run, *(self._differ or ()))
        bounds = [b for block in blocks for q in block.unknowns for b in self._guesses.bounds(q)]
        return " within the bounds" if any(map(math.isfinite, bounds)) else ""

    @property
    def headline(self) -> str:
        """What is proven; empty where nothing is."""
        if not self:
            return ""
        what = "there is no solution" if self.certain else "no solution with the values found before"
        return what + self._within

    def notes(self) -> list[str]:
        """That there is no solution, by which line, and with which values of other lines."""
        if not self:
            return []
        equation = self._run.equations[self.equation]
        place = equation_words(self._system, equation)
        alone = self._empty(self._formulas[self.equation : self.equation + 1]) >= 0
        rest = "" if alone else " with what the other lines leave"
        values = [f"{self._system.names[q]} = {self._value(q)}" for q in self._found_before()]
        given = "" if self.certain else f"with {', '.join(values)} "
        return [f"{given}this is certain: no values{self._within} satisfy {place}{rest}"]

    @property
    def help(self) -> str:
        """What to do about it."""
        if self.certain:
            return (
                "no start value helps: check sign and size of the terms, and the bounds and knowns they use"
            )
        names = quoted(self._system.names[q] for q in self._found_before())
        return (
            f"a guess (`near`) or bounds (`within`) may lead {names} to another solution; "
            "else check sign and size of the terms, and the knowns they use"
        )

    def _found_before(self) -> list[int]:
        """Quantities of the block's equations that blocks before it give, and might give other values of."""
        used = {q for formula in self._formulas for q in formula.quantities}
        blocks = self._before if self._differ is None else self._differ
        return sorted({q for block in blocks for q in block.unknowns if q in used})[:MOST_NAMED]

    def _value(self, quantity: int) -> str:
        unit = shown_unit(self._system, self._prepared.dimensions, self._prepared.kinds, quantity)
        return written_quantity(unit, self._prepared.kinds[quantity], self._known.values[quantity])
