"""What the equations of a block tell without any value, worked out once and kept while the worksheet stands.

Solved again, with other knowns or the same, a worksheet has the very formulas it had, so they are told by identity.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cached_property
from typing import TYPE_CHECKING

from eqsheet.model.block_code import BlockCode, block_code
from eqsheet.model.branches import literal_values, switches
from eqsheet.model.linear import is_linear_in
from eqsheet.model.specialise import conditions
from eqsheet.model.tape import Formula
from eqsheet.worksheet.repeated_blocks import Repeats, repeats_of

if TYPE_CHECKING:
    from eqsheet.worksheet.start_plan import StartPlan

# Some states of a large worksheet.
MOST_KEPT = 4096


class BlockPlan:
    """The equations of one block.

    Parameters
    ----------
    formulas : sequence of Formula
    unknowns : sequence of int
        Quantity numbers, ascending.

    Attributes
    ----------
    start : StartPlan or None
        How the block is started, once it has been solved often.
    """

    def __init__(self, formulas: Sequence[Formula], unknowns: Sequence[int]) -> None:
        self.formulas = tuple(formulas)
        self.unknowns = tuple(unknowns)
        self.start: StartPlan | None = None

    @cached_property
    def own(self) -> frozenset[int]:
        """The unknowns."""
        return frozenset(self.unknowns)

    @cached_property
    def plain(self) -> bool:
        """No condition and no curve by steps stands in the equations, whatever the values are."""
        return not any(conditions(f.tape) for f in self.formulas) and not switches(self.formulas, self.own)

    @cached_property
    def kinked(self) -> tuple[int, ...]:
        """Positions of the equations in which the unknowns decide the side of an `abs`, `min` or `max`."""
        from eqsheet.worksheet.kinks import kinked

        return kinked(self.formulas, self.own)

    @cached_property
    def linear(self) -> bool:
        """All equations are linear in the unknowns together."""
        return all(
            is_linear_in(f.tape, {s for s, q in enumerate(f.quantities) if q in self.own})
            for f in self.formulas
        )

    @cached_property
    def _code(self) -> tuple[BlockCode, tuple[int, ...]]:
        return block_code([(f.tape, f.quantities) for f in self.formulas], self.unknowns)

    @property
    def code(self) -> BlockCode:
        """Residuals and slopes as code."""
        return self._code[0]

    @property
    def known(self) -> tuple[int, ...]:
        """Numbers of the known quantities, in the order in which `code` takes them."""
        return self._code[1]

    @cached_property
    def literals(self) -> tuple[float, ...]:
        """SI values of the literals, equation by equation."""
        return tuple([value for formula in self.formulas for value in literal_values(formula)])

    @cached_property
    def repeats(self) -> Repeats:
        """How often blocks of this shape have been solved."""
        return repeats_of(self.code)

    @property
    def often(self) -> bool:
        """Whether blocks of this shape have been solved so often that code of their own pays."""
        return "repeats" in self.__dict__ and self.repeats.often


_kept: dict[tuple[int, ...], BlockPlan] = {}


def plan_of(formulas: Sequence[Formula], unknowns: Sequence[int]) -> BlockPlan:
    """The plan for these very formulas."""
    # A plan holds its formulas, so that no other can have their identities while it is kept.
    key = (*map(id, formulas), *unknowns)
    plan = _kept.get(key)
    if plan is None:
        while len(_kept) >= MOST_KEPT:
            _kept.pop(next(iter(_kept)), None)
        plan = _kept[key] = BlockPlan(formulas, unknowns)
    return plan
