"""Timing of the program against the script, for `ratios.py` and the tests beside it."""

from __future__ import annotations

import subprocess
import sys
import time
from collections.abc import Callable, Sequence
from pathlib import Path
from statistics import median

HERE = Path(__file__).parent
LOOP = HERE / "loop_20.eqsheet"
SCRIPT = HERE / "script_20.py"
SCRIPT_COMMAND = [sys.executable, str(SCRIPT)]
SOLVE_COMMAND = [sys.executable, "-m", "eqsheet", "solve", str(LOOP)]

NOT_FOR_SOLVE = ("sympy", "matplotlib", "pint", "networkx", "pandas", "prompt_toolkit")
"""Packages `eqsheet solve` must not import."""


def wall_times(commands: Sequence[list[str]], runs: int) -> list[float]:
    """Median wall time in s of each command, the runs interleaved so that all see the same disturbances."""
    times: list[list[float]] = [[] for _ in commands]
    for command in commands:
        subprocess.run(command, check=True, capture_output=True)  # once unmeasured: files get cached
    for _ in range(runs):
        for command, found in zip(commands, times):
            start = time.perf_counter()
            subprocess.run(command, check=True, capture_output=True)
            found.append(time.perf_counter() - start)
    return [median(found) for found in times]


def call_times(calls: Sequence[Callable[[], object]], runs: int) -> list[float]:
    """Median time in s of each call, interleaved."""
    times: list[list[float]] = [[] for _ in calls]
    for call in calls:
        call()
    for _ in range(runs):
        for call, found in zip(calls, times):
            start = time.perf_counter()
            call()
            found.append(time.perf_counter() - start)
    return [median(found) for found in times]


def one_line_times(size: int, runs: int) -> tuple[float, float]:
    """Median times in s to read and to solve `size` one-line equations, other ones and a new process each run."""
    found = []
    for seed in range(runs):
        command = [sys.executable, str(HERE / "time_one_line.py"), str(size), str(seed)]
        done = subprocess.run(command, check=True, capture_output=True, text=True)
        found.append([float(number) for number in done.stdout.split()])
    reading, solving = zip(*found)
    return median(reading), median(solving)


def packages_imported_by_solve() -> set[str]:
    """Top-level packages loaded when `eqsheet solve` has run on the loop."""
    code = (
        "import contextlib, io, sys\n"
        "from eqsheet.app.main import main\n"
        "with contextlib.redirect_stdout(io.StringIO()), contextlib.suppress(SystemExit):\n"
        f"    main(['solve', {str(LOOP)!r}])\n"
        "print(*{name.partition('.')[0] for name in sys.modules})\n"
    )
    done = subprocess.run([sys.executable, "-c", code], check=True, capture_output=True, text=True)
    return set(done.stdout.split())
