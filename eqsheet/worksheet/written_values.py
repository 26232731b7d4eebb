"""Values written in messages."""

from __future__ import annotations

from eqsheet.units.display import format_value

# Enough to tell two values apart that matter to an engineer.
DIGITS_IN_MESSAGES = 5


def written(value: float) -> str:
    """A number for a message."""
    return format_value(value, DIGITS_IN_MESSAGES)
