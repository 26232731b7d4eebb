"""The order of solution as text: block by block its unknowns, lines, method, and what it stands on."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from eqsheet.diagnostics.json import as_data
from eqsheet.review.columns import in_columns
from eqsheet.worksheet.solution import BlockReport, Solution

MOST_NAMED = 6


def block_lines(solution: Solution) -> list[str]:
    """A line for each block, in order of solution."""
    rows = [
        (
            f"{block.number}",
            _folded(block.unknowns),
            ("line " if len(block.lines) == 1 else "lines ") + _folded(tuple(map(str, block.lines))),
            _method(block),
            f"from {_folded(block.depends)}" if block.depends else "",
        )
        for block in solution.blocks
    ]
    return in_columns(rows, numeric=0)


def blocks_data(solution: Solution) -> dict[str, Any]:
    """The order of solution for a program."""
    return {
        "format": 1,
        "worksheet": solution.worksheet,
        "status": solution.status,
        "blocks": [
            {
                "number": block.number,
                "unknowns": list(block.unknowns),
                "lines": list(block.lines),
                "method": block.method or None,
                "solved": block.solved,
                "depends": list(block.depends),
                "after": list(block.after),
            }
            for block in solution.blocks
        ],
        "diagnostics": [as_data(diagnostic) for diagnostic in solution.diagnostics],
    }


def _method(block: BlockReport) -> str:
    if not block.method:
        return "not reached"
    words = block.method if len(block.unknowns) == 1 else f"{len(block.unknowns)} together, {block.method}"
    if block.iterations:
        words += f", {block.iterations} iteration{'s' * (block.iterations != 1)}"
    return words if block.solved else f"{words}, not solved"


def _folded(words: Sequence[str]) -> str:
    if len(words) > MOST_NAMED:
        return ", ".join(words[:MOST_NAMED]) + f" and {len(words) - MOST_NAMED} more"
    return ", ".join(words)
