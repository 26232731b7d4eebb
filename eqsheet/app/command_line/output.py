"""Where words go: results to standard output, messages to standard error, colour only on a terminal."""

from __future__ import annotations

import shutil
import sys
from collections.abc import Iterable

from eqsheet.app.colours import palette_for
from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.diagnostics.terminal import render

# Nobody reads further before mending the first; `--json` gives all. More than the broken statements that are read, so
# that it is still said where reading stopped.
MOST_PRINTED = 250


def print_diagnostics(diagnostics: Iterable[Diagnostic]) -> None:
    """Each on several lines to standard error, an empty line after each; very many are cut short."""
    palette = palette_for(sys.stderr)
    width = shutil.get_terminal_size().columns
    found = list(diagnostics)
    for diagnostic in found[:MOST_PRINTED]:
        print(render(diagnostic, palette, width) + "\n", file=sys.stderr)
    if len(found) > MOST_PRINTED:
        print(f"eqsheet: {len(found) - MOST_PRINTED} more messages; --json gives all", file=sys.stderr)


def print_lines(lines: Iterable[str]) -> None:
    """Lines to standard output."""
    text = "\n".join(lines)
    if text:
        print(text)
