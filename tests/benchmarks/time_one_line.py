"""Prints the seconds to read and to solve a worksheet of one-line equations: ``time_one_line.py SIZE SEED``.

A process of its own for each measurement, since the program remembers lines and shapes it has seen.
"""

from __future__ import annotations

import sys
import time

from one_line import one_line_worksheet

import eqsheet


def main(size: int, seed: int) -> None:
    """Time one worksheet, with the packages loaded beforehand."""
    eqsheet.parse("x = 1 m\ny = 2*x\n").solve()
    text, _ = one_line_worksheet(size, seed)
    start = time.perf_counter()
    sheet = eqsheet.parse(text)
    read = time.perf_counter()
    sheet.solve()
    print(read - start, time.perf_counter() - read)


if __name__ == "__main__":
    main(int(sys.argv[1]), int(sys.argv[2]))
