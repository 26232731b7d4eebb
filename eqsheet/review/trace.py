"""The course of the iterations as text, attempt by attempt, with the names of the unknowns."""

from __future__ import annotations

from collections.abc import Iterator

from eqsheet.review.columns import in_columns
from eqsheet.solve.outcome import Outcome
from eqsheet.worksheet.solution import BlockReport, Solution

# Of a long attempt the first and last iterations are shown.
MOST_ITERATIONS = 40
# Of a large block so many unknowns are named.
MOST_UNKNOWNS = 12


def trace_lines(solution: Solution) -> list[str]:
    """Every iterated block: its attempts, and for each iteration residual, damping and what limited the step."""
    lines: list[str] = []
    for block in solution.blocks:
        if block.outcome is None:
            continue
        if lines:
            lines.append("")
        where = ", ".join(map(str, block.lines))
        lines.append(
            f"Block {block.number}: {_unknowns(block)} from line{'s' * (len(block.lines) != 1)} {where}"
        )
        for attempt in _attempts(block.outcome):
            lines += _attempt_lines(attempt, block)
    return lines


def _unknowns(block: BlockReport) -> str:
    """The unknowns, of many the first and how many more there are."""
    names = block.unknowns[:MOST_UNKNOWNS]
    more = len(block.unknowns) - len(names)
    return ", ".join(names) + (f" and {more:,} more" if more else "")


def _attempts(outcome: Outcome) -> Iterator[Outcome]:
    yield from outcome.attempts
    yield outcome


def _attempt_lines(attempt: Outcome, block: BlockReport) -> list[str]:
    count = attempt.iterations
    lines = [f"  {attempt.method}: {attempt.status.value} after {count} iteration{'s' * (count != 1)}"]
    rows = [("iteration", "scaled residual", "damping", "limited by")]
    steps = list(enumerate(attempt.history))
    if len(steps) > MOST_ITERATIONS:
        half = MOST_ITERATIONS // 2
        steps = [*steps[:half], *steps[-half:]]
    last = -1
    for number, step in steps:
        if number != last + 1:
            rows.append(("...", "", "", ""))
        last = number
        named = step.limiting >= 0 and len(attempt.x) == len(block.unknowns)
        limited = block.unknowns[step.limiting] if named else ""
        rows.append((str(number), f"{step.residual:.2e}", f"{step.damping:.3g}", limited))
    return lines + (in_columns(rows, indent="    ") if len(rows) > 1 else [])
