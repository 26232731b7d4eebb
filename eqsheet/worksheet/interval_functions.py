"""Ranges of functions that do not rise throughout, and of what they are functions of.

Forwards, the range of a function over the range of its argument. Backwards, what of the argument's range gives values
in a range of the function: the hull of it, so that a wave narrows it where the ends lie off, and a piece between two
turning points is as good as a rising function.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import lru_cache
from itertools import pairwise

from eqsheet.model.interpolant import CURVE, Interpolant
from eqsheet.worksheet.interval import EVERYTHING, Interval, hull, meet, negated, widened

_HALF = 0.5 * math.pi
_TURN = 2.0 * math.pi
_SWING: Interval = (-1.0, 1.0)
# Beyond so many radians an angle reduced to one turn has lost too many digits to be relied on.
_FARTHEST = 1e8
# Uncertainty of a point of a wave, relative to one radian or to the angle itself.
_SLACK = 1e-13
# Halvings after which the end of a range on a curve is found to rounding.
_HALVINGS = 60


# --- waves ------------------------------------------------------------------------------------------------


def sine(a: Interval) -> Interval:
    """sin(a).

    >>> low, high = sine((0.0, 2.0))
    >>> abs(low) < 1e-12, high
    (True, 1.0)
    """
    if not _within_reach(a) or a[1] - a[0] >= _TURN:
        return _SWING
    ends = sorted((math.sin(a[0]), math.sin(a[1])))
    low = -1.0 if _holds(a, -_HALF) else ends[0] - _slack(a)
    high = 1.0 if _holds(a, _HALF) else ends[1] + _slack(a)
    return max(low, -1.0), min(high, 1.0)


def of_sine(whole: Interval, a: Interval) -> Interval | None:
    """What of `a` has its sine in `whole`."""
    values = meet(whole, _SWING)
    if values is None:
        return None
    low = _first(a[0], values) if abs(a[0]) <= _FARTHEST else a[0]
    high = -_first(-a[1], negated(values)) if abs(a[1]) <= _FARTHEST else a[1]
    return meet(a, _loosened(low, high))


def cosine(a: Interval) -> Interval:
    """cos(a)."""
    return sine(_shifted(a, _HALF))


def of_cosine(whole: Interval, a: Interval) -> Interval | None:
    """What of `a` has its cosine in `whole`."""
    found = of_sine(whole, _shifted(a, _HALF))
    return None if found is None else meet(a, _shifted(found, -_HALF))


def tangent(a: Interval) -> Interval:
    """tan(a): everything where a pole may lie in it."""
    if not _between_poles(a):
        return EVERYTHING
    low, high = widened(math.tan(a[0]), math.tan(a[1]))
    # Near a pole the uncertainty of the angle is that of a far larger tangent.
    return low - _slack(a) * (1.0 + low * low), high + _slack(a) * (1.0 + high * high)


def of_tangent(whole: Interval, a: Interval) -> Interval | None:
    """What of `a` has its tangent in `whole`, between two poles."""
    if not _between_poles(a):
        return a
    turn = math.pi * math.floor((a[0] + _HALF) / math.pi)
    return meet(a, (turn + math.atan(whole[0]) - _slack(a), turn + math.atan(whole[1]) + _slack(a)))


def _within_reach(a: Interval) -> bool:
    return max(abs(a[0]), abs(a[1])) <= _FARTHEST


def _slack(a: Interval) -> float:
    return _SLACK * (1.0 + max(abs(a[0]), abs(a[1])))


def _shifted(a: Interval, by: float) -> Interval:
    return _loosened(a[0] + by, a[1] + by)


def _loosened(low: float, high: float) -> Interval:
    """The angles moved outwards by their uncertainty."""
    return low - _SLACK * (1.0 + abs(low)), high + _SLACK * (1.0 + abs(high))


def _holds(a: Interval, angle: float) -> bool:
    """Whether `a` holds, or may hold, the angle plus any number of turns."""
    return angle + _TURN * math.ceil((a[0] - _slack(a) - angle) / _TURN) <= a[1] + _slack(a)


def _first(low: float, values: Interval) -> float:
    """The first angle from `low` on whose sine is in `values`."""
    if values[0] <= math.sin(low) <= values[1]:
        return low
    angles = [turning for value in values for turning in (math.asin(value), math.pi - math.asin(value))]
    return min(angle + _TURN * math.ceil((low - angle) / _TURN) for angle in angles)


def _between_poles(a: Interval) -> bool:
    """Whether no pole of the tangent lies in `a` or next to it."""
    if not _within_reach(a):
        return False
    slack = 1e-9 * (1.0 + max(abs(a[0]), abs(a[1])))
    return _HALF + math.pi * math.ceil((a[0] - slack - _HALF) / math.pi) > a[1] + slack


# --- functions that fall, or fall and rise ----------------------------------------------------------------


def arc_cosine(a: Interval) -> Interval | None:
    """acos(a); None where nothing in `a` has one."""
    inside = meet(a, _SWING)
    return None if inside is None else widened(math.acos(inside[1]), math.acos(inside[0]))


def of_arc_cosine(whole: Interval, a: Interval) -> Interval | None:
    """What of `a` has its arc cosine in `whole`."""
    angles = meet(whole, (0.0, math.pi))
    if angles is None:
        return None
    slack = 4.0 * _SLACK
    return meet(a, (math.cos(angles[1]) - slack, math.cos(angles[0]) + slack))


def of_hyperbolic_cosine(whole: Interval, a: Interval) -> Interval | None:
    """What of `a` has its hyperbolic cosine in `whole`."""
    values = meet(whole, (1.0, math.inf))
    if values is None:
        return None
    low, high = widened(math.acosh(values[0]), math.acosh(values[1]))
    sides = [side for side in (meet(a, (low, high)), meet(a, (-high, -low))) if side is not None]
    return hull(sides[0], sides[-1]) if sides else None


def of_smaller(whole: Interval, a: Interval, b: Interval) -> tuple[Interval | None, Interval | None]:
    """What of `a` and `b` has its smaller one in `whole`: neither is below it, and one is not above."""
    return _not_below(whole, a, b), _not_below(whole, b, a)


def of_larger(whole: Interval, a: Interval, b: Interval) -> tuple[Interval | None, Interval | None]:
    """What of `a` and `b` has its larger one in `whole`."""
    first, second = of_smaller(negated(whole), negated(a), negated(b))
    return None if first is None else negated(first), None if second is None else negated(second)


def _not_below(whole: Interval, a: Interval, b: Interval) -> Interval | None:
    return meet(a, (whole[0], whole[1] if b[0] > whole[1] else math.inf))


# --- curves -----------------------------------------------------------------------------------------------


def read(curve: Interpolant, a: Interval) -> Interval | None:
    """Values of a curve over `a`; None where nothing in `a` is in its range.

    A curve is monotone from each of its points to the next.
    """
    inside = meet(a, widened(*curve.ranges[0]))
    if inside is None:
        return None
    points, values = _points(curve)
    if not points:
        return EVERYTHING
    seen = [_value(curve, inside[0]), _value(curve, inside[1])]
    seen += [value for point, value in zip(points, values) if inside[0] < point < inside[1]]
    return widened(min(seen) - _slack_of(values), max(seen) + _slack_of(values))


def of_read(whole: Interval, curve: Interpolant, a: Interval) -> Interval | None:
    """What of `a` a curve has values in `whole` at."""
    inside = meet(a, widened(*curve.ranges[0]))
    points, values = _points(curve)
    if inside is None or not points:
        return inside
    slack = _slack_of(values)
    wanted = (whole[0] - slack, whole[1] + slack)
    found = None
    for (left, right), (first, last) in zip(pairwise(points), pairwise(values)):
        if meet(wanted, (min(first, last), max(first, last))) is not None:
            piece = _piece(curve, left, right, wanted)
            found = piece if found is None else hull(found, piece)
    return None if found is None else meet(inside, widened(*found))


@lru_cache(maxsize=256)
def _points(curve: Interpolant) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Points of a curve and its values there; none for what is not a plain curve of one argument."""
    if curve.shape != CURVE:
        return (), ()
    return curve.axes[0], tuple(_value(curve, point) for point in curve.axes[0])


def _slack_of(values: tuple[float, ...]) -> float:
    return 1e-12 * max(map(abs, values))


def _value(curve: Interpolant, x: float) -> float:
    low, high = curve.ranges[0]
    return curve.function(min(max(x, low), high))


def _piece(curve: Interpolant, left: float, right: float, wanted: Interval) -> Interval:
    """The part of a monotone piece with values in `wanted`, or a little more of it."""

    def below(x: float) -> bool:
        return _value(curve, x) < wanted[0]

    def above(x: float) -> bool:
        return _value(curve, x) > wanted[1]

    before, after = (below, above) if _value(curve, left) <= _value(curve, right) else (above, below)
    return _last(before, left, right), _last(after, right, left)


def _last(outside: Callable[[float], bool], start: float, end: float) -> float:
    """The last point outside on the way from `start` to `end`, which is not; `start` where that is not either."""
    if outside(start):
        for _ in range(_HALVINGS):
            middle = 0.5 * (start + end)
            start, end = (middle, end) if outside(middle) else (start, middle)
    return start
