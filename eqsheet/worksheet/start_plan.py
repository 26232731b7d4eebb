"""The starting values of a block that is solved again and again, as one function of what is known.

Which equation tells which unknown, and in what order, follows from the equations, the guesses and the bounds. Other
values of the knowns change it only where a value told is zero, not finite or outside its bounds; then the starting
values are worked out from the beginning.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, NamedTuple

from eqsheet.model.generate import DOMAIN_ERRORS, Function, grouped_function
from eqsheet.model.isolate import isolate
from eqsheet.model.simplify import Simplifier
from eqsheet.worksheet.block_plan import BlockPlan
from eqsheet.worksheet.guesses import Guesses

if TYPE_CHECKING:
    from eqsheet.worksheet.starting_values import Start


class Told(NamedTuple):
    """An unknown that an equation has told.

    Attributes
    ----------
    formula : int
        Position of the equation in the block.
    quantity : int
    candidate : int
        Which of the closed forms gave the value.
    """

    formula: int
    quantity: int
    candidate: int


class StartPlan:
    """Starting values by position, from the starts that guesses and bounds give.

    Parameters
    ----------
    plan : BlockPlan
    guesses : Guesses
    given : mapping of int to float
        Starts by quantity number that depend on guesses and bounds alone.
    told : sequence of Told
        How the others were told, in order, each by the first of its closed forms.
    first : Start
        The start this is made from.
    """

    def __init__(
        self,
        plan: BlockPlan,
        guesses: Guesses,
        given: Mapping[int, float],
        told: Sequence[Told],
        first: Start,
    ) -> None:
        self.guesses = guesses
        self.first = first
        self._plan = plan
        self._given = tuple(given.values())
        self._function = _function(plan, tuple(given), told)
        order = [*given, *(t.quantity for t in told)]
        self._places = [order.index(q) for q in plan.unknowns]
        count = len(given)
        bounds = [(k, *guesses.bounds(q)) for k, q in enumerate(order) if k >= count]
        self._bounded = [
            (k - count, low, high) for k, low, high in bounds if low > -math.inf or high < math.inf
        ]

    def values(self, known: Sequence[float]) -> list[float] | None:
        """The starts by position of the unknowns; None where they have to be worked out from the beginning.

        Parameters
        ----------
        known : sequence of float
            SI values by quantity number.
        """
        arguments = (*[known[q] for q in self._plan.known], *self._plan.literals)
        try:
            told = self._function(self._given, arguments)
        except DOMAIN_ERRORS:
            return None
        if 0.0 in told or not math.isfinite(sum(told)):
            return None
        for k, low, high in self._bounded:
            if not low < told[k] < high:
                return None
        found = (*self._given, *told)
        return [found[k] for k in self._places]


def _function(plan: BlockPlan, given: Sequence[int], told: Sequence[Told]) -> Function:
    """``(starts given, known quantities and literals)`` to the starts told."""
    writer = Simplifier()
    place = {q: writer.put("quantity", k) for k, q in enumerate((*given, *plan.known))}
    first: list[int] = []
    count = 0
    for formula in plan.formulas:
        first.append(count)
        count += len(formula.literals)
    outputs = []
    for formula_number, quantity, candidate in told:
        formula = plan.formulas[formula_number]
        isolation = isolate(formula.tape, formula.quantities.index(quantity))
        assert isolation is not None
        tape = isolation.candidates[candidate].tape
        unused = writer.zero  # stands for the quantity told, which the closed form does not take
        new = writer.copy(
            tape,
            [place.get(q, unused) for q in formula.quantities],
            [writer.put("literal", first[formula_number] + k) for k in range(len(formula.literals))],
        )
        place[quantity] = new[tape.outputs[0]]
        outputs.append(place[quantity])
    tape = writer.tape(outputs, len(given) + len(plan.known), count)
    return grouped_function(tape, len(given), (len(outputs),))
