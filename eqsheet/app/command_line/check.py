"""``eqsheet check``: verdicts only; leaving a validity range counts as failing."""

from __future__ import annotations

from collections.abc import Sequence

from eqsheet.app.command_line.output import print_diagnostics, print_lines
from eqsheet.app.command_line.solve import print_json, print_unreadable_json
from eqsheet.app.command_line.solved import solve_each
from eqsheet.app.exit_status import OF_SOLUTION, OUTSIDE_LIMITS, SOLVED
from eqsheet.diagnostics.diagnostic import Severity
from eqsheet.worksheet.solution import Solution


def run_check(files: Sequence[str], changes: Sequence[str], free: Sequence[str], as_json: bool) -> int:
    """Solve each file and print its verdict; the exit status."""
    if as_json:
        return solve_each(files, changes, free, _check_json, print_unreadable_json)
    return solve_each(files, changes, free, _check)


def status_of_check(solution: Solution) -> int:
    """The exit status: as for `solve`, and 1 where a validity range is left."""
    status = OF_SOLUTION[solution.status]
    left = any(d.code == "outside-validity" for d in solution.diagnostics)
    return OUTSIDE_LIMITS if status == SOLVED and left else status


def _check_json(solution: Solution) -> int:
    print_json(solution)
    return status_of_check(solution)


def _check(solution: Solution) -> int:
    from eqsheet.review.table import limit_lines, verdict_line

    failing = [limit for limit in solution.limits if not limit.holds]
    print_lines([verdict_line(solution), *limit_lines(failing)])
    print_diagnostics(d for d in solution.diagnostics if d.severity is not Severity.NOTE)
    return status_of_check(solution)
