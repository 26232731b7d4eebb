"""Whether residuals that vanish near a root grow further off as beside a root of some multiplicity.

At a root of order m residuals grow with the m-th power of the distance, so slowly at first that rounding hides it.
Along a stretch or a curve of roots they stay at rounding level, and where it ends they do not grow by a power of the
distance from here.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from math import log2

# Scaled residual, in units of rounding, above which it is more than noise.
NOISE = 64.0
# Powers of the distance, in doublings per doubling, that are looked for: at a double root 2.
LEAST_ORDER = 1.5
# How far the orders told by one doubling and the next may differ.
ORDERS_DIFFER = 0.5


def grows_by_a_power(residuals: Iterable[float], noise: float) -> bool:
    """Whether residuals at distances that double rise out of the noise by one and the same power.

    Parameters
    ----------
    residuals : iterable of float
        At each distance, the first of them within the noise; inf where there is none to be had. Taken as far as needed.
    noise : float
        Up to which a residual says nothing, `NOISE` times rounding or more.
    """
    values = iter(residuals)
    before = 0.0
    for value in values:
        if value > noise:
            return _same_order(before, value, values, noise / NOISE)
        before = value
    return False


def _same_order(before: float, value: float, values: Iterator[float], rounding: float) -> bool:
    """Whether the values after one continue as the one before it says, whose last digits are rounding."""
    once, twice = next(values, 0.0), next(values, 0.0)
    if not value < once < twice:
        return False
    first, second = log2(once / value), log2(twice / once)
    if not (first > LEAST_ORDER and abs(first - second) < ORDERS_DIFFER):
        return False
    expected: float = value / 2.0**first
    return before + 4.0 * rounding >= 0.25 * expected
