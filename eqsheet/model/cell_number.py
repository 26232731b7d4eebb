"""Numbers in the cells of tables, and what to write where a cell holds another form of one."""

from __future__ import annotations

import math
import re

_NUMBER = re.compile(r"[+-]?[0-9]+(\.[0-9]+)?([eE][+-]?[0-9]+)?")
_POINT_MISSING = re.compile(r"([+-]?)([0-9]*)\.([0-9]*)((?:[eE][+-]?[0-9]+)?)")
_DECIMAL_COMMA = re.compile(r"[+-]?[0-9]+,[0-9]+([eE][+-]?[0-9]+)?")
_GROUPED = re.compile(r"[+-]?[0-9]{1,3}(['_  ][0-9]{3})+(\.[0-9]+)?")
_FRACTION = re.compile(r"[+-]?([0-9]+)/([0-9]+)")
_WITH_UNIT = re.compile(r"[+-]?[0-9]+(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?\s*([^\W\d]\S*|%|°\S*)")
# A comma between digits in a line: a mark between fields, or a decimal mark in a wrong place.
_COMMA_IN_DIGITS = re.compile(r"(?<![\w.])([0-9]+),([0-9]+)(?![\w.])")
# Signs that word processors and spreadsheets set instead of a minus.
_MINUS = str.maketrans("−–—‐‑", "-----")


def cell_number(text: str) -> float | None:
    """The number in a cell; None where it holds none, or one beyond floats.

    >>> cell_number("-1.5e3"), cell_number("1,5"), cell_number("1e999")
    (-1500.0, None, None)
    """
    if not _NUMBER.fullmatch(text):
        return None
    value = float(text)
    return value if math.isfinite(value) else None


def cure_of_cell(text: str) -> str:
    """What to write instead of a cell that is no number but looks much like one; empty for all else.

    >>> cure_of_cell("1,5")
    'the decimal mark is a point: write 1.5'
    >>> cure_of_cell("twelve")
    ''
    """
    plain = text.translate(_MINUS)
    if plain != text and cell_number(plain) is not None:
        return f"the sign is not a minus: write {plain}"
    if _DECIMAL_COMMA.fullmatch(plain):
        return f"the decimal mark is a point: write {plain.replace(',', '.')}"
    if _GROUPED.fullmatch(plain):
        return f"digits are not grouped: write {re.sub('[^-+.0-9]', '', plain)}"
    if (fraction := _FRACTION.fullmatch(plain)) and int(fraction[2]):
        return f"a cell holds a number, nothing to reckon: write {int(fraction[1]) / int(fraction[2]):.6g}"
    if (missing := _POINT_MISSING.fullmatch(plain)) and missing[2] + missing[3]:
        sign, before, after, power = missing.groups()
        number = f"{sign}{before or 0}{'.' + after if after else ''}{power}"
        return f"digits stand on both sides of the point: write {number}"
    if unit := _WITH_UNIT.fullmatch(plain):
        return f"the unit stands in the heading, `in {unit[1]}`, and the number alone in the cell"
    if any(c.isdigit() and not c.isascii() for c in plain):
        return "write the digits 0 to 9"
    return ""


def cure_of_row(line: str) -> str:
    """What to write where a decimal comma parts a cell of a CSV file in two; empty where there is none.

    >>> cure_of_row("p1,2,5,100")
    'if 2,5 is one number, write 2.5: commas part the cells of this file'
    """
    found = None if ";" in line or "\t" in line else _COMMA_IN_DIGITS.search(line)
    if found is None:
        return ""
    return f"if {found[0]} is one number, write {found[1]}.{found[2]}: commas part the cells of this file"
