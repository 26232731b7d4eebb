"""Worksheets named on the command line, read and solved one after the other."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from eqsheet.app import exit_status
from eqsheet.app.command_line.output import print_diagnostics
from eqsheet.worksheet.load import UnreadableFile, load
from eqsheet.worksheet.solution import Solution


def solve_each(
    files: Sequence[str],
    changes: Sequence[str],
    free: Sequence[str],
    report: Callable[[Solution], int],
    unreadable: Callable[[UnreadableFile], None] = lambda failure: print_diagnostics([failure.diagnostic]),
) -> int:
    """Solve every file and report it; the exit status for all of them.

    Parameters
    ----------
    report : callable
        Writes what is to be said of a solution and gives its exit status.
    unreadable : callable
        Writes what is to be said of a file that cannot be read.
    """
    statuses = []
    for file in files:
        try:
            sheet = load(file)
        except UnreadableFile as failure:
            unreadable(failure)
            statuses.append(exit_status.UNREADABLE)
            continue
        statuses.append(report(sheet.solve(changes, free)))
    return exit_status.worst(statuses)
