"""``eqsheet blocks``: the order of solution."""

from __future__ import annotations

import json
from collections.abc import Sequence

from eqsheet.app.command_line.output import print_diagnostics, print_lines
from eqsheet.app.command_line.solved import solve_each
from eqsheet.app.exit_status import OF_SOLUTION
from eqsheet.diagnostics.diagnostic import Severity
from eqsheet.review.order_of_solution import block_lines, blocks_data
from eqsheet.worksheet.load import UnreadableFile
from eqsheet.worksheet.solution import Solution


def run_blocks(file: str, changes: Sequence[str], free: Sequence[str], as_json: bool) -> int:
    """Print the blocks of one file; the exit status is that of solving it."""
    if as_json:
        return solve_each([file], changes, free, _print_json, _print_unreadable_json)
    return solve_each([file], changes, free, _print)


def _print(solution: Solution) -> int:
    print_lines(block_lines(solution))
    print_diagnostics(d for d in solution.diagnostics if d.severity is Severity.ERROR)
    return OF_SOLUTION[solution.status]


def _print_json(solution: Solution) -> int:
    print(json.dumps(blocks_data(solution), ensure_ascii=False))
    return OF_SOLUTION[solution.status]


def _print_unreadable_json(failure: UnreadableFile) -> None:
    _print_json(Solution(failure.diagnostic.file, "invalid", {}, diagnostics=(failure.diagnostic,)))
