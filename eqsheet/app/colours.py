"""Whether to colour: only on a terminal that wants it."""

from __future__ import annotations

import os
from typing import TextIO

from eqsheet.diagnostics.terminal import COLOURED, PLAIN, Palette


def palette_for(stream: TextIO) -> Palette:
    """Colours where the stream is a terminal that wants them (``NO_COLOR``, ``TERM=dumb``)."""
    if os.environ.get("NO_COLOR") or os.environ.get("TERM") == "dumb" or not stream.isatty():
        return PLAIN
    return COLOURED
