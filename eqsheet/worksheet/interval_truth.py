"""Truth values as closed intervals of 0 (false) and 1 (true): (0, 1) is not decided.

What ranges of two sides tell of a comparison, and what a comparison that holds, or does not, tells of the ranges
of its sides. Both ends of a range belong to it, so `<` and `<=` tell the same of the sides.
"""

from __future__ import annotations

import math
from typing import TypeAlias

from eqsheet.worksheet.interval import Interval, meet

TRUE: Interval = (1.0, 1.0)
FALSE: Interval = (0.0, 0.0)
OPEN: Interval = (0.0, 1.0)

# The ranges of two operands, either of which may be empty.
Pair: TypeAlias = tuple[Interval | None, Interval | None]


def compared(operation: str, a: Interval, b: Interval) -> Interval:
    """Truth of ``lt``, ``le`` or ``eq`` of two ranges.

    >>> compared("lt", (0.0, 1.0), (2.0, 3.0)), compared("le", (0.0, 2.0), (1.0, 3.0))
    ((1.0, 1.0), (0.0, 1.0))
    """
    if operation == "eq":
        return OPEN if meet(a, b) else FALSE
    if a[1] < b[0] or (operation == "le" and a[1] <= b[0]):
        return TRUE
    if a[0] > b[1] or (operation == "lt" and a[0] >= b[1]):
        return FALSE
    return OPEN


def sides(operation: str, truth: Interval, a: Interval, b: Interval) -> Pair:
    """What is left of the ranges of both sides of a comparison with this truth."""
    if truth == OPEN:
        return a, b
    if operation == "eq":
        both = meet(a, b)
        return (both, both) if truth == TRUE else (a, b)
    if truth == TRUE:
        return meet(a, (-math.inf, b[1])), meet(b, (a[0], math.inf))
    return meet(a, (b[0], math.inf)), meet(b, (-math.inf, a[1]))


def denied(truth: Interval) -> Interval:
    """Truth of ``not``."""
    return 1.0 - truth[1], 1.0 - truth[0]


def joined(operation: str, a: Interval, b: Interval | None) -> Interval | None:
    """Truth of ``and`` or ``or``; `b`, None where it has no value, is only asked where `a` does not decide."""
    deciding = FALSE if operation == "and" else TRUE
    if b is None:
        return meet(a, deciding)
    if operation == "and":
        return min(a[0], b[0]), min(a[1], b[1])
    return max(a[0], b[0]), max(a[1], b[1])


def operands(operation: str, truth: Interval, a: Interval, b: Interval | None) -> Pair:
    """What is left of the truth of both operands of ``and`` or ``or`` with this truth."""
    deciding = FALSE if operation == "and" else TRUE
    if b is None:
        return meet(a, deciding), None
    other = denied(deciding)
    if truth == other:
        return meet(a, other), meet(b, other)
    if truth == deciding:
        # One of them decides; it is certain which where the other does not.
        return (meet(a, deciding) if b == other else a), (meet(b, deciding) if a == other else b)
    return a, b
