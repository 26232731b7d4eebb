"""Prints how the program compares with a hand-written script.

One run, one command: ``python tests/benchmarks/ratios.py``.
"""

from __future__ import annotations

import itertools
import sys
from statistics import median

import script_20
from measure import (
    LOOP,
    NOT_FOR_SOLVE,
    SCRIPT_COMMAND,
    SOLVE_COMMAND,
    call_times,
    one_line_times,
    packages_imported_by_solve,
    wall_times,
)

import eqsheet


def main() -> None:
    """Measure and print, one line a figure."""
    script, program = wall_times([SCRIPT_COMMAND, SOLVE_COMMAND], runs=7)
    print("20 coupled equations, median of 7 runs each, interleaved")
    print(
        f"  cold   script {script:7.3f} s    eqsheet solve {program:7.3f} s    ratio {program / script:5.2f}"
    )

    sheet = eqsheet.parse(LOOP.read_text(encoding="utf-8"))
    stage: list[float] = []
    changes = itertools.cycle([["T_h1 = 78 degC"], ["T_h1 = 77 degC"]])
    root, warm, read, changed = call_times(
        [
            script_20.find_root,
            lambda: stage.append(sheet.solve().timing["solve"]),
            lambda: [value.si for value in sheet.solve().values()],
            lambda: sheet.solve(next(changes)),
        ],
        runs=51,
    )
    print(
        f"  warm   script {root * 1e3:7.3f} ms   sheet.solve() {warm * 1e3:7.3f} ms   ratio {warm / root:5.2f}"
    )
    print(f"         all its values read                {read * 1e3:10.3f} ms   ratio {read / root:5.2f}")
    numbers = median(stage)
    print(
        f"         its numbers alone (timing 'solve') {numbers * 1e3:10.3f} ms   ratio {numbers / root:5.2f}"
    )
    print(
        f"         with one known changed             {changed * 1e3:10.3f} ms   ratio {changed / root:5.2f}"
    )

    print("explicit one-line equations of varied shapes, text to answer, median of 3 runs")
    for size in (2_500, 5_000, 10_000):
        reading, solving = one_line_times(size, runs=3)
        print(
            f"  {size:6}  {reading + solving:6.2f} s   {(reading + solving) / size * 1e3:6.3f} ms an equation"
            f"   (parse {reading:.2f} s, solve {solving:.2f} s)"
        )

    unwanted = sorted(packages_imported_by_solve() & set(NOT_FOR_SOLVE))
    print("imported by solve but not wanted:", ", ".join(unwanted) or "nothing")


if __name__ == "__main__":
    sys.exit(main())
