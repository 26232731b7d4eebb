"""Values written in messages."""

from __future__ import annotations

from eqsheet.model.evaluate import ROUNDING
from eqsheet.units.display import format_value

# Enough to tell two values apart that matter to an engineer.
DIGITS_IN_MESSAGES = 5


def written(value: float) -> str:
    """A number for a message."""
    return format_value(value, DIGITS_IN_MESSAGES)


def as_typed(value: float) -> float:
    """How far a float may be from the decimal number that was typed: rounded once, and once more to SI."""
    return 0.0 if value.is_integer() else 2.0 * ROUNDING * abs(value)
