"""Closed intervals with outward rounding: what a value may be.

After Moore, Interval Analysis (1966). An interval is a pair (low, high) with low <= high, either of which may be
infinite; `None` is the empty interval. Every result is widened by more than the rounding of its ends, so that
what is outside is outside for certain.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import TypeAlias

Interval: TypeAlias = tuple[float, float]

EVERYTHING: Interval = (-math.inf, math.inf)
# Relative; some hundred roundings of a double.
_WIDENING = 1e-13
# What has come out as zero without a zero in it may have been lost to underflow.
_UNDERFLOW = 1e-300


def widened(low: float, high: float) -> Interval:
    """The interval with its ends moved outwards; an end that is no number is infinite."""
    low = -math.inf if math.isnan(low) else low - _WIDENING * abs(low) if math.isfinite(low) else low
    high = math.inf if math.isnan(high) else high + _WIDENING * abs(high) if math.isfinite(high) else high
    return low, high


def meet(a: Interval, b: Interval) -> Interval | None:
    """What both hold; None where that is nothing. An infinite end is not reached, so infinity alone is nothing.

    >>> meet((0.0, 2.0), (1.0, 3.0)), meet((0.0, 1.0), (2.0, 3.0))
    ((1.0, 2.0), None)
    """
    low, high = max(a[0], b[0]), min(a[1], b[1])
    return (low, high) if low < high or (low == high and math.isfinite(low)) else None


def hull(a: Interval, b: Interval) -> Interval:
    """The smallest interval that holds both."""
    return min(a[0], b[0]), max(a[1], b[1])


def negated(a: Interval) -> Interval:
    """-a."""
    return -a[1], -a[0]


def plus(a: Interval, b: Interval) -> Interval:
    """a + b."""
    # As for the rounding, the widening is of the terms: their sum may be far smaller.
    slack = 0.0 if a[0] == b[0] == 0.0 else _WIDENING * max(_size(a[0]), _size(b[0]))
    above = 0.0 if a[1] == b[1] == 0.0 else _WIDENING * max(_size(a[1]), _size(b[1]))
    low, high = a[0] + b[0] - slack, a[1] + b[1] + above
    return -math.inf if math.isnan(low) else low, math.inf if math.isnan(high) else high


def _size(end: float) -> float:
    return abs(end) if math.isfinite(end) else 0.0


def minus(a: Interval, b: Interval) -> Interval:
    """a - b."""
    return plus(a, negated(b))


def times(a: Interval, b: Interval) -> Interval:
    """a*b; zero times infinity is zero, as the end of an interval is not reached."""
    ends = [(0.0, 0.0) if x == 0.0 or y == 0.0 else _nonzero(x * y) for x in a for y in b]
    return widened(min(low for low, _ in ends), max(high for _, high in ends))


def _nonzero(value: float) -> Interval:
    return (-_UNDERFLOW, _UNDERFLOW) if value == 0.0 else (value, value)


def over(a: Interval, b: Interval) -> Interval | None:
    """a/b; None where b is zero alone."""
    inverse = reciprocal(b)
    return None if inverse is None else times(a, inverse)


def reciprocal(b: Interval) -> Interval | None:
    """1/b; everything where zero lies inside."""
    low, high = b
    if low == high == 0.0:
        return None
    if low < 0.0 < high:
        return EVERYTHING
    if low == 0.0:
        return widened(1.0 / high, math.inf)
    if high == 0.0:
        return widened(-math.inf, 1.0 / low)
    return widened(1.0 / high, 1.0 / low)


def increasing(
    function: Callable[[float], float], a: Interval, domain: Interval = EVERYTHING
) -> Interval | None:
    """A function that rises over its domain; None where `a` lies outside of it."""
    inside = meet(a, domain)
    if inside is None:
        return None
    low, _ = _at(function, inside[0], -math.inf)
    _, high = _at(function, inside[1], math.inf)
    return widened(low, high)


def _at(function: Callable[[float], float], end: float, otherwise: float) -> Interval:
    """The function at an end of an interval, with what underflow may hide; `otherwise` where it has no value."""
    try:
        value = function(end)
    except (ValueError, OverflowError, ZeroDivisionError):
        value = otherwise
    return (0.0, 0.0) if value == 0.0 and (end == 0.0 or math.isinf(end)) else _nonzero(value)


def magnitude(a: Interval) -> Interval:
    """abs(a)."""
    low, high = a
    if low <= 0.0 <= high:
        return 0.0, max(-low, high)
    return min(abs(low), abs(high)), max(abs(low), abs(high))


def raised(a: Interval, exponent: float) -> Interval | None:
    """a to a constant power; None where no value of `a` has one."""
    if exponent == 0.0:
        return 1.0, 1.0
    if exponent < 0.0:
        positive = raised(a, -exponent)
        return None if positive is None else reciprocal(positive)

    def power(x: float) -> float:
        return math.inf if math.isinf(x) else x**exponent

    if exponent == int(exponent) and int(exponent) % 2 == 0:
        return increasing(power, magnitude(a))
    if exponent == int(exponent):
        return increasing(lambda x: math.copysign(power(abs(x)), x), a)
    return increasing(power, a, (0.0, math.inf))


def root(a: Interval, exponent: float, of: Interval) -> Interval | None:
    """What of `of` has an `exponent`-th power in `a`; None where nothing has."""
    if exponent < 0.0:
        turned = reciprocal(a)
        return None if turned is None else root(turned, -exponent, of)

    def inverse(x: float) -> float:
        return math.inf if math.isinf(x) else x ** (1.0 / exponent)

    if exponent == int(exponent) and int(exponent) % 2:
        both = increasing(lambda x: math.copysign(inverse(abs(x)), x), a)
        return None if both is None else meet(both, of)
    size = increasing(inverse, a, (0.0, math.inf))
    if size is None:
        return None
    sides = [meet(size, of)]
    if exponent == int(exponent):
        sides.append(meet(negated(size), of))
    found = [side for side in sides if side is not None]
    return (min(s[0] for s in found), max(s[1] for s in found)) if found else None
