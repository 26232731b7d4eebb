"""Text in columns, aligned by what a terminal shows."""

from __future__ import annotations

from collections.abc import Sequence

GAP = "  "


def width_of(text: str) -> int:
    """Columns a terminal gives the text."""
    if text.isascii():
        return len(text)
    from wcwidth import wcswidth

    return max(int(wcswidth(text)), 0)


def in_columns(rows: Sequence[Sequence[str]], numeric: int = -1, indent: str = "") -> list[str]:
    """The rows as lines, every column as wide as its widest cell.

    Parameters
    ----------
    rows : sequence of sequences of str
        Equally long.
    numeric : int
        Column to be aligned to the right; the others are to the left. -1 for none.
    indent : str
        Put before every line.

    >>> in_columns([("v", "2.5", "m/s"), ("rho", "998", "kg/m^3")], numeric=1)
    ['v    2.5  m/s', 'rho  998  kg/m^3']
    """
    if not rows:
        return []
    widths = [max(width_of(row[i]) for row in rows) for i in range(len(rows[0]))]
    lines = []
    for row in rows:
        cells = []
        for i, (cell, width) in enumerate(zip(row, widths)):
            room = " " * (width - width_of(cell))
            cells.append(room + cell if i == numeric else cell + room)
        lines.append((indent + GAP.join(cells)).rstrip())
    return lines
