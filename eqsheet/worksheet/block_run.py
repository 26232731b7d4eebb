"""One block of the order of solution, and what became of it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from eqsheet.worksheet.solve_block import BlockResult


@dataclass(frozen=True, slots=True)
class BlockRun:
    """One block of the order of solution, and what became of it.

    Attributes
    ----------
    number : int
        From 1; knowns are not counted.
    equations : sequence of int
        Numbers of its equations in the system, ascending, so that not even rounding depends on the order of the lines.
    unknowns : sequence of int
        Quantity numbers, ascending.
    after : tuple of int
        Numbers of the blocks it depends on directly.
    result : BlockResult or None
        None where it was not reached because a block before it failed.
    """

    number: int
    equations: Sequence[int]
    unknowns: Sequence[int]
    after: tuple[int, ...]
    result: BlockResult | None
