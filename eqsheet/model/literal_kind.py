"""What kind of number a literal is by its unit, and long numbers shortened for messages."""

from __future__ import annotations

from eqsheet.units.dimension import Dimension
from eqsheet.units.unit import Unit

_TEMPERATURE = Dimension.of({"K": 1})
_PRESSURE = Dimension.of({"kg": 1, "m": -1, "s": -2})


def kind_of(unit: Unit) -> str:
    """The kind of a literal in `unit`: see `Literal.kind`."""
    if unit.reading:
        return "reading"
    if unit.difference:
        return "difference"
    return "absolute" if unit.dimension in (_TEMPERATURE, _PRESSURE) else "plain"


def shortened_number(text: str) -> str:
    """A number as written, without the middle of a long one."""
    return text if len(text) <= 24 else f"{text[:12]}...{text[-6:]}"
