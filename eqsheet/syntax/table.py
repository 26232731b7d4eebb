"""Rows of inline tables: cells between blanks, names with other characters quoted."""

from __future__ import annotations

import re

from eqsheet.syntax.nodes import Cell, TableRow
from eqsheet.syntax.slip import Slip

_CELL = re.compile(r'"(?P<quoted>[^"\n]*)"|(?P<plain>[^\s"]+)')
_DECIMAL_COMMA = re.compile(r"[-+]?[0-9]+,[0-9]+(?:[eE][-+]?[0-9]+)?$")


def table_row(text: str) -> TableRow:
    """The cells of one row.

    Raises
    ------
    Slip
        A comma in a cell, or a quote that is not closed.

    >>> [cell.text for cell in table_row('"NH4+"  0.20 -').cells]
    ['NH4+', '0.20', '-']
    """
    cells = []
    position = 0
    for found in _CELL.finditer(text):
        if text[position : found.start()].strip():
            break
        position = found.end()
        if found["quoted"] is not None:
            cells.append(Cell(found.start(), found.end(), found["quoted"], True))
            continue
        cell = found["plain"]
        if "," in cell:
            _refuse_comma(cell, found.start(), found.end())
        cells.append(Cell(found.start(), found.end(), cell))
    rest = text[position:].strip()
    if rest:
        start = text.index(rest, position)
        raise Slip(
            "quote-not-closed",
            "the quoted name is not closed",
            start,
            len(text),
            'write `"name"` with both quotes',
        )
    return TableRow(0, len(text), tuple(cells))


def _refuse_comma(cell: str, start: int, end: int) -> None:
    if _DECIMAL_COMMA.match(cell):
        raise Slip(
            "decimal-comma",
            f"`{cell}` has a comma for a decimal point",
            start,
            end,
            f"write `{cell.replace(',', '.')}`",
        )
    comma = start + cell.index(",")
    raise Slip(
        "table-comma",
        "cells of a table stand apart by spaces, not commas",
        comma,
        comma + 1,
        "leave the comma out; quote a name that contains one",
    )
