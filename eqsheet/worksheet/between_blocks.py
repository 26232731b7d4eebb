"""Blocks are not islands: where a block has no solution, those before it may have taken the wrong one of several.

A block that is solved before another may have several solutions, of which only one lets the other be solved.
Where a block fails, the other solutions of the blocks it depends on are sought and tried, in a fixed order and a
bounded number.
"""

from __future__ import annotations

from eqsheet.solve.trail import Budget
from eqsheet.worksheet.block_memory import BlockMemory
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.run import Run, run_blocks


def run_between_blocks(prepared: Prepared, budget: Budget, memory: BlockMemory | None = None) -> Run:
    """Solve block after block; where one fails, with other solutions of those it depends on.

    The first choice of solutions with which the failed block is solved, and no block before it fails instead, is
    taken, and said so; where there is none, the first solutions stand.
    """
    run = run_blocks(prepared, budget, memory)
    if not run.unsolved:
        return run
    # Most worksheets never come here.
    from eqsheet.worksheet.other_choices import with_other_choices

    return with_other_choices(prepared, run, budget, memory)
