"""Plain-text worksheets of simultaneous equations, with units, solved and defended.

>>> import eqsheet
>>> sheet = eqsheet.parse('''
... dP = f*(L/D)*rho*v^2/2     # Darcy-Weisbach
... v = Q/(pi*D^2/4)
... dP = 24 kPa
... L = 120 m
... D = 52.5 mm
... rho = 998 kg/m^3
... f = 0.021
... show Q in L/s
... ''')
>>> solution = sheet.solve()
>>> solution.status
'solved'
>>> round(solution["Q"].to("L/min"), 1), solution["Q"].unit
(130.0, 'L/s')
>>> solution["v"].known, solution["v"].block
(False, 1)
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from eqsheet.worksheet.load import load
    from eqsheet.worksheet.sheet import Worksheet, parse
    from eqsheet.worksheet.solution import BlockReport, LimitReport, QuantityValue, Solution

__all__ = ["BlockReport", "LimitReport", "QuantityValue", "Solution", "Worksheet", "load", "parse"]

_HOME = {
    "load": "load",
    "Worksheet": "sheet",
    "parse": "sheet",
    "BlockReport": "solution",
    "LimitReport": "solution",
    "QuantityValue": "solution",
    "Solution": "solution",
}


def __getattr__(name: str) -> Any:
    """The public names, imported when first asked for: the command line needs few of them at its start."""
    if name not in _HOME:
        raise AttributeError(f"module 'eqsheet' has no attribute {name!r}")
    from importlib import import_module

    return getattr(import_module(f"eqsheet.worksheet.{_HOME[name]}"), name)
