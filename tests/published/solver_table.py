"""Prints the table of the published solver problems: ``python tests/published/solver_table.py``."""

from __future__ import annotations

import sys
from pathlib import Path

sys.path[:0] = [str(Path(__file__).parent), str(Path(__file__).parents[2])]

from solver_figures import FACTORS, all_runs  # noqa: E402 - found only through the path set above


def main() -> int:
    """Print the table; 0 if every verdict is right."""
    heads = ("problem", "start", "verdict", "method", "steps", "residual", "to root", "seconds")
    print("{:28s} {:>5s}  {:18s} {:22s} {:>5s} {:>9s} {:>8s} {:>7s}".format(*heads))
    right = false = count = 0
    for run in all_runs():
        count += 1
        right += run.right
        false += run.false_success
        mark = "" if run.right else "  <- false success" if run.false_success else "  <- wrong"
        outcome = run.outcome
        name = f"{run.published.number:2d} {run.published.name}"
        print(
            f"{name:28s} {run.factor:4d}x  {outcome.status.value:18s} {outcome.method:22s}"
            f" {outcome.iterations:5d} {outcome.residual:9.1e} {run.to_root:8.0e} {run.seconds:7.3f}{mark}"
        )
    print(f"{right} of {count} verdicts right from {len(FACTORS)} starts each, {false} false successes")
    return 0 if right == count else 1


if __name__ == "__main__":
    sys.exit(main())
