"""Prints how worksheets with large families compare with the same problems solved by hand.

One run, one command: ``python tests/benchmarks/large_families.py``, with ``full`` behind it for a million unknowns
besides. Times are of the processor, the least of several runs taken in turn.
"""

from __future__ import annotations

import resource
import sys
import tempfile
import time
from collections.abc import Callable, Sequence
from pathlib import Path

import family_texts as texts
from network_text import write_network

import eqsheet


def main(arguments: Sequence[str]) -> None:
    """Measure and print, one line a figure."""
    _compare("tridiagonal, 100,000 unknowns", texts.tridiagonal, texts.tridiagonal_by_hand, 100_000)
    _compare("2-D Bratu, 300 x 300 unknowns", texts.bratu, texts.bratu_by_hand, 300)
    (taken,) = _least([lambda: _solve(texts.chain(100_000))], 3)
    print(f"chain of 100,000 members                 {taken:7.3f} s")
    _cascade()
    with tempfile.TemporaryDirectory() as folder:
        path = write_network(Path(folder), 1000)
        (taken,) = _least([lambda: _check(eqsheet.load(path).solve())], 3)
    print(f"network of 1,000 branches from CSV       {taken:7.3f} s")
    if "full" in arguments:
        _compare(
            "tridiagonal, 1,000,000 unknowns", texts.tridiagonal, texts.tridiagonal_by_hand, 1_000_000, 1
        )
        peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024**2
        print(f"largest memory in use                    {peak:7.2f} GB")


def _compare(
    what: str, text: Callable[[int], str], by_hand: Callable[[int], object], size: int, runs: int = 3
) -> None:
    _solve(text(12))
    by_hand(12)
    hand, program = _least([lambda: by_hand(size), lambda: _solve(text(size))], runs)
    print(f"{what:<40} {program:7.3f} s    by hand {hand:7.3f} s    ratio {program / hand:5.2f}")


def _cascade() -> None:
    sheet = eqsheet.parse(texts.cascade(1000))
    _check(sheet.solve())
    loads = iter(range(100))
    (taken,) = _least([lambda: _check(sheet.solve([f"x[0] = 0.001{next(loads)}"]))], 5)
    print(f"cascade of 1,000 stages, one known changed {taken * 1e3:5.0f} ms")


def _solve(text: str) -> None:
    _check(eqsheet.parse(text).solve())


def _check(solution: eqsheet.Solution) -> None:
    assert solution.solved, solution.diagnostics


def _least(calls: Sequence[Callable[[], object]], runs: int) -> list[float]:
    """The least processor time of each call, all in turn."""
    least = [float("inf")] * len(calls)
    for _ in range(runs):
        for i, call in enumerate(calls):
            begin = time.process_time()
            call()
            least[i] = min(least[i], time.process_time() - begin)
    return least


if __name__ == "__main__":
    main(sys.argv[1:])
