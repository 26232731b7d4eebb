"""The unit each quantity is shown in, and values written with it."""

from __future__ import annotations

from collections.abc import Sequence

from eqsheet.model.system import EquationSystem
from eqsheet.units.dimension import Dimension
from eqsheet.units.display import default_unit, format_value
from eqsheet.units.registry import as_difference
from eqsheet.units.unit import Unit
from eqsheet.worksheet.written_values import DIGITS_IN_MESSAGES

_OPEN = Unit("", Dimension(()), 1.0)


def shown_unit(
    system: EquationSystem, dimensions: Sequence[Dimension | None], kinds: Sequence[str], quantity: int
) -> Unit:
    """Unit of `show`, known, guess or limit where it fits the dimension, else the one of the fixed table."""
    dimension = dimensions[quantity]
    if dimension is None:
        return _OPEN
    preferred = system.units.get(quantity)
    if preferred is not None and preferred.dimension == dimension:
        return preferred
    return default_unit(dimension, kinds[quantity], system.unit_table)


def in_unit(unit: Unit, kind: str, si: float) -> float:
    """The value in the unit, as it would be written; a difference without the unit's origin."""
    return (as_difference(unit) if kind == "difference" else unit).as_written(si)


def with_unit(number: str, unit: Unit) -> str:
    """A number and a unit as a worksheet has them: a percent sign follows directly."""
    if not unit.text or unit.text == "1":
        return number
    return number + unit.text if unit.text == "%" else f"{number} {unit.text}"


def written_quantity(unit: Unit, kind: str, si: float) -> str:
    """A value with its unit, for messages."""
    return with_unit(format_value(in_unit(unit, kind, si), DIGITS_IN_MESSAGES), unit)
