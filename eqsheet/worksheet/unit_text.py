"""Units named by text, as in a worksheet."""

from __future__ import annotations

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.nodes import Equation, Number
from eqsheet.syntax.parse import parse_statement
from eqsheet.units.dimension import DIMENSIONLESS
from eqsheet.units.registry import UnitProblem, UnitTable
from eqsheet.units.unit import Unit


def resolve_text(table: UnitTable, text: str) -> Unit:
    """The unit that `text` names; a plain number's for ``""`` and ``"1"``.

    Raises
    ------
    ValueError
        If it names none.

    >>> resolve_text(UnitTable.standard(), "W/(m^2*K)").dimension.text
    'kg/(s^3*K)'
    """
    text = text.strip()
    if text in ("", "1"):
        return Unit("", DIMENSIONLESS, 1.0)
    statement, _ = parse_statement(Source("unit", f"x = 1 {text}"))
    node = None if statement is None else statement.node
    if not (isinstance(node, Equation) and isinstance(node.right, Number) and node.right.unit is not None):
        raise ValueError(f"`{text}` is not a unit")
    factors = tuple((factor.symbol, factor.exponent) for factor in node.right.unit.factors)
    unit = table.resolve(node.right.unit.text, factors)
    if isinstance(unit, UnitProblem):
        raise ValueError(f"{unit.message}: {unit.help}" if unit.help else unit.message)
    return unit
