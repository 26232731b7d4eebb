"""The program as a process of its own, for what only a process shows: streams, signals, exit statuses."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
COMMAND = [sys.executable, "-m", "eqsheet"]


def environment(**changes: str) -> dict[str, str]:
    """The environment with the checkout importable from any directory."""
    return {**os.environ, "PYTHONPATH": str(ROOT), **changes}


def run(
    *arguments: str, text: bytes = b"", cwd: Path | None = None, **changes: str
) -> subprocess.CompletedProcess[bytes]:
    """Run the program to its end; more than a minute fails."""
    return subprocess.run(
        [*COMMAND, *arguments],
        input=text,
        capture_output=True,
        cwd=cwd,
        env=environment(**changes),
        timeout=60,
        check=False,
    )
