"""Worksheets from files."""

from __future__ import annotations

import os

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.syntax.read import read_source
from eqsheet.worksheet.sheet import Worksheet, read


class UnreadableFile(OSError):
    """The file holds no text that can be read; `diagnostic` says why."""

    def __init__(self, diagnostic: Diagnostic) -> None:
        super().__init__(diagnostic.message)
        self.diagnostic = diagnostic


def load(path: str | os.PathLike[str]) -> Worksheet:
    """The worksheet in a file; ``"-"`` is standard input.

    Raises
    ------
    UnreadableFile
        If there is no such file, or it is not text.
    """
    source = read_source(os.fspath(path))
    if isinstance(source, Diagnostic):
        raise UnreadableFile(source)
    return read(source)
