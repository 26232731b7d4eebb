"""``eqsheet solve``: results to standard output, messages to standard error."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from eqsheet.app.command_line.output import print_diagnostics, print_lines
from eqsheet.app.command_line.solved import solve_each
from eqsheet.app.exit_status import OF_SOLUTION
from eqsheet.worksheet.load import UnreadableFile
from eqsheet.worksheet.solution import Solution


def run_solve(files: Sequence[str], changes: Sequence[str], free: Sequence[str], as_json: bool) -> int:
    """Solve each file and print what was found; the exit status."""
    if as_json:
        return solve_each(files, changes, free, print_json, print_unreadable_json)
    return solve_each(files, changes, free, _spaced(_print_solution))


def run_solve_with_trace(files: Sequence[str], changes: Sequence[str], free: Sequence[str]) -> int:
    """As `run_solve` in a table, followed by the course of the iterations."""

    def report(solution: Solution) -> int:
        from eqsheet.review.trace import trace_lines

        status = _print_solution(solution)
        print_lines(["", *trace_lines(solution)])
        return status

    return solve_each(files, changes, free, _spaced(report))


def _spaced(report: Callable[[Solution], int]) -> Callable[[Solution], int]:
    """The report with an empty line before all but the first."""
    printed = 0

    def spaced(solution: Solution) -> int:
        nonlocal printed
        if printed:
            print()
        printed += 1
        return report(solution)

    return spaced


def _print_solution(solution: Solution) -> int:
    from eqsheet.review.table import solution_lines, verdict_line

    print_lines([verdict_line(solution)])
    lines = solution_lines(solution)
    if lines:
        print_lines(["", *lines])
    if solution.diagnostics:
        print(flush=True)
    print_diagnostics(solution.diagnostics)
    return OF_SOLUTION[solution.status]


def print_json(solution: Solution) -> int:
    """The solution as one JSON object on one line."""
    from eqsheet.review.json_form import solution_text

    print(solution_text(solution))
    return OF_SOLUTION[solution.status]


def print_unreadable_json(failure: UnreadableFile) -> None:
    """An object for a file that cannot be read: an invalid worksheet with nothing in it but the reason."""
    print_json(Solution(failure.diagnostic.file, "invalid", {}, diagnostics=(failure.diagnostic,)))
