"""What was meant where a statement does not fit the grammar: common slips, each with its cure."""

from __future__ import annotations

from eqsheet.syntax.slip import Slip, Unexpected


def slip_of(text: str, unexpected: Unexpected) -> Slip:
    """The slip behind `unexpected` in the logical line `text`."""
    end = min(unexpected.position + 1, len(text))
    return Slip("syntax", "this cannot be read", max(0, end - 1), end)
