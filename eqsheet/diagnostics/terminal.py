"""A diagnostic as several lines for a person at a terminal.

::

    loop.eqsheet:4:7: error: unknown unit `lbs` [unknown-unit]
       4 | m = 5 lbs
         |       ^^^
      help: write `lb`
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, Severity
from eqsheet.diagnostics.excerpt import excerpt
from eqsheet.diagnostics.oneline import place
from eqsheet.diagnostics.printable import printable


@dataclass(frozen=True, slots=True)
class Palette:
    """Character sequences that switch on the colour of a severity, and all off again."""

    error: str = ""
    warning: str = ""
    note: str = ""
    reset: str = ""

    def paint(self, severity: Severity, text: str) -> str:
        """`text` in the colour of `severity`."""
        colour = {Severity.ERROR: self.error, Severity.WARNING: self.warning, Severity.NOTE: self.note}
        return f"{colour[severity]}{text}{self.reset}"


PLAIN = Palette()
"""No colour."""

COLOURED = Palette("\x1b[1;31m", "\x1b[1;33m", "\x1b[1;36m", "\x1b[0m")
"""Red, yellow, cyan by the SGR sequences of ECMA-48; colour is for severity alone."""

DEFAULT_WIDTH = 100
_NARROWEST_NUMBER = 4  # width of the line numbers, so that excerpts of short worksheets line up
_BAR = " | "


def render(diagnostic: Diagnostic, palette: Palette = PLAIN, width: int = DEFAULT_WIDTH) -> str:
    """The diagnostic on several lines, without a line end after the last.

    Parameters
    ----------
    diagnostic : Diagnostic
    palette : Palette
        `PLAIN` or `COLOURED`.
    width : int
        Columns of the terminal; only excerpts of the source are cut to it, never a message.

    Returns
    -------
    str
        Place and headline; the guilty text underlined in its line; the other places with what is said of
        them; notes; help.
    """
    severity = palette.paint(diagnostic.severity, diagnostic.severity.value)
    where = place(diagnostic)
    headline = f"{severity}: {printable(diagnostic.message)} [{diagnostic.code}]"
    lines = [f"{where}: {headline}" if where else headline]
    gutter = max((len(_number(label)) for label in diagnostic.labels), default=0)
    gutter = max(gutter, _NARROWEST_NUMBER)
    above = ("", "")  # file and line of source printed last, so that two labels of one line share it
    for position, label in enumerate(diagnostic.labels):
        part = excerpt(label.span, width - gutter - len(_BAR))
        file, line = label.span.source.name, f"{_number(label):>{gutter}}{_BAR}{part.text}".rstrip()
        if (file, line) != above:
            if position > 0 and file != (above[0] or file):
                lines.append(f"  in {printable(file)}:")
            lines.append(line)
            above = (file, line)
        underline = ("-" if position else "^") * part.length
        if position == 0:
            underline = palette.paint(diagnostic.severity, underline)
        says = f" {printable(label.text)}" if label.text else ""
        lines.append(f"{'':>{gutter}}{_BAR}{'':>{part.indent}}{underline}{says}")
    lines += [f"  note: {printable(text)}" for text in diagnostic.notes]
    if diagnostic.help:
        lines.append(f"  help: {printable(diagnostic.help)}")
    return "\n".join(lines)


def render_all(
    diagnostics: Iterable[Diagnostic], palette: Palette = PLAIN, width: int = DEFAULT_WIDTH
) -> str:
    """All of them, an empty line between two."""
    return "\n\n".join(render(diagnostic, palette, width) for diagnostic in diagnostics)


def _number(label: Label) -> str:
    return str(label.span.line) if label.span.source.numbered else ""
