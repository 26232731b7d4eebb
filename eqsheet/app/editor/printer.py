"""Puts words on the screen."""

from __future__ import annotations

from collections.abc import Callable, Iterable

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.diagnostics.terminal import Palette, render


class Printer:
    """Writes lines and diagnostics.

    Parameters
    ----------
    write : callable
        Takes a text without a line end after its last line.
    palette : Palette
    width, height : callable
        Size of the screen now.
    """

    def __init__(
        self,
        write: Callable[[str], None],
        palette: Palette,
        width: Callable[[], int],
        height: Callable[[], int],
    ) -> None:
        self._write = write
        self._palette = palette
        self.width = width
        self.height = height

    def say(self, text: str) -> None:
        """One line, or several."""
        self._write(text)

    def lines(self, lines: Iterable[str]) -> None:
        """Lines, if there are any."""
        text = "\n".join(lines)
        if text:
            self._write(text)

    def diagnostics(self, diagnostics: Iterable[Diagnostic], most: int) -> int:
        """The first `most` diagnostics in full; how many were left out."""
        found = list(diagnostics)
        for diagnostic in found[:most]:
            self._write(render(diagnostic, self._palette, self.width()))
        return len(found) - min(len(found), most)
