"""Text of a worksheet fitted into a sentence."""

from __future__ import annotations

# Longer than this a quotation hides the sentence it stands in.
_LONGEST = 48
_END = 12


def shortened(text: str) -> str:
    """The text on one line, its middle left out where it is long.

    >>> shortened("a1 + a2 + a3 + a4 + a5 + a6 + a7 + a8 + a9 + a10 + a11 + a12 + a13")
    'a1 + a2 + a3 + a4 + a5 + a6 + a ...  + a12 + a13'
    """
    flat = " ".join(text.split())
    return flat if len(flat) <= _LONGEST else f"{flat[: _LONGEST - _END - 5]} ... {flat[-_END:]}"
