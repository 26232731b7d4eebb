"""Prints the figures of the corpus of worksheets: ``python tests/published/corpus_figures.py``.

With the word ``all`` behind it, every run that is not right is listed below its figure.
"""

from __future__ import annotations

import sys
from collections.abc import Iterable, Iterator
from pathlib import Path
from time import perf_counter

sys.path[:0] = [str(Path(__file__).parent), str(Path(__file__).parents[2])]

# found only through the path set above
from corpus_changes import FAULTS, corpus  # noqa: E402
from corpus_runs import (  # noqa: E402
    Run,
    adversarial_runs,
    as_written,
    faults,
    guesses_removed,
    other_order,
    rescalings,
    starts_off,
    starts_removed,
)

# Six decades of starts.
FACTORS = (1e-3, 1e-2, 1e-1, 1.0, 1e1, 1e2, 1e3)
FAULTS_OF_A_KIND = 25


def figures() -> Iterator[tuple[str, float, Iterable[Run]]]:
    """Each figure: what is counted, the share asked for, its runs."""
    entries = corpus()
    edge = [e for e in entries if "domain edge" in e.sets]
    published = [e for e in entries if "published" in e.sets]
    yield f"{len(entries)} worksheets as written", 1.0, as_written(entries)
    yield "start values removed, bounds kept", 0.95, starts_removed(entries)
    yield "guesses removed, bounds and all", 0.95, guesses_removed(entries)
    yield "start values off by a hundred either way", 0.98, starts_off(entries, (1e-2, 1e2))
    yield f"{len(edge)} at the edge of a domain, six decades", 0.99, starts_off(edge, FACTORS)
    yield f"{len(published)} published systems, six decades", 0.98, starts_off(published, FACTORS)
    yield "each quantity rescaled, 1e-6 to 1e6", 1.0, rescalings(entries, (1, 2, 3))
    yield "lines shuffled, names changed", 1.0, other_order(entries, (1, 2, 3))
    for kind in FAULTS:
        yield f"faults: {kind}", 0.8, faults(entries, kind, FAULTS_OF_A_KIND, 1)
    yield "adversarial: in time, a true verdict", 1.0, adversarial_runs()


def main(listed: bool) -> int:
    """Print the table; 0 if every figure is reached and nothing is called solved that is not."""
    print(
        f"{'figure':48s} {'right':>9s} {'share':>7s} {'asked':>6s} {'false':>5s} {'slowest':>8s} {'time':>7s}"
    )
    missed = 0
    for name, asked, running in figures():
        begin = perf_counter()
        runs = list(running)
        right = sum(r.right for r in runs)
        false = sum(r.false for r in runs)
        slowest = max(r.seconds for r in runs)
        reached = right >= asked * len(runs) and not false
        missed += not reached
        print(
            f"{name:48s} {right:4d}/{len(runs):4d} {right / len(runs):7.1%} {asked:6.0%} {false:5d}"
            f" {slowest:6.2f} s {perf_counter() - begin:5.0f} s{'' if reached else '  <- missed'}",
            flush=True,
        )
        if listed:
            for run in runs:
                if not run.right or run.false:
                    print(f"    {run.name}: {run.said}")
    return 1 if missed else 0


if __name__ == "__main__":
    sys.exit(main("all" in sys.argv[1:]))
