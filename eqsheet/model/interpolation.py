"""Interpolants evaluated on plain floats.

A value that only rounding has carried past an end of the range, or past a step, counts as being on it: an
argument worked out as 2*15 m^3/h is the 30 m^3/h of the table.
"""

from __future__ import annotations

import math
from bisect import bisect_left, bisect_right
from collections.abc import Callable, Sequence

from eqsheet.model import interpolant as shapes
from eqsheet.model.interpolant import Interpolant, Numbers

Function = Callable[..., float]

#: How far past an end or a step counts as on it, relative to the largest number of the axis.
ON_THE_POINT = 1e-12
# Newton's steps and halvings for one inverse; halvings alone need about sixty.
_MOST_STEPS = 100


def slack(axis: Numbers) -> float:
    """How far past an end of an axis, or a step, counts as on it."""
    return ON_THE_POINT * max(abs(axis[0]), abs(axis[-1]))


def float_function(interpolant: Interpolant) -> Function:
    """The interpolant as a function of plain floats; nan gives nan.

    Raises
    ------
    ValueError
        The function does, outside the range.
    ZeroDivisionError
        The slope of an inverse does, where the curve is level.
    """
    return _MAKERS[interpolant.shape](interpolant)


def _place(axis: Numbers, a: float, tolerance: float) -> tuple[int, float]:
    """The interval an argument is in, and its distance from the left end of that."""
    if a > axis[-1]:
        if a > axis[-1] + tolerance:
            raise ValueError("above the range")
        a = axis[-1]
    elif a < axis[0]:
        if a < axis[0] - tolerance:
            raise ValueError("below the range")
        a = axis[0]
    i = min(bisect_right(axis, a) - 1, len(axis) - 2)
    return i, a - axis[i]


def _curve(interpolant: Interpolant) -> Function:
    (axis,), pieces = interpolant.axes, interpolant.pieces
    first, last, tolerance, most = axis[0], axis[-1], slack(axis), len(pieces) - 1

    def value(a: float) -> float:
        if first <= a < last:
            i = bisect_right(axis, a) - 1
            s = a - axis[i]
        elif a != a:
            return a
        else:
            i, s = _place(axis, a, tolerance)
        c0, c1, c2, c3 = pieces[i if i < most else most]
        return c0 + s * (c1 + s * (c2 + s * c3))

    return value


def _surface(interpolant: Interpolant) -> Function:
    (xs, ys), pieces = interpolant.axes, interpolant.pieces
    across = len(ys) - 1
    tolerances = slack(xs), slack(ys)

    def value(a: float, b: float) -> float:
        if a != a or b != b:
            return math.nan
        i, u = _place(xs, a, tolerances[0])
        j, v = _place(ys, b, tolerances[1])
        return bicubic(pieces[i * across + j], u, v)

    return value


def bicubic(c: Sequence[float], u: float, v: float) -> float:
    """Sum of c[4*k + l]*u^k*v^l."""
    total = 0.0
    for k in (12, 8, 4, 0):
        total = total * u + (c[k] + v * (c[k + 1] + v * (c[k + 2] + v * c[k + 3])))
    return total


def _steps(interpolant: Interpolant) -> Function:
    pieces = interpolant.pieces

    def value(*arguments: float) -> float:
        if any(a != a for a in arguments):
            return math.nan
        return pieces[step_at(interpolant, arguments)][0]

    return value


def step_at(interpolant: Interpolant, arguments: Sequence[float]) -> int:
    """Number of the piece that a stepped interpolant takes its value from.

    Raises
    ------
    ValueError
        An argument is above the range, or nan.
    """
    place = 0
    for axis, a in zip(interpolant.axes, arguments):
        i = bisect_left(axis, a - slack(axis)) if a == a else len(axis)
        if i == len(axis):
            raise ValueError("above the range")
        place = place * len(axis) + i
    return place


def _inverse(interpolant: Interpolant) -> Function:
    turned = _turned(interpolant)

    def value(t: float) -> float:
        if t != t:
            return t
        _, left, s = turned(t)
        return left + s

    return value


def _inverse_slope(interpolant: Interpolant) -> Function:
    turned, pieces = _turned(interpolant), interpolant.pieces

    def value(t: float) -> float:
        if t != t:
            return t
        i, _, s = turned(t)
        _, _, _, c1, c2, c3 = pieces[i]
        return 1.0 / (c1 + s * (2.0 * c2 + s * 3.0 * c3))

    return value


def _turned(interpolant: Interpolant) -> Callable[[float], tuple[int, float, float]]:
    """What finds the argument of a value: the piece it lies in, where that begins, and how far in."""
    (axis,), pieces = interpolant.axes, interpolant.pieces
    tolerance = slack(axis)

    def found(t: float) -> tuple[int, float, float]:
        i, rise = _place(axis, t, tolerance)
        return i, *_solved(pieces[i], axis[i] + rise, rise / (axis[i + 1] - axis[i]))

    return found


def _solved(piece: Numbers, target: float, share: float) -> tuple[float, float]:
    """Left end of an interval, and where in it the cubic takes the value: Newton's steps, else halving.

    Parameters
    ----------
    share : float
        How far from the smaller value to the larger one the target is; where straight lines would put it.
    """
    left, width, c0, c1, c2, c3 = piece
    rising = c0 + width * (c1 + width * (c2 + width * c3)) > c0
    low, high = 0.0, width
    s = width * (share if rising else 1.0 - share)
    for _ in range(_MOST_STEPS):
        gap = c0 + s * (c1 + s * (c2 + s * c3)) - target
        if gap == 0.0:
            break
        if (gap > 0.0) == rising:
            high = s
        else:
            low = s
        slope = c1 + s * (2.0 * c2 + s * 3.0 * c3)
        new = s - gap / slope if slope else math.inf
        if not low < new < high:
            new = 0.5 * (low + high)
        if new == s or not low < new < high:
            break
        s = new
    return left, s


_MAKERS: dict[str, Callable[[Interpolant], Function]] = {
    shapes.CURVE: _curve,
    shapes.SURFACE: _surface,
    shapes.STEPS: _steps,
    shapes.INVERSE: _inverse,
    shapes.INVERSE_SLOPE: _inverse_slope,
}


def value_or_nan(interpolant: Interpolant, *arguments: float) -> float:
    """Its value; nan outside the range, infinite where an inverse is vertical."""
    try:
        return interpolant.function(*arguments)
    except ValueError:
        return math.nan
    except ZeroDivisionError:
        return math.inf


def rounding_scale(interpolant: Interpolant, *arguments: float) -> float:
    """What the rounding error of a value is a small multiple of the unit of: the sum of the sizes of its terms.

    For an inverse it is that of the curve there, over its slope. nan outside the range.
    """
    try:
        return _scale(interpolant, arguments)
    except ValueError:
        return math.nan
    except ZeroDivisionError:
        return math.inf


def _scale(interpolant: Interpolant, arguments: Sequence[float]) -> float:
    shape, pieces = interpolant.shape, interpolant.pieces
    if any(a != a for a in arguments):
        return math.nan
    if shape == shapes.STEPS:
        return 0.0
    places = [_place(axis, a, slack(axis)) for axis, a in zip(interpolant.axes, arguments)]
    if shape == shapes.SURFACE:
        (i, u), (j, v) = places
        return bicubic([abs(c) for c in pieces[i * (len(interpolant.axes[1]) - 1) + j]], u, v)
    ((i, s),) = places
    if shape == shapes.CURVE:
        c0, c1, c2, c3 = map(abs, pieces[i])
        return c0 + s * (c1 + s * (c2 + s * c3))
    (axis,) = interpolant.axes
    left, s = _solved(pieces[i], axis[i] + s, s / (axis[i + 1] - axis[i]))
    _, _, c0, c1, c2, c3 = pieces[i]
    terms = abs(c0) + s * (abs(c1) + s * (abs(c2) + s * abs(c3)))
    return abs(left) + s + terms / abs(c1 + s * (2.0 * c2 + s * 3.0 * c3))
